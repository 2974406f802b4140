import { parseArgs } from "node:util";
import type { FindOptions } from "../certify/find.js";
import { GoodBasisError } from "../errors.js";
import type { TableFormat } from "../report/format-table.js";

/** Options of the command line, checked as far as they can be without a problem. */
export interface Settings {
  readonly files: readonly string[];
  readonly help: boolean;
  readonly format: TableFormat;
  readonly out: string | undefined;
  readonly certificate: string | undefined;
  readonly force: boolean;
  readonly columns: readonly string[] | undefined;
  readonly basis: string | undefined;
  /** What overrides the options of the problem file. */
  readonly find: Omit<FindOptions, "onProgress">;
}

/** The options of the program; every verb takes some of them. */
export const OPTIONS = {
  format: { type: "string", short: "f" },
  out: { type: "string", short: "o" },
  force: { type: "boolean" },
  certificate: { type: "string" },
  columns: { type: "string" },
  basis: { type: "string" },
  levels: { type: "string" },
  depth: { type: "string" },
  resolution: { type: "string" },
  lambda: { type: "string" },
  help: { type: "boolean", short: "h" },
} as const;

/** The name of an option. */
export type OptionName = keyof typeof OPTIONS;

const FORMATS: readonly TableFormat[] = ["text", "markdown", "csv", "json", "latex"];

/**
 * Reads the arguments that follow a verb.
 *
 * @param allowed - the options that this verb takes
 * @throws GoodBasisError `option` - an unknown option, or a value of the wrong form
 */
export function readArguments(verb: string, args: readonly string[], allowed: readonly OptionName[]): Settings {
  const next = `see goodbasis ${verb} --help`;
  const { values, positionals, repeated } = parse(args, next);
  if (repeated !== undefined) {
    throw new GoodBasisError("option", `--${repeated} is given twice; give it once (${next})`, { option: repeated });
  }
  for (const name of Object.keys(values)) {
    if (name === "help" || allowed.some((known) => known === name)) continue;
    throw new GoodBasisError("option", `--${name} is no option of goodbasis ${verb}; ${next}`, { option: name });
  }
  const text = (name: OptionName): string | undefined => {
    const value = values[name];
    return typeof value === "string" ? value : undefined;
  };
  for (const [name, value] of Object.entries(values)) {
    if (typeof value !== "string" || value.trim() !== "") continue;
    throw new GoodBasisError("option", `--${name} is empty; give a value, or leave it out (${next})`, { option: name });
  }
  if (positionals.includes("")) throw new GoodBasisError("option", `the name of a file is empty; ${next}`);
  const columns = text("columns");
  return {
    files: positionals,
    help: values.help === true,
    force: values.force === true,
    format: readFormat(text("format") ?? "text"),
    out: text("out"),
    certificate: text("certificate"),
    columns: columns?.split(",").map((column) => column.trim()),
    basis: text("basis"),
    find: readFindOptions(text),
  };
}

interface Parsed {
  readonly values: Partial<Record<OptionName, string | boolean>>;
  readonly positionals: readonly string[];
  /** An option that stands there twice, of which one would be lost. */
  readonly repeated: string | undefined;
}

function parse(args: readonly string[], next: string): Parsed {
  try {
    const parsed = parseArgs({ args: [...args], options: OPTIONS, allowPositionals: true, strict: true, tokens: true });
    const names = parsed.tokens.flatMap((token) => (token.kind === "option" ? [token.name] : []));
    return { ...parsed, repeated: names.find((name, k) => names.indexOf(name) !== k) };
  } catch (error) {
    const lines = error instanceof Error ? error.message.split("\n") : ["the arguments cannot be read"];
    // the last line, where there are several, says how to write a value that begins with a dash
    const reasons = [...new Set([lines[0], lines.at(-1)])].map((line = "") =>
      line.replace(/\.$/, "").replace(/^To /, "to "),
    );
    throw new GoodBasisError("option", `${reasons.join("; ")}; ${next}`);
  }
}

function readFormat(text: string): TableFormat {
  const format = FORMATS.find((known) => known === text);
  if (format !== undefined) return format;
  throw new GoodBasisError("option", `--format ${text}: there is no such format; give ${FORMATS.join(", ")}`, {
    format: text,
  });
}

const DEPTHS = { labels: "labels", first: "first order", second: "second order", full: "full" } as const;

function readFindOptions(text: (name: OptionName) => string | undefined): Settings["find"] {
  const levels = text("levels");
  const depth = text("depth");
  const resolution = text("resolution");
  const lambda = text("lambda");
  return {
    ...(levels === undefined ? {} : { levels: readLevels(levels) }),
    ...(depth === undefined ? {} : { depth: readDepth(depth) }),
    ...(resolution === undefined ? {} : { resolution: readNumber("resolution", resolution) }),
    ...(lambda === undefined ? {} : { lambda: readNumber("lambda", lambda) }),
  };
}

function readDepth(text: string): (typeof DEPTHS)[keyof typeof DEPTHS] {
  const found = Object.entries(DEPTHS).find(([short, long]) => text === short || text === long);
  if (found !== undefined) return found[1];
  throw new GoodBasisError("option", `--depth ${text}: give ${Object.keys(DEPTHS).join(", ")}`, { depth: text });
}

function readNumber(name: string, text: string): number {
  const value = text.trim() === "" ? Number.NaN : Number(text);
  if (Number.isFinite(value)) return value;
  throw new GoodBasisError("option", `--${name} ${text}: give a number`, { [name]: text });
}

const NUMBER = "[+-]?(?:\\d+(?:\\.\\d+)?|\\.\\d+)(?:[eE][+-]?\\d+)?";
const WINDOW = new RegExp(`^(${NUMBER})\\.\\.(${NUMBER})$`);
const NEAREST = new RegExp(`^nearest:(${NUMBER})(?::(\\d+))?$`);
const LOWEST = /^lowest:(\d+)$/;

function readLevels(text: string): NonNullable<FindOptions["levels"]> {
  if (text === "all") return "all";
  const lowest = LOWEST.exec(text);
  if (lowest !== null && Number(lowest[1]) >= 1) return { lowest: Number(lowest[1]) };
  const nearest = NEAREST.exec(text);
  if (nearest !== null && Number.isFinite(Number(nearest[1])) && Number(nearest[2] ?? 1) >= 1) {
    const count = nearest[2] === undefined ? {} : { count: Number(nearest[2]) };
    return { nearest: Number(nearest[1]), ...count };
  }
  const window = WINDOW.exec(text);
  if (window !== null && Number(window[1]) <= Number(window[2]))
    return { from: Number(window[1]), to: Number(window[2]) };
  const message = `--levels ${text}: give all, lowest:3, nearest:1350, nearest:1350:2 or 0..2000 (from 1 level on, windows upwards)`;
  throw new GoodBasisError("option", message, { levels: text });
}
