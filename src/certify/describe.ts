import type { StateLabel } from "../refine/label.js";
import type { StateVector } from "./findings.js";

/** A state in words: its sharp labels, and its largest ket. */
export function describeState(
  labels: Readonly<Record<string, StateLabel>>,
  vector: StateVector,
  ket: (i: number) => string,
): string {
  const sharp = Object.entries(labels)
    .filter(([, label]) => label.status !== "not sharp")
    .map(([name, label]) => `${name}=${label.text}`);
  let best = 0;
  for (let k = 0; k < vector.kets.length; k++) if (weight(vector, k) > 1.0001 * weight(vector, best)) best = k;
  const share = weight(vector, best);
  const most = `${share > 0.9999 ? "" : "mostly "}|${ket(vector.kets[best] ?? 0)}⟩`;
  return sharp.length === 0 ? most : `${most} (${sharp.join(", ")})`;
}

function weight(vector: StateVector, k: number): number {
  const x = vector.re[k] ?? 0;
  const y = vector.im?.[k] ?? 0;
  return x * x + y * y;
}
