/**
 * Fixed-point arithmetic on BigInt, the oracle of the bounds: a real number is a whole multiple of 2^−BITS.
 *
 * Doubles go in exactly (down to 2^−BITS); products lose at most one unit of 2^−BITS. It shares nothing with the library.
 */
const BITS = 320n;

/** 1 in fixed point. */
export const ONE: bigint = 1n << BITS;

/** What an exact comparison forgives: 2^−300, where rounding starts at 2^−53. */
export const DUST: bigint = 1n << (BITS - 300n);

const view = new DataView(new ArrayBuffer(8));

/** A double times 2^shift, in fixed point; bits below 2^−BITS are cut off. */
export function fixed(x: number, shift = 0): bigint {
  if (x === 0) return 0n;
  if (!Number.isFinite(x)) throw new RangeError(`${x} is no finite number`);
  view.setFloat64(0, x);
  const bits = view.getBigUint64(0);
  const exponent = Number((bits >> 52n) & 0x7ffn);
  const fraction = bits & 0xfffffffffffffn;
  const mantissa = exponent === 0 ? fraction : fraction | (1n << 52n);
  const signed = bits >> 63n === 1n ? -mantissa : mantissa;
  const power = BigInt((exponent === 0 ? 1 : exponent) - 1075 + shift) + BITS;
  return power >= 0n ? signed << power : signed >> -power;
}

/** The nearest double or a neighbour of it, for messages and margins. */
export function double(x: bigint): number {
  const size = x < 0n ? -x : x;
  const bits = size.toString(2).length;
  const drop = BigInt(Math.max(0, bits - 64));
  const value = Number(size >> drop) * 2 ** (Number(drop) - Number(BITS));
  return x < 0n ? -value : value;
}

export const times = (a: bigint, b: bigint): bigint => (a * b) >> BITS;
export const over = (a: bigint, b: bigint): bigint => (a << BITS) / b;
export const size = (a: bigint): bigint => (a < 0n ? -a : a);
export const larger = (a: bigint, b: bigint): bigint => (a > b ? a : b);

/** ⌊√x⌋ in fixed point, by Newton's iteration. */
export function root(x: bigint): bigint {
  if (x <= 0n) return 0n;
  const target = x << BITS;
  let guess = 1n << BigInt((target.toString(2).length + 1) >> 1);
  for (;;) {
    const next = (guess + target / guess) >> 1n;
    if (next >= guess) return guess;
    guess = next;
  }
}

/** A complex matrix in fixed point, row by row. */
export interface FixedMatrix {
  readonly rows: number;
  readonly cols: number;
  readonly re: bigint[];
  readonly im: bigint[];
}

export function zeros(rows: number, cols: number): FixedMatrix {
  return { rows, cols, re: new Array<bigint>(rows * cols).fill(0n), im: new Array<bigint>(rows * cols).fill(0n) };
}

/** The matrix of a rule. */
export function matrix(
  rows: number,
  cols: number,
  entry: (i: number, j: number) => readonly [bigint, bigint],
): FixedMatrix {
  const out = zeros(rows, cols);
  for (let i = 0; i < rows; i++) {
    for (let j = 0; j < cols; j++) {
      const [x, y] = entry(i, j);
      out.re[i * cols + j] = x;
      out.im[i * cols + j] = y;
    }
  }
  return out;
}

export function identity(n: number): FixedMatrix {
  return matrix(n, n, (i, j) => [i === j ? ONE : 0n, 0n]);
}

/** Element (i, j). */
export function at(a: FixedMatrix, i: number, j: number): readonly [bigint, bigint] {
  return [a.re[i * a.cols + j] ?? 0n, a.im[i * a.cols + j] ?? 0n];
}

export function product(a: FixedMatrix, b: FixedMatrix): FixedMatrix {
  return matrix(a.rows, b.cols, (i, j) => {
    let x = 0n;
    let y = 0n;
    for (let k = 0; k < a.cols; k++) {
      const [ar, ai] = at(a, i, k);
      const [br, bi] = at(b, k, j);
      x += ar * br - ai * bi;
      y += ar * bi + ai * br;
    }
    return [x >> BITS, y >> BITS];
  });
}

export function adjoint(a: FixedMatrix): FixedMatrix {
  return matrix(a.cols, a.rows, (i, j) => {
    const [x, y] = at(a, j, i);
    return [x, -y];
  });
}

export function minus(a: FixedMatrix, b: FixedMatrix): FixedMatrix {
  return { ...a, re: a.re.map((x, k) => x - (b.re[k] ?? 0n)), im: a.im.map((y, k) => y - (b.im[k] ?? 0n)) };
}

/** The columns chosen, or rows and columns chosen. */
export function columns(a: FixedMatrix, chosen: readonly number[]): FixedMatrix {
  return matrix(a.rows, chosen.length, (i, j) => at(a, i, chosen[j] ?? 0));
}

export function block(a: FixedMatrix, rows: readonly number[], cols: readonly number[]): FixedMatrix {
  return matrix(rows.length, cols.length, (i, j) => at(a, rows[i] ?? 0, cols[j] ?? 0));
}

/** |a_ij|. */
export function modulus(a: FixedMatrix, i: number, j: number): bigint {
  const [x, y] = at(a, i, j);
  return root(times(x, x) + times(y, y));
}

export function frobenius(a: FixedMatrix): bigint {
  let sum = 0n;
  a.re.forEach((x, k) => {
    const y = a.im[k] ?? 0n;
    sum += x * x + y * y;
  });
  return root(sum >> BITS);
}

/** √(λ_max(A†A)). */
export function norm2(a: FixedMatrix): bigint {
  const { values } = eigen(product(adjoint(a), a));
  return root(values.reduce(larger, 0n));
}

/** Largest |eigenvalue| of a Hermitian matrix. */
export function spectralRadius(a: FixedMatrix): bigint {
  return eigen(a).values.reduce((most, x) => larger(most, size(x)), 0n);
}

/** The unitary polar factor of a matrix whose columns are nearly orthonormal (Newton and Schulz). */
export function polar(a: FixedMatrix): FixedMatrix {
  let u = a;
  for (let step = 0; step < 7; step++) {
    const gram = product(adjoint(u), u);
    const factor = matrix(gram.rows, gram.cols, (i, j) => {
      const [x, y] = at(gram, i, j);
      return [((i === j ? 3n * ONE : 0n) - x) / 2n, -y / 2n];
    });
    u = product(u, factor);
  }
  return u;
}

/** Eigenvalues, ascending, and eigenvectors as columns. */
export interface FixedEigen {
  readonly values: readonly bigint[];
  readonly vectors: FixedMatrix;
}

/** A Hermitian matrix diagonalised by Jacobi's rotations to the last digits (Golub and Van Loan, Matrix Computations, §8.5). */
export function eigen(of: FixedMatrix): FixedEigen {
  const n = of.rows;
  const a: FixedMatrix = { ...of, re: [...of.re], im: [...of.im] };
  const v = identity(n);
  const floor = larger(frobenius(of), 1n) >> (BITS - 24n);
  for (let sweep = 0; sweep < 40; sweep++) {
    let turned = false;
    for (let p = 0; p < n; p++) {
      for (let q = p + 1; q < n; q++) {
        const [x, y] = at(a, p, q);
        // raised to about 1, so that the phase has modulus 1 to the last digits however small the element is
        const raise = BITS - BigInt(larger(size(x), size(y)).toString(2).length);
        const [high, wide] = raise > 0n ? [x << raise, y << raise] : [x, y];
        const length = root(times(high, high) + times(wide, wide));
        const r = raise > 0n ? length >> raise : length;
        if (r <= floor + 16n) continue;
        turned = true;
        const phase: readonly [bigint, bigint] = [over(high, length), over(-wide, length)];
        const tau = over((a.re[q * n + q] ?? 0n) - (a.re[p * n + p] ?? 0n), 2n * r);
        const t = over(tau < 0n ? -ONE : ONE, size(tau) + root(ONE + times(tau, tau)));
        const c = over(ONE, root(ONE + times(t, t)));
        const s = times(t, c);
        turnColumns(a, p, q, c, s, phase);
        turnRows(a, p, q, c, s, phase);
        turnColumns(v, p, q, c, s, phase);
      }
    }
    if (!turned) break;
  }
  const order = Array.from({ length: n }, (_, k) => k).sort((k, l) => {
    const difference = (a.re[k * n + k] ?? 0n) - (a.re[l * n + l] ?? 0n);
    return difference < 0n ? -1 : difference > 0n ? 1 : k - l;
  });
  return { values: order.map((k) => a.re[k * n + k] ?? 0n), vectors: columns(v, order) };
}

function turnColumns(
  a: FixedMatrix,
  p: number,
  q: number,
  c: bigint,
  s: bigint,
  [e, f]: readonly [bigint, bigint],
): void {
  for (let i = 0; i < a.rows; i++) {
    const [x, y] = at(a, i, p);
    const [u, w] = at(a, i, q);
    const g = (u * e - w * f) >> BITS;
    const h = (u * f + w * e) >> BITS;
    a.re[i * a.cols + p] = (c * x - s * g) >> BITS;
    a.im[i * a.cols + p] = (c * y - s * h) >> BITS;
    a.re[i * a.cols + q] = (s * x + c * g) >> BITS;
    a.im[i * a.cols + q] = (s * y + c * h) >> BITS;
  }
}

function turnRows(a: FixedMatrix, p: number, q: number, c: bigint, s: bigint, [e, f]: readonly [bigint, bigint]): void {
  for (let j = 0; j < a.cols; j++) {
    const [x, y] = at(a, p, j);
    const [u, w] = at(a, q, j);
    const g = (u * e + w * f) >> BITS;
    const h = (w * e - u * f) >> BITS;
    a.re[p * a.cols + j] = (c * x - s * g) >> BITS;
    a.im[p * a.cols + j] = (c * y - s * h) >> BITS;
    a.re[q * a.cols + j] = (s * x + c * g) >> BITS;
    a.im[q * a.cols + j] = (s * y + c * h) >> BITS;
  }
}
