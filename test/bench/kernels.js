// Times the numerical kernels beside NumPy and SciPy (where Python has them, one thread) and ml-matrix.
//
//   npm run build && node test/bench/kernels.js [part of a row's name] [seconds a row]
//
// Candidates take turns inside one process, and the minimum of each counts: what else the machine does then strikes all
// of them alike, and rarely the minimum.

import { spawn } from "node:child_process";
import { availableParallelism, loadavg } from "node:os";
import { createInterface } from "node:readline";
import { fileURLToPath } from "node:url";
import { EigenvalueDecomposition, Matrix } from "ml-matrix";
import { nodeWorker } from "../../dist/cli/node-worker.js";
import {
  batchedHermitianEigen,
  commutator,
  hermitianEigen,
  KernelPool,
  product,
  SparseArena,
} from "../../dist/numerics/kernels.js";
import { add, fromTriplets, transpose } from "../../dist/numerics/sparse.js";

/** Answers one JSON request a line: prepares a case, or runs it once and tells the milliseconds. */
const REFERENCE = `
import json, sys, time
import numpy as np
try:
    import scipy.sparse as sparse
except ImportError:
    sparse = None

def hermitian(rng, shape, real=False):
    a = rng.standard_normal(shape) + (0 if real else 1j * rng.standard_normal(shape))
    return a + a.swapaxes(-1, -2).conj()

def case(kind, n, count):
    rng = np.random.default_rng(1)
    if kind == "sparse":
        if sparse is None:
            return None
        rows = np.repeat(np.arange(n), count)
        a, b = (sparse.csr_matrix((rng.standard_normal(n * count), (rows, rng.integers(0, n, n * count))), shape=(n, n))
                for _ in range(2))
        return lambda: a @ b - b @ a
    if kind == "product":
        a, b = hermitian(rng, (n, n)), hermitian(rng, (n, n))
        return lambda: a @ b
    if kind == "distinct":
        q, _ = np.linalg.qr(hermitian(rng, (n, n)))
        a = (q * (np.arange(n) % count)) @ q.conj().T
        a = a + a.conj().T
    elif kind == "batch":
        a = hermitian(rng, (count, n, n))
    else:
        a = hermitian(rng, (n, n), kind == "real")
    return lambda: np.linalg.eigh(a)

run = None
print(json.dumps([np.__version__, sparse is not None]), flush=True)
for line in sys.stdin:
    request = json.loads(line)
    if request is None:
        begun = time.perf_counter()
        run()
        print(json.dumps(1000 * (time.perf_counter() - begun)), flush=True)
    else:
        run = case(*request)
        print(json.dumps(run is not None), flush=True)
`;

/** A Python process with NumPy on one thread, or undefined where there is none. */
async function startReference() {
  const one = { OPENBLAS_NUM_THREADS: "1", OMP_NUM_THREADS: "1", MKL_NUM_THREADS: "1" };
  const python = spawn("python3", ["-c", REFERENCE], {
    env: { ...process.env, ...one },
    stdio: ["pipe", "pipe", "ignore"],
  });
  python.on("error", () => undefined);
  python.stdin.on("error", () => undefined);
  const lines = createInterface({ input: python.stdout })[Symbol.asyncIterator]();
  const next = async () => {
    const { value, done } = await lines.next();
    return done ? undefined : JSON.parse(value);
  };
  const found = await next();
  if (found === undefined) return undefined;
  const [version, hasSciPy] = found;
  /** @param {unknown} request */
  const ask = (request) => {
    python.stdin.write(`${JSON.stringify(request)}\n`);
    return next();
  };
  return {
    version,
    hasSciPy,
    /** @param {readonly [kind: string, n: number, count: number]} request */
    prepare: (request) => ask(request),
    run: () => ask(null),
    end: () => python.stdin.end(),
  };
}

/**
 * Uniform numbers in [−1/2, 1/2), always the same (mulberry32, a value from memory).
 *
 * @param {number} seed
 */
function generator(seed) {
  let state = seed;
  return () => {
    state = (state + 0x6d2b79f5) | 0;
    let t = Math.imul(state ^ (state >>> 15), state | 1);
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61);
    return ((t ^ (t >>> 14)) >>> 0) / 2 ** 32 - 0.5;
  };
}

/**
 * Random Hermitian matrices one after the other.
 *
 * @param {number} n
 * @param {boolean} complex
 * @param {number} count
 * @param {(i: number, j: number) => boolean} keep - which entries of the lower triangle are not zero
 */
function hermitian(n, complex, count = 1, keep = () => true) {
  const next = generator(n + count);
  const re = new Float64Array(count * n * n);
  const im = complex ? new Float64Array(count * n * n) : undefined;
  for (let start = 0; start < re.length; start += n * n) {
    for (let i = 0; i < n; i++) {
      for (let j = 0; j <= i; j++) {
        if (!keep(i, j)) continue;
        const x = next();
        re[start + i * n + j] = x;
        re[start + j * n + i] = x;
        if (im === undefined || i === j) continue;
        const y = next();
        im[start + i * n + j] = y;
        im[start + j * n + i] = -y;
      }
    }
  }
  return { n, re, im };
}

/**
 * A complex Hermitian matrix with the eigenvalues 0 … kinds − 1, conjugated by random eigenvectors.
 *
 * @param {number} n
 * @param {number} kinds
 */
function distinct(n, kinds) {
  const random = hermitian(n, true);
  const { re, im = zeros(n) } = hermitianEigen(n, random.re, random.im);
  /** @param {Float64Array} m */
  const scaled = (m) =>
    transposed(
      n,
      m.map((x, k) => x * (Math.floor(k / n) % kinds)),
    );
  // Rows of `re` and `im` are eigenvectors v_k: Σ_k λ_k v_k v_k†, as (Vᵀ λ) times the conjugate of V.
  const { value } = product({ n, re: scaled(re), im: scaled(im) }, { n, re, im: im.map((y) => -y) });
  const whole = { n, re: value.re, im: value.im ?? zeros(n) };
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) {
      whole.re[j * n + i] = Number(whole.re[i * n + j]);
      whole.im[j * n + i] = -Number(whole.im[i * n + j]);
    }
  }
  return whole;
}

/** @param {number} n */
const zeros = (n) => new Float64Array(n * n);

/**
 * @param {number} n
 * @param {Float64Array} m
 */
const transposed = (n, m) => m.map((_, k) => Number(m[(k % n) * n + Math.floor(k / n)]));

/** @typedef {{ readonly n: number, readonly re: Float64Array, readonly im: Float64Array | undefined }} Square */

/**
 * The real symmetric matrix of twice the order, [[A, −B], [B, A]], for ml-matrix; a real one as it is.
 *
 * @param {Square} matrix
 * @param {number} start - index of its first entry
 */
function forMlMatrix({ n, re, im }, start = 0) {
  const size = im === undefined ? n : 2 * n;
  const rows = Array.from({ length: size }, (_, i) =>
    Array.from({ length: size }, (_, j) => {
      const k = start + (i % n) * n + (j % n);
      if (i < n === j < n) return Number(re[k]);
      return (i < n ? -1 : 1) * Number(im?.[k]);
    }),
  );
  return new Matrix(rows);
}

/** @param {Matrix} matrix */
const mlEigen = (matrix) => () => new EigenvalueDecomposition(matrix, { assumeSymmetric: true });

/**
 * Largest entry of Q† Q − 1 in modulus.
 *
 * @param {Square} vectors - as rows
 */
function worstOverlap({ n, re, im = zeros(n) }) {
  const { value } = product({ n, re, im: im.map((y) => -y) }, { n, re: transposed(n, re), im: transposed(n, im) });
  return value.re.reduce((worst, x, k) => {
    const diagonal = k % (n + 1) === 0 ? 1 : 0;
    return Math.max(worst, Math.hypot(x - diagonal, Number(value.im?.[k])));
  }, 0);
}

/**
 * @param {number} n
 * @param {number} perRow
 * @param {number} seed
 */
function randomSparse(n, perRow, seed) {
  const next = generator(seed);
  const rows = Int32Array.from({ length: n * perRow }, (_, k) => Math.floor(k / perRow));
  const cols = Int32Array.from(rows, () => Math.floor((next() + 0.5) * n));
  return fromTriplets(n, n, rows, cols, Float64Array.from(rows, next));
}

/**
 * @typedef {object} Row
 * @property {string} name
 * @property {() => unknown} ours
 * @property {readonly [kind: string, n: number, count: number]} [python]
 * @property {number} [reach]
 * @property {() => unknown} [ml]
 * @property {number} [factor]
 * @property {() => unknown} [beside]
 * @property {string} [besideName]
 * @property {number} [reachBeside]
 * @property {() => string} [note]
 */

/**
 * The rows. `ours` is timed; `python` names the reference case and `reach` the ratio to it that is wanted; `ml` is
 * ml-matrix on the same work, with the factor wanted; `beside` is another run of ours and `reachBeside` the ratio to it.
 */
function makeRows() {
  /** @type {Row[]} */
  const rows = [];
  const full = hermitian(512, true);
  /** @param {Square} matrix */
  const solve = ({ n, re, im }) => hermitianEigen(n, re, im);
  for (const { name, complex, reach, factor } of [
    { name: "complex Hermitian, n = 512", complex: true, reach: 1.2, factor: 50 },
    { name: "real symmetric, n = 512", complex: false, reach: 1.5, factor: 20 },
  ]) {
    const of = complex ? full : hermitian(512, false);
    const ml = mlEigen(forMlMatrix(of));
    rows.push({ name, ours: () => solve(of), python: [complex ? "complex" : "real", 512, 1], reach, ml, factor });
  }
  const ten = distinct(512, 10);
  rows.push({
    name: "n = 512, ten distinct eigenvalues, complex",
    ours: () => solve(ten),
    python: ["distinct", 512, 10],
    reach: 1.2,
    ml: mlEigen(forMlMatrix(ten)),
    note: () => `largest entry of Q†Q − 1: ${worstOverlap(solve(ten)).toExponential(1)} (at most 1e-14)`,
  });
  /** @type {[string, (i: number, j: number) => boolean][]} */
  const pieces = [
    ["block-diagonal 512, 32 blocks of 16, complex", (i, j) => i >> 4 === j >> 4],
    ["diagonal 512, complex", (i, j) => i === j],
    ["zero 512, complex", () => false],
  ];
  for (const [name, keep] of pieces) {
    const of = hermitian(512, true, 1, keep);
    rows.push({ name, ours: () => solve(of), beside: () => solve(full), besideName: "full", reachBeside: 0.1 });
  }
  for (const { n, count, reach } of [
    { n: 20, count: 1000, reach: 0.4 },
    { n: 2, count: 10_000, reach: 0.5 },
    { n: 4, count: 10_000, reach: 0.5 },
    { n: 8, count: 4000, reach: 0.5 },
  ]) {
    const of = hermitian(n, true, count);
    const orders = new Int32Array(count).fill(n);
    const matrices = Array.from({ length: count }, (_, k) => mlEigen(forMlMatrix(of, k * n * n)));
    rows.push({
      name: `${count} complex blocks of ${n} × ${n}`,
      ours: () => batchedHermitianEigen(orders, of.re, of.im),
      python: ["batch", n, count],
      reach,
      ml: () => {
        for (const run of matrices) run();
      },
    });
  }
  const many = hermitian(20, true, 1000);
  const orders = new Int32Array(1000).fill(20);
  const pool = new KernelPool({ factory: () => nodeWorker(), size: 2 });
  rows.push({
    name: "1000 complex blocks of 20 × 20, two workers",
    ours: () => pool.batchedHermitianEigen(orders, many.re, many.im),
    beside: () => batchedHermitianEigen(orders, many.re, many.im),
    besideName: "one thread",
    reachBeside: 1 / 1.6,
  });
  const [a, b] = [randomSparse(1e5, 10, 1), randomSparse(1e5, 10, 2)];
  const arena = new SparseArena();
  const [left, right] = [arena.load(a), arena.load(b)];
  const mark = arena.mark();
  rows.push({
    name: "sparse commutator, 1e5 rows, 10 a row, resident",
    ours: () => {
      arena.release(mark);
      return arena.commutator(left, right);
    },
    python: ["sparse", 1e5, 10],
    reach: 0.6,
  });
  const [c, d] = [add(0.5, a, 0.5, transpose(a)), add(0.5, b, 0.5, transpose(b))];
  const generalArena = new SparseArena();
  const [e, f] = [generalArena.load(c), generalArena.load(d)];
  const generalMark = generalArena.mark();
  const halfArena = new SparseArena();
  const [g, h] = [halfArena.load(c, { hermitian: true }), halfArena.load(d, { hermitian: true })];
  const halfMark = halfArena.mark();
  rows.push({
    name: "sparse commutator of Hermitian matrices, 1e5 rows, 20 a row, resident",
    ours: () => {
      halfArena.release(halfMark);
      return halfArena.commutator(g, h);
    },
    beside: () => {
      generalArena.release(generalMark);
      return generalArena.commutator(e, f);
    },
    besideName: "without the short cut",
  });
  rows.push({
    name: "sparse commutator, 1e5 rows, 10 a row, plain arrays",
    ours: () => commutator(a, b),
    python: ["sparse", 1e5, 10],
  });
  const other = hermitian(512, true);
  const [x, y] = [forMlMatrix(full), forMlMatrix(other)];
  rows.push({
    name: "complex product, n = 512",
    ours: () => product(full, other),
    python: ["product", 512, 1],
    ml: () => x.mmul(y),
  });
  return rows;
}

/** @param {() => unknown} run */
async function timed(run) {
  const begun = performance.now();
  await run();
  return performance.now() - begun;
}

/**
 * @param {number} x
 * @param {number} y
 */
const ratio = (x, y) => (x / y).toPrecision(3);

/**
 * @param {number | undefined} limit
 * @param {string} sign
 */
const wanted = (limit, sign) => (limit === undefined ? "" : ` (wanted ${sign} ${limit.toPrecision(2)})`);

/**
 * Runs the rows, prints a line for each, and returns what was measured.
 *
 * @param {{ only?: string, seconds?: number, print?: (line: string) => void }} [options]
 */
export async function benchKernels({ only = "", seconds = 4, print = console.log } = {}) {
  const reference = await startReference();
  const load = loadavg()[0]?.toFixed(1);
  print(
    `kernels: Node ${process.version}, ${availableParallelism()} processors, load ${load}; ` +
      (reference
        ? `NumPy ${reference.version}, one thread${reference.hasSciPy ? "" : "; SciPy is absent, so nothing stands beside the sparse rows"}`
        : "the reference is absent: no Python with NumPy here, so there are ratios to ml-matrix only"),
  );
  const measured = [];
  for (const { name, ours, python, reach, ml, factor, beside, besideName, reachBeside, note } of makeRows()) {
    if (!name.includes(only)) continue;
    const withPython = python !== undefined && reference !== undefined && (await reference.prepare(python));
    const best = { ours: Number.POSITIVE_INFINITY, python: Number.POSITIVE_INFINITY, beside: Number.POSITIVE_INFINITY };
    const end = performance.now() + 1000 * seconds;
    for (let round = 0; round < 3 || performance.now() < end; round++) {
      best.ours = Math.min(best.ours, await timed(ours));
      if (withPython) best.python = Math.min(best.python, await reference.run());
      if (beside) best.beside = Math.min(best.beside, await timed(beside));
    }
    const row = {
      name,
      ms: best.ours,
      numpyMs: withPython ? best.python : undefined,
      besideMs: beside ? best.beside : undefined,
      mlMatrixMs: ml === undefined ? undefined : await timed(ml),
    };
    measured.push(row);
    const parts = [`${name}: ${row.ms.toPrecision(4)} ms`];
    if (withPython) parts.push(`${ratio(row.ms, best.python)} × NumPy or SciPy${wanted(reach, "≤")}`);
    if (beside) parts.push(`${ratio(row.ms, best.beside)} × ${besideName}${wanted(reachBeside, "≤")}`);
    if (row.mlMatrixMs) parts.push(`${ratio(row.mlMatrixMs, row.ms)} times as fast as ml-matrix${wanted(factor, "≥")}`);
    if (note) parts.push(note());
    print(`  ${parts.join("; ")}`);
  }
  reference?.end();
  return measured;
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  const [only = "", seconds = "4"] = process.argv.slice(2);
  await benchKernels({ only, seconds: Number(seconds) });
}
