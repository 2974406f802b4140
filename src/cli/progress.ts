import type { FindOptions } from "../certify/find.js";
import type { Terminal } from "./terminal.js";

type Listener = NonNullable<FindOptions["onProgress"]>;

const SILENT_FOR = 1000;
const STEP = 200;
const STAGES = { audit: "commutators", labels: "labels", levels: "levels" } as const;

/**
 * Runs `work` and, where complaints go to a screen and it takes more than a second, shows there how far it is; the line is
 * wiped at the end.
 */
export function withProgress<T>(terminal: Terminal, work: (onProgress: Listener | undefined) => T): T {
  if (!terminal.interactive) return work(undefined);
  const begun = terminal.now();
  let last = begun + SILENT_FOR - STEP;
  let shown = false;
  try {
    return work(({ stage, done, of }) => {
      const now = terminal.now();
      if (now - last < STEP) return;
      last = now;
      shown = true;
      const share = of > 1 ? ` ${done} of ${of}` : "";
      terminal.complain(`\r\u001b[K${STAGES[stage]}${share} …`);
    });
  } finally {
    if (shown) terminal.complain("\r\u001b[K");
  }
}
