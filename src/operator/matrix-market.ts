import { GoodBasisError } from "../errors.js";
import { requireOptions, shown } from "../misuse.js";
import { wrongOperand } from "./checks.js";
import { Operator, type OperatorOptions } from "./operator.js";
import { readTriplets, type Triplet, withUncertainty } from "./read.js";

type Field = "real" | "complex" | "integer" | "pattern";
type Symmetry = "general" | "symmetric" | "skew-symmetric" | "hermitian";

interface Header {
  readonly format: "coordinate" | "array";
  readonly field: Field;
  readonly symmetry: Symmetry;
}

/** Options of {@link readMatrixMarket}. */
export interface MatrixMarketOptions extends OperatorOptions {
  /** Name of the file, for messages. */
  readonly name?: string | undefined;
}

const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)([eEdD][+-]?\d+)?$/;

/**
 * Reads a square matrix in Matrix Market exchange format: `coordinate` or `array`; `real`, `complex`, `integer` or `pattern`;
 * `general`, `symmetric`, `skew-symmetric` or `hermitian` (Boisvert, Pozo and Remington, The Matrix Market Exchange Formats,
 * NISTIR 5935, 1996). The 1-based indices of the file become 0-based.
 *
 * Entries of integer and pattern files count as exact, others as known to half a unit in the last place, unless an uncertainty is
 * stated.
 *
 * @param text - the contents of the file
 * @param options - name of the file for messages, uncertainty of the entries
 * @throws GoodBasisError `file` - malformed, or an entry that is given twice (the format leaves its meaning open); the message and
 *   `details` name line and field
 * @throws GoodBasisError `option` - a negative or infinite uncertainty
 *
 * @example
 * ```ts
 * import { readMatrixMarket } from "goodbasis";
 *
 * const text = "%%MatrixMarket matrix coordinate real symmetric\n2 2 2\n1 1 0.5\n2 1 -3\n";
 * console.log(readMatrixMarket(text).entry(0, 1).re); // -3
 * ```
 */
export function readMatrixMarket(text: string, options: MatrixMarketOptions = {}): Operator {
  requireOptions("readMatrixMarket", options, ["name", "uncertainty"]);
  if (typeof text !== "string") {
    const message = `readMatrixMarket: expected the text of a Matrix Market file, got ${shown(text)}; pass the contents, read as UTF-8`;
    throw new GoodBasisError("file", message, {});
  }
  return new Reader(text, options.name ?? "matrix").read(options);
}

class Reader {
  readonly #lines: readonly string[];
  readonly #name: string;
  #at = 0;

  constructor(text: string, name: string) {
    this.#lines = text.replace(/^\uFEFF/, "").split(/\r\n|\n|\r/);
    this.#name = name;
  }

  read(options: MatrixMarketOptions): Operator {
    const header = this.#header();
    const size = this.#size(header);
    const entries = header.format === "array" ? this.#array(header, size.n) : this.#coordinates(header, size);
    const extra = this.#next();
    if (extra !== undefined) throw this.#error("entries", "nothing after the last entry", extra.join(" "));
    const core = readTriplets("readMatrixMarket", size.n, entries);
    const whole = header.field === "integer" || header.field === "pattern";
    const { csr, radius } = withUncertainty(
      "readMatrixMarket",
      core,
      options.uncertainty ?? (whole ? "exact" : undefined),
    );
    return Operator.fromCsr(csr, radius);
  }

  #header(): Header {
    const words = (this.#lines[0] ?? "").trim().toLowerCase().split(/\s+/);
    this.#at = 1;
    const [banner, object, format, field, symmetry] = words;
    if (banner !== "%%matrixmarket") throw this.#error("banner", '"%%MatrixMarket matrix …"', banner ?? "");
    if (object !== "matrix") throw this.#error("object", '"matrix"', object ?? "");
    if (format !== "coordinate" && format !== "array") throw this.#error("format", "coordinate or array", format ?? "");
    if (!isField(field) || (field === "pattern" && format === "array")) {
      throw this.#error("field", "real, complex, integer or (coordinate only) pattern", field ?? "");
    }
    if (!isSymmetry(symmetry) || (symmetry === "hermitian" && field !== "complex")) {
      const expected = "general, symmetric, skew-symmetric or (complex only) hermitian";
      throw this.#error("symmetry", expected, symmetry ?? "");
    }
    if (symmetry === "skew-symmetric" && field === "pattern") {
      throw this.#error("symmetry", "general or symmetric for a pattern", symmetry);
    }
    return { format, field, symmetry };
  }

  #size(header: Header): { n: number; count: number } {
    const words = this.#next();
    const wanted = header.format === "array" ? 2 : 3;
    if (words === undefined || words.length !== wanted) {
      const expected = wanted === 2 ? "rows and columns" : "rows, columns and number of entries";
      throw this.#error("size", expected, words?.join(" ") ?? "the end of the file");
    }
    const rows = this.#whole("rows", words[0], 1);
    const columns = this.#whole("columns", words[1], 1);
    if (rows !== columns) throw this.#error("size", "a square matrix", `${rows} × ${columns}`);
    return { n: rows, count: wanted === 2 ? 0 : this.#whole("entries", words[2], 0) };
  }

  #coordinates(header: Header, size: { n: number; count: number }): Triplet[] {
    const entries: Triplet[] = [];
    const seen = new Set<number>();
    const wanted = 2 + numbersPerEntry(header.field);
    for (let k = 0; k < size.count; k++) {
      const words = this.#next();
      if (words?.length !== wanted) {
        throw this.#error(
          "entry",
          `${wanted} fields (entry ${k + 1} of ${size.count})`,
          words?.join(" ") ?? "the end of the file",
        );
      }
      const row = this.#whole("row", words[0], 1, size.n) - 1;
      const col = this.#whole("column", words[1], 1, size.n) - 1;
      if (seen.has(row * size.n + col))
        throw this.#error("entry", "every place once", `(${row + 1}, ${col + 1}) again`);
      seen.add(row * size.n + col);
      if (header.symmetry !== "general" && row < col) {
        throw this.#error("entry", `the lower triangle only (${header.symmetry})`, `(${row + 1}, ${col + 1})`);
      }
      this.#push(entries, header, row, col, words.slice(2));
    }
    return entries;
  }

  #array(header: Header, n: number): Triplet[] {
    const entries: Triplet[] = [];
    const wanted = numbersPerEntry(header.field);
    for (let col = 0; col < n; col++) {
      const first = header.symmetry === "general" ? 0 : header.symmetry === "skew-symmetric" ? col + 1 : col;
      for (let row = first; row < n; row++) {
        const words = this.#next();
        if (words?.length !== wanted) {
          const expected = `${wanted} number(s) for entry (${row + 1}, ${col + 1})`;
          throw this.#error("value", expected, words?.join(" ") ?? "the end of the file");
        }
        this.#push(entries, header, row, col, words);
      }
    }
    return entries;
  }

  #push(entries: Triplet[], header: Header, row: number, col: number, words: readonly string[]): void {
    const { field, symmetry } = header;
    const re =
      field === "pattern" ? 1 : field === "integer" ? this.#whole("value", words[0]) : this.#real("value", words[0]);
    const im = field === "complex" ? this.#real("imaginary part", words[1]) : 0;
    if (row === col) {
      if (symmetry === "hermitian" && im !== 0)
        throw this.#error("imaginary part", "0 on a Hermitian diagonal", `${im}`);
      if (symmetry === "skew-symmetric")
        throw this.#error("entry", "nothing on a skew-symmetric diagonal", `(${row + 1}, ${col + 1})`);
    }
    entries.push([row, col, re, im]);
    if (row === col || symmetry === "general") return;
    if (symmetry === "symmetric") entries.push([col, row, re, im]);
    else if (symmetry === "hermitian") entries.push([col, row, re, -im]);
    else entries.push([col, row, -re, -im]);
  }

  /** The words of the next line that is neither empty nor a comment. */
  #next(): string[] | undefined {
    while (this.#at < this.#lines.length) {
      const line = (this.#lines[this.#at++] ?? "").trim();
      if (line !== "" && !line.startsWith("%")) return line.split(/\s+/);
    }
    return undefined;
  }

  #whole(field: string, word: string | undefined, least = -(2 ** 53), most = 2 ** 53): number {
    const value = word !== undefined && /^[+-]?\d+$/.test(word) ? Number(word) : Number.NaN;
    if (value >= least && value <= most) return value;
    const range = least > -(2 ** 53) ? ` from ${least} on${most < 2 ** 53 ? ` to ${most}` : ""}` : " below 2^53";
    throw this.#error(field, `a whole number${range}`, word ?? "nothing");
  }

  #real(field: string, word: string | undefined): number {
    const value = word !== undefined && NUMBER.test(word) ? Number(word.replace(/[dD]/, "e")) : Number.NaN;
    if (Number.isFinite(value)) return value;
    throw this.#error(field, "a finite number", word ?? "nothing");
  }

  #error(field: string, expected: string, came: string): GoodBasisError {
    const line = Math.max(1, this.#at);
    const message = `readMatrixMarket: ${this.#name}, line ${line}, ${field}: expected ${expected}, got "${came}"`;
    return new GoodBasisError("file", message, { name: this.#name, line, field });
  }
}

function isField(word: string | undefined): word is Field {
  return word === "real" || word === "complex" || word === "integer" || word === "pattern";
}

function isSymmetry(word: string | undefined): word is Symmetry {
  return word === "general" || word === "symmetric" || word === "skew-symmetric" || word === "hermitian";
}

function numbersPerEntry(field: Field): number {
  return field === "pattern" ? 0 : field === "complex" ? 2 : 1;
}

/**
 * Writes an operator in Matrix Market exchange format, `coordinate`, `general`, `real` or `complex`. Values are written so that
 * they read back as the same bits; radii are not written.
 *
 * @param operator - the operator
 * @returns the text of the file
 * @throws GoodBasisError `shape` - not an operator
 *
 * @example
 * ```ts
 * import { Operator, toMatrixMarket } from "goodbasis";
 *
 * console.log(toMatrixMarket(Operator.diagonal([1, 2])));
 * ```
 */
export function toMatrixMarket(operator: Operator): string {
  if (!(operator instanceof Operator)) throw wrongOperand("toMatrixMarket", operator);
  const { csr, n } = operator;
  const lines = [`%%MatrixMarket matrix coordinate ${csr.im === undefined ? "real" : "complex"} general`];
  lines.push(`${n} ${n} ${csr.col.length}`);
  for (let row = 0; row < n; row++) {
    const end = csr.ptr[row + 1] as number;
    for (let e = csr.ptr[row] as number; e < end; e++) {
      const place = `${row + 1} ${(csr.col[e] as number) + 1} ${csr.re[e] as number}`;
      lines.push(csr.im === undefined ? place : `${place} ${csr.im[e] as number}`);
    }
  }
  return `${lines.join("\n")}\n`;
}
