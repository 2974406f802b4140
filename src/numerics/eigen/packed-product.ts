/**
 * The dense real matrix product under the eigensolver: packed panels and a 4 × 4 block of sums held in registers.
 *
 * Blocking for the cache and packing follow Goto and van de Geijn, ACM Trans. Math. Softw. 34, 12 (2008).
 */

/** A matrix inside a longer array: entry (i, j) is `data[at + i * rowStep + j * colStep]`. */
export interface Panel {
  readonly data: Float64Array;
  readonly at: number;
  readonly rowStep: number;
  readonly colStep: number;
}

/** Depth of a packed panel: a strip of 4 rows and one of 4 columns stay in the first-level cache. */
const DEPTH = 192;
/** Rows of A packed at a time. */
const ROWS = 64;
/** Columns of B packed at a time. */
const COLS = 256;

/** Length of the scratch array that {@link addProduct} asks for. */
export const PRODUCT_SCRATCH: number = DEPTH * COLS + DEPTH * ROWS + 16;

/**
 * Adds a multiple of a product: C ← C + alpha A B.
 *
 * @param m - rows of A and of C
 * @param n - columns of B and of C
 * @param k - columns of A, rows of B
 * @param alpha - factor of the product
 * @param a - m × k
 * @param b - k × n
 * @param c - m × n, changed in place; must not overlap A or B
 * @param scratch - at least {@link PRODUCT_SCRATCH} numbers, overwritten
 */
export function addProduct(
  m: number,
  n: number,
  k: number,
  alpha: number,
  a: Panel,
  b: Panel,
  c: Panel,
  scratch: Float64Array,
): void {
  const packedA = DEPTH * COLS;
  for (let col = 0; col < n; col += COLS) {
    const cols = Math.min(COLS, n - col);
    for (let inner = 0; inner < k; inner += DEPTH) {
      const depth = Math.min(DEPTH, k - inner);
      const bStart = b.at + inner * b.rowStep + col * b.colStep;
      pack(b.data, bStart, b.colStep, b.rowStep, cols, depth, 1, scratch, 0);
      for (let row = 0; row < m; row += ROWS) {
        const rows = Math.min(ROWS, m - row);
        const aStart = a.at + row * a.rowStep + inner * a.colStep;
        pack(a.data, aStart, a.rowStep, a.colStep, rows, depth, alpha, scratch, packedA);
        for (let j = 0; j < cols; j += 4) {
          for (let i = 0; i < rows; i += 4) {
            const at = c.at + (row + i) * c.rowStep + (col + j) * c.colStep;
            block(scratch, packedA + i * depth, j * depth, depth, c, at, rows - i, cols - j);
          }
        }
      }
    }
  }
}

/** Packs lines in strips of four, padded with zeros: within a strip, the four entries of one depth lie side by side. */
function pack(
  from: Float64Array,
  at: number,
  lineStep: number,
  depthStep: number,
  lines: number,
  depth: number,
  factor: number,
  to: Float64Array,
  start: number,
): void {
  let out = start;
  for (let line = 0; line < lines; line += 4) {
    let p = at + line * lineStep;
    if (lines - line >= 4) {
      for (let q = 0; q < depth; q++) {
        to[out] = factor * (from[p] as number);
        to[out + 1] = factor * (from[p + lineStep] as number);
        to[out + 2] = factor * (from[p + 2 * lineStep] as number);
        to[out + 3] = factor * (from[p + 3 * lineStep] as number);
        out += 4;
        p += depthStep;
      }
    } else {
      for (let q = 0; q < depth; q++) {
        for (let r = 0; r < 4; r++) to[out + r] = line + r < lines ? factor * (from[p + r * lineStep] as number) : 0;
        out += 4;
        p += depthStep;
      }
    }
  }
}

/** Adds the product of one packed strip of A with one of B to at most 4 × 4 entries of C. */
function block(
  packed: Float64Array,
  aStart: number,
  bStart: number,
  depth: number,
  c: Panel,
  at: number,
  rows: number,
  cols: number,
): void {
  let c00 = 0;
  let c01 = 0;
  let c02 = 0;
  let c03 = 0;
  let c10 = 0;
  let c11 = 0;
  let c12 = 0;
  let c13 = 0;
  let c20 = 0;
  let c21 = 0;
  let c22 = 0;
  let c23 = 0;
  let c30 = 0;
  let c31 = 0;
  let c32 = 0;
  let c33 = 0;
  let q = bStart | 0;
  const end = (aStart + 4 * depth) | 0;
  for (let p = aStart | 0; p < end; p = (p + 4) | 0) {
    const b0 = packed[q] as number;
    const b1 = packed[q + 1] as number;
    const b2 = packed[q + 2] as number;
    const b3 = packed[q + 3] as number;
    let x = packed[p] as number;
    c00 += x * b0;
    c01 += x * b1;
    c02 += x * b2;
    c03 += x * b3;
    x = packed[p + 1] as number;
    c10 += x * b0;
    c11 += x * b1;
    c12 += x * b2;
    c13 += x * b3;
    x = packed[p + 2] as number;
    c20 += x * b0;
    c21 += x * b1;
    c22 += x * b2;
    c23 += x * b3;
    x = packed[p + 3] as number;
    c30 += x * b0;
    c31 += x * b1;
    c32 += x * b2;
    c33 += x * b3;
    q = (q + 4) | 0;
  }
  const { data, rowStep, colStep } = c;
  addRow(data, at, colStep, cols, c00, c01, c02, c03);
  if (rows > 1) addRow(data, at + rowStep, colStep, cols, c10, c11, c12, c13);
  if (rows > 2) addRow(data, at + 2 * rowStep, colStep, cols, c20, c21, c22, c23);
  if (rows > 3) addRow(data, at + 3 * rowStep, colStep, cols, c30, c31, c32, c33);
}

/** Adds up to four sums to one row of C. */
function addRow(
  c: Float64Array,
  at: number,
  step: number,
  cols: number,
  s0: number,
  s1: number,
  s2: number,
  s3: number,
): void {
  c[at] = (c[at] as number) + s0;
  if (cols > 1) c[at + step] = (c[at + step] as number) + s1;
  if (cols > 2) c[at + 2 * step] = (c[at + 2 * step] as number) + s2;
  if (cols > 3) c[at + 3 * step] = (c[at + 3 * step] as number) + s3;
}
