import { describe, expect, it } from "vitest";
import { commutatorSparse, productSparse } from "../../../src/numerics/bounded/sparse.js";
import type { Bounded } from "../../../src/numerics/bounded/types.js";
import type { Csr } from "../../../src/numerics/csr.js";
import { add, adjoint, diagonalCsr, fromDense, fromTriplets, toDense } from "../../../src/numerics/sparse.js";
import { type Resident, SparseArena } from "../../../src/numerics/wasm/arena.js";
import { Kernels, newKernels } from "../../../src/numerics/wasm/runtime.js";
import { generator } from "../eigen/matrices.js";
import { badMatrices } from "../sparse/bad-matrices.js";
import { distance, isWithin } from "./exact.js";

function random(rows: number, cols: number, density: number, complex: boolean, seed: number, scale = 1): Csr {
  const next = generator(seed);
  const some = (): number => (next() + 0.5 < density ? scale * next() : 0);
  const re = Float64Array.from({ length: rows * cols }, some);
  const im = Float64Array.from({ length: rows * cols }, some);
  return fromDense(rows, cols, re, complex ? im : undefined);
}

interface Engine {
  product(a: Csr, b: Csr): Bounded<Csr>;
  commutator(a: Csr, b: Csr): Bounded<Csr>;
}

function inArena(make: () => SparseArena): Engine {
  const run = (combine: (arena: SparseArena, a: Resident, b: Resident) => Bounded<Resident>) => (a: Csr, b: Csr) => {
    const arena = make();
    const { value, error } = combine(arena, arena.load(a), arena.load(b));
    return { value: arena.read(value), error };
  };
  return {
    product: run((arena, a, b) => arena.product(a, b)),
    commutator: run((arena, a, b) => arena.commutator(a, b)),
  };
}

const KERNELS: readonly [string, Engine][] = [
  ["plain TypeScript", { product: productSparse, commutator: commutatorSparse }],
  ["a WebAssembly arena", inArena(() => new SparseArena())],
  ["an arena of plain arrays", inArena(() => new SparseArena({ own: undefined }))],
];

const square = (n: number, complex: boolean, seed: number, scale = 1): Csr => random(n, n, 0.4, complex, seed, scale);

describe.each(KERNELS)("sparse products and commutators by %s", (_, { product, commutator }) => {
  const kinds: [boolean, boolean][] = [
    [false, false],
    [true, false],
    [false, true],
    [true, true],
  ];

  it.each(kinds)("stay inside their bounds (complex: %s and %s)", (left, right) => {
    for (const n of [1, 2, 5, 12]) {
      const a = square(n, left, n + 1);
      const b = square(n, right, n + 2);
      const [x, y] = [toDense(a), toDense(b)];
      const ab = product(a, b);
      const c = commutator(a, b);
      expect(distance(n, [[1, x, y]], toDense(ab.value))).toBeLessThanOrEqual(ab.error);
      const off = distance(
        n,
        [
          [1, x, y],
          [-1, y, x],
        ],
        toDense(c.value),
      );
      expect(off).toBeLessThanOrEqual(c.error);
      if (n === 12) expect(c.error).toBeLessThanOrEqual(400 * off);
    }
  });

  it("take half the work for Hermitian matrices, stay inside the bound, and give an exactly anti-Hermitian commutator", () => {
    for (const [left, right] of kinds) {
      for (const n of [2, 7, 14]) {
        const [x, y] = [square(n, left, n), square(n, right, n + 1)];
        const [a, b] = [add(1, x, 1, adjoint(x)), add(1, y, 1, adjoint(y))];
        const { value, error } = commutator(a, b);
        const [p, q, c] = [toDense(a), toDense(b), toDense(value)];
        const off = distance(
          n,
          [
            [1, p, q],
            [-1, q, p],
          ],
          c,
        );
        expect(off).toBeLessThanOrEqual(error);
        if (n === 14) expect(error).toBeLessThanOrEqual(400 * off);
        for (let row = 0; row < n; row++) {
          const columns = value.col.subarray(value.ptr[row] as number, value.ptr[row + 1] as number);
          expect([...columns]).toEqual([...new Set(columns)].sort((u, v) => u - v));
        }
        // Compared with the general form, which a change in the last digit of one entry brings about.
        const bent = { ...a, re: a.re.map((u, e) => (e === 0 ? u * (1 + 2 ** -52) : u)) };
        const general = toDense(commutator(bent, b).value);
        c.re.forEach((u, k) => {
          expect(Math.abs(u - (general.re[k] as number))).toBeLessThanOrEqual(1e-14);
          expect(Math.abs((c.im?.[k] ?? 0) - (general.im?.[k] ?? 0))).toBeLessThanOrEqual(1e-14);
        });
      }
    }
    const [x, y] = [square(9, true, 3), square(9, true, 4)];
    const { value } = commutatorSparse(add(1, x, 1, adjoint(x)), add(1, y, 1, adjoint(y)));
    const mirrored = adjoint(value);
    expect(value.re).toEqual(mirrored.re.map((u) => 0 - u));
    expect(value.im).toEqual(mirrored.im?.map((u) => 0 - u));
  });

  it("come close to their bounds in the worst of many small cases: constants a quarter as large would be caught", () => {
    const closest = (n: number, complex: boolean, run: (a: Csr, b: Csr) => Bounded<Csr>, both: boolean): number => {
      let most = 0;
      for (let seed = 1; seed <= 300; seed++) {
        const [a, b] = [random(n, n, 1, complex, seed), random(n, n, 1, complex, seed + 1000)];
        const { value, error } = run(a, b);
        const [x, y] = [toDense(a), toDense(b)];
        const off = distance(
          n,
          both
            ? [
                [1, x, y],
                [-1, y, x],
              ]
            : [[1, x, y]],
          toDense(value),
        );
        expect(off).toBeLessThanOrEqual(error);
        most = Math.max(most, off / error);
      }
      return most;
    };
    expect(closest(1, false, product, false)).toBeGreaterThan(0.9);
    expect(closest(2, false, product, false)).toBeGreaterThan(0.5);
    expect(closest(1, true, product, false)).toBeGreaterThan(0.5);
    expect(closest(2, true, product, false)).toBeGreaterThan(0.25);
    expect(closest(2, false, commutator, true)).toBeGreaterThan(0.25);
    expect(closest(2, true, commutator, true)).toBeGreaterThan(0.12);
  });

  it("stay inside them where a product, its square, or the square of an entry is below the range", () => {
    const odd = 1 + 2 ** -27;
    for (const [x, y] of [
      [2 ** -540, 2 ** -540],
      [odd * 2 ** -100, odd * 2 ** -440],
      [odd * 2 ** 500, odd * 2 ** -540],
    ] as const) {
      const [a, b] = [fromDense(1, 1, [x]), fromDense(1, 1, [y])];
      const { value, error } = product(a, b);
      const terms = [[1, toDense(a), toDense(b)]] as const;
      expect(isWithin(1, terms, toDense(value), error)).toBe(true);
      expect(isWithin(1, terms, toDense(value), 0)).toBe(false);
    }
  });

  it("bound by infinity a difference of diagonal entries that overflows", () => {
    const { value, error } = commutator(diagonalCsr([1.7e308, -1.7e308]), fromDense(2, 2, [0, 1e-300, 2e-300, 0]));
    if (!value.re.every(Number.isFinite)) expect(error).toBe(Number.POSITIVE_INFINITY);
    else expect(error).toBeGreaterThan(0);
  });

  it("stay inside them with a diagonal matrix, with tiny numbers and with rows of very different size", () => {
    const n = 6;
    const next = generator(4);
    const numbers = (): Float64Array => Float64Array.from({ length: n }, next);
    const spread = (a: Csr): Csr => ({ ...a, re: a.re.map((x, e) => x * 10 ** (((e * 37) % 60) - 30)) });
    const pairs: [Csr, Csr][] = [
      [diagonalCsr(numbers()), square(n, true, 1)],
      [square(n, false, 2), diagonalCsr(numbers(), numbers())],
      [square(n, true, 3, 1e-160), square(n, true, 4, 1e-155)],
      [square(n, false, 3, 1e-200), square(n, true, 4, 1e-121)],
      [spread(square(n, true, 5)), spread(square(n, true, 6))],
    ];
    for (const [a, b] of pairs) {
      const [x, y] = [toDense(a), toDense(b)];
      const ab = product(a, b);
      expect(distance(n, [[1, x, y]], toDense(ab.value))).toBeLessThanOrEqual(ab.error);
      const { value, error } = commutator(a, b);
      expect(
        distance(
          n,
          [
            [1, x, y],
            [-1, y, x],
          ],
          toDense(value),
        ),
      ).toBeLessThanOrEqual(error);
    }
  });

  it("multiply rectangles of integers exactly, columns ascending", () => {
    const round = (a: Csr): Csr => ({
      ...a,
      re: a.re.map((x) => Math.round(20 * x)),
      im: a.im?.map((x) => Math.round(20 * x)),
    });
    const a = round(random(7, 40, 0.3, true, 1));
    const b = round(random(40, 90, 0.5, true, 2));
    const { value } = product(a, b);
    const [x, y, z] = [toDense(a), toDense(b), toDense(value)];
    for (let i = 0; i < 7; i++) {
      for (let j = 0; j < 90; j++) {
        let re = 0;
        let im = 0;
        for (let k = 0; k < 40; k++) {
          const [p, q] = [x.re[i * 40 + k] as number, x.im?.[i * 40 + k] ?? 0];
          const [r, s] = [y.re[k * 90 + j] as number, y.im?.[k * 90 + j] ?? 0];
          re += p * r - q * s;
          im += p * s + q * r;
        }
        expect([z.re[i * 90 + j], z.im?.[i * 90 + j]]).toEqual([re + 0, im + 0]);
      }
      const columns = value.col.subarray(value.ptr[i] as number, value.ptr[i + 1] as number);
      expect([...columns]).toEqual([...columns].sort((p, q) => p - q));
    }
  });

  it("bound by infinity what overflows, and refuse what does not fit", () => {
    const huge = square(4, true, 1, 1e200);
    expect(product(huge, huge).error).toBe(Number.POSITIVE_INFINITY);
    expect(commutator(huge, huge).error).toBe(Number.POSITIVE_INFINITY);
    // A stored zero that meets an infinite norm does not hide the row.
    const zero: Csr = { ...fromDense(2, 2, [1, 1, 0, 1]), re: Float64Array.of(0, 1, 1) };
    expect(product(zero, fromDense(2, 2, [1e200, 0, 0, 1])).error).toBe(Number.POSITIVE_INFINITY);
    const wide = random(2, 3, 1, false, 1);
    for (const run of [() => product(wide, wide), () => commutator(wide, wide), () => commutator(wide, huge)]) {
      expect(run).toThrow(expect.objectContaining({ code: "shape" }));
    }
  });
});

describe.each([
  ["WebAssembly memory", () => new SparseArena()],
  ["plain arrays", () => new SparseArena({ own: undefined })],
])("SparseArena on %s", (_, make) => {
  it("gives back what was loaded", () => {
    const arena = make();
    for (const a of [square(5, true, 1), square(8, false, 2), random(3, 9, 0.2, true, 3)]) {
      expect(arena.read(arena.load(a))).toEqual(a);
      expect(
        Math.abs(
          arena.frobenius(arena.load(a)) ** 2 -
            a.re.reduce((s, x) => s + x * x, 0) -
            (a.im?.reduce((s, x) => s + x * x, 0) ?? 0),
        ),
      ).toBeLessThan(1e-13);
    }
  });

  it("takes commutators of Hermitian matrices by half, with the same entries", () => {
    for (const complex of [false, true]) {
      const arena = make();
      const [x, y] = [square(14, complex, 1), square(14, complex, 2)];
      const [a, b] = [add(1, x, 1, adjoint(x)), add(1, y, 1, adjoint(y))];
      const whole = arena.commutator(arena.load(a), arena.load(b));
      const half = arena.commutator(arena.load(a, { hermitian: true }), arena.load(b, { hermitian: true }));
      const [c, d] = [toDense(arena.read(whole.value)), toDense(arena.read(half.value))];
      const scale = Math.max(...c.re.map(Math.abs));
      c.re.forEach((value, k) => {
        expect(Math.abs(value - (d.re[k] as number))).toBeLessThanOrEqual(1e-14 * scale);
        expect(Math.abs((c.im?.[k] ?? 0) - (d.im?.[k] ?? 0))).toBeLessThanOrEqual(1e-14 * scale);
      });
      const [p, q] = [toDense(a), toDense(b)];
      expect(
        distance(
          14,
          [
            [1, p, q],
            [-1, q, p],
          ],
          d,
        ),
      ).toBeLessThanOrEqual(half.error);
      // The bound of a row covers the mirror image of its column: nothing need be doubled.
      expect(half.error).toBeLessThanOrEqual(whole.error * (1 + 1e-13));
      expect(Math.abs(arena.frobenius(half.value) / arena.frobenius(whole.value) - 1)).toBeLessThan(1e-14);
    }
    const arena = make();
    expect(() => arena.load(square(5, true, 1), { hermitian: true })).toThrow(
      expect.objectContaining({ code: "not-hermitian" }),
    );
  });

  it("takes half-stored commutators as factors", () => {
    const cases: [boolean, number][] = [
      [false, 0.4],
      [true, 0.4],
      [false, 0.05],
      [true, 0.05],
    ];
    for (const [complex, density] of cases) {
      const arena = make();
      const [x, y] = [1, 2].map((seed) => random(9, 9, density, complex, seed)) as [Csr, Csr];
      const [a, b] = [add(1, x, 1, adjoint(x)), add(1, y, 1, adjoint(y))];
      const [p, q] = [arena.load(a, { hermitian: true }), arena.load(b, { hermitian: true })];
      const c = arena.commutator(p, q).value;
      const before = arena.bytes;
      const inner = arena.read(c);
      const known = toDense(inner);
      const f = toDense(b);
      const runs: [Bounded<Resident>, Parameters<typeof distance>[1], Bounded<Csr>][] = [
        [arena.product(c, q), [[1, known, f]], productSparse(inner, b)],
        [arena.product(q, c), [[1, f, known]], productSparse(b, inner)],
        [arena.product(c, c), [[1, known, known]], productSparse(inner, inner)],
        [
          arena.commutator(c, q),
          [
            [1, known, f],
            [-1, f, known],
          ],
          commutatorSparse(inner, b),
        ],
        [
          arena.commutator(q, c),
          [
            [1, f, known],
            [-1, known, f],
          ],
          commutatorSparse(b, inner),
        ],
      ];
      for (const [{ value, error }, terms, plain] of runs) {
        expect(isWithin(9, terms, toDense(arena.read(value)), error)).toBe(true);
        expect(Math.abs(error / plain.error - 1)).toBeLessThan(1e-12);
        expect(value.upper).toBe(false);
        expect(value.hermitian).toBe(false);
      }
      // What was written out is not kept.
      const sizes = runs.reduce(
        (sum, [{ value }]) => sum + (value.complex ? 20 : 12) * value.entries + 12 * 10 + 90,
        0,
      );
      expect(arena.bytes - before).toBeLessThanOrEqual(2 * sizes);
      expect(arena.read(c)).toEqual(inner);
      // Rounding in the real parts of the diagonal is no part of an anti-Hermitian matrix.
      const norm = Math.sqrt(
        inner.re.reduce((sum, u) => sum + u * u, 0) + (inner.im?.reduce((sum, u) => sum + u * u, 0) ?? 0),
      );
      expect(Math.abs(arena.frobenius(c) / norm - 1)).toBeLessThan(1e-14);
    }
  });

  it("leaves out of the norm what rounding left in the real parts of an anti-Hermitian diagonal", () => {
    const arena = make();
    // ((x² + y²) − x²) − y² is not zero in floating point; all else cancels exactly.
    const [x, y] = [1000 / 7, 1 / 3];
    expect(x * x + y * y - x * x - y * y).not.toBe(0);
    const a = arena.load(fromDense(3, 3, [0, x, y, x, 0, 0, y, 0, 0]), { hermitian: true });
    const { value } = arena.commutator(a, a);
    expect(arena.frobenius(value)).toBe(0);
    expect(arena.read(value).re.every((u) => u === 0)).toBe(true);
  });

  it("has copies of its own, in both directions", () => {
    const arena = make();
    const a = square(5, true, 1);
    const known = { ...a, re: a.re.slice() };
    const resident = arena.load(a);
    a.re.fill(7);
    expect(arena.read(resident)).toEqual(known);
    arena.read(resident).re.fill(8);
    expect(arena.read(resident)).toEqual(known);
    arena.read(arena.product(resident, resident).value).re.fill(8);
    expect(arena.read(resident)).toEqual(known);
  });

  it("refuses marks that are none, of another arena, or freed with an older one", () => {
    const arena = make();
    const first = arena.mark();
    arena.load(square(5, true, 1));
    const second = arena.mark();
    arena.release(first);
    const b = arena.load(square(9, true, 2));
    const known = arena.read(b);
    const other = make().mark();
    for (const mark of [second, other, -1, Number.NaN, 0, undefined, null, { depth: 0 }, {}]) {
      expect(() => arena.release(mark as never)).toThrow(expect.objectContaining({ code: "option" }));
    }
    const third = arena.mark();
    arena.load(square(9, true, 3));
    arena.release(third);
    arena.release(third);
    expect(arena.read(b)).toEqual(known);
    arena.release(first);
    expect(() => arena.read(b)).toThrow(expect.objectContaining({ code: "shape" }));
    expect(() => arena.release(third)).toThrow(expect.objectContaining({ code: "option" }));
  });

  it("refuses what is no sparse matrix, and is as good as before", () => {
    const arena = make();
    const good = fromDense(2, 2, [1, 2, 3, 4]);
    const kept = arena.load(good);
    for (const [bad, code] of badMatrices()) {
      expect(() => arena.load(bad)).toThrow(expect.objectContaining({ code }));
    }
    expect(() => arena.product(kept, good as never)).toThrow(expect.objectContaining({ code: "shape" }));
    expect(toDense(arena.read(arena.product(kept, kept).value)).re).toEqual(Float64Array.of(7, 10, 15, 22));
  });

  it("frees what came after a mark, and refuses its use", () => {
    const arena = make();
    const a = arena.load(square(20, true, 1));
    const b = arena.load(square(20, true, 2));
    const mark = arena.mark();
    const before = arena.bytes;
    const known = arena.read(arena.commutator(a, b).value);
    for (let k = 0; k < 3; k++) {
      const c = arena.commutator(a, b).value;
      const d = arena.product(c, a).value;
      arena.release(mark);
      expect(arena.bytes).toBe(before);
      for (const gone of [c, d]) {
        expect(() => arena.read(gone)).toThrow(expect.objectContaining({ code: "shape" }));
      }
    }
    expect(arena.read(arena.commutator(a, b).value)).toEqual(known);
    expect(() => make().product(a, b)).toThrow(expect.objectContaining({ code: "shape" }));
  });
});

describe("an arena that is short of memory", () => {
  /** Kernels whose memory ends after so many pages. */
  function shortOf(pages: number): { own: Kernels } {
    const { exports } = newKernels() as Kernels;
    const memory = {
      get buffer(): ArrayBuffer {
        return exports.memory.buffer;
      },
      grow(more: number): number {
        if (exports.memory.buffer.byteLength / 65536 + more > pages) throw new RangeError("no more");
        return exports.memory.grow(more);
      },
    };
    return { own: new Kernels({ ...exports, memory }) };
  }

  it("counts the entries of a result that its products would not fit, with the same bits", () => {
    for (const complex of [false, true]) {
      const [x, y] = [square(40, complex, 1), square(40, complex, 2)];
      const [a, b] = [add(1, x, 1, adjoint(x)), add(1, y, 1, adjoint(y))];
      const all = [new SparseArena(), new SparseArena({ own: newKernels(), countedFrom: 0 })].map((arena) => {
        const [p, q] = [arena.load(x), arena.load(y)];
        const [f, g] = [arena.load(a, { hermitian: true }), arena.load(b, { hermitian: true })];
        const start = arena.bytes;
        const found = [arena.product(p, q), arena.commutator(p, q), arena.commutator(f, g)];
        const bytes = arena.bytes - start;
        return { bytes, found: found.map(({ value, error }) => ({ value, error, csr: arena.read(value) })) };
      });
      expect(all[1]?.found).toEqual(all[0]?.found);
      expect(all[1]?.bytes).toBeLessThanOrEqual(all[0]?.bytes ?? 0);
    }
  });

  it("goes on in plain arrays, with matrices of both kinds and marks across them", () => {
    const [a, b] = [square(60, true, 1), square(60, true, 2)];
    const known = commutatorSparse(a, b);
    let plain = 0;
    for (const pages of [0, 2, 3, 4, 5, 8, 12]) {
      const arena = new SparseArena(shortOf(pages));
      const start = arena.mark();
      const [p, q] = [arena.load(a), arena.load(b)];
      const mark = arena.mark();
      const before = arena.bytes;
      const { value, error } = arena.commutator(p, q);
      if (arena.bytes === before) plain++;
      expect(arena.read(value)).toEqual(known.value);
      expect(Math.abs(error / known.error - 1)).toBeLessThan(1e-12);
      expect(arena.read(arena.product(value, q).value).cols).toBe(60);
      arena.release(mark);
      expect(arena.bytes).toBe(before);
      expect(() => arena.read(value)).toThrow(expect.objectContaining({ code: "shape" }));
      expect(arena.read(p)).toEqual(a);
      arena.release(start);
      expect(() => arena.read(p)).toThrow(expect.objectContaining({ code: "shape" }));
    }
    // Some of these memories are too small for the result, and some are not.
    expect(plain).toBeGreaterThan(1);
    expect(plain).toBeLessThan(7);
  });

  it("refuses a result with more entries than can be counted, by its code", () => {
    const n = 46_342;
    const ones = new Float64Array(n).fill(1);
    const column: Csr = {
      rows: n,
      cols: 1,
      ptr: Int32Array.from({ length: n + 1 }, (_, k) => k),
      col: new Int32Array(n),
      re: ones,
      im: undefined,
    };
    const row: Csr = {
      rows: 1,
      cols: n,
      ptr: Int32Array.of(0, n),
      col: Int32Array.from({ length: n }, (_, k) => k),
      re: ones,
      im: undefined,
    };
    const arena = new SparseArena();
    const [p, q] = [arena.load(column), arena.load(row)];
    const before = arena.bytes;
    expect(() => arena.product(p, q)).toThrow(expect.objectContaining({ code: "memory" }));
    expect(arena.bytes).toBe(before);
    expect(arena.read(arena.product(q, p).value).re).toEqual(Float64Array.of(n));
  });
});

describe("a large operator in WebAssembly memory", () => {
  it("takes its own size and eight bytes a row, and commutators of it no copies", () => {
    const n = 1_000_000;
    const steps = [-1000, -1, 0, 1, 1000];
    const pairs = { i: new Int32Array(5 * n), j: new Int32Array(5 * n), x: new Float64Array(5 * n) };
    let count = 0;
    for (let r = 0; r < n; r++) {
      for (const step of steps) {
        if (r + step < 0 || r + step >= n) continue;
        pairs.i[count] = r;
        pairs.j[count] = r + step;
        pairs.x[count] = step === 0 ? r % 7 : 1;
        count++;
      }
    }
    const a = fromTriplets(n, n, pairs.i.subarray(0, count), pairs.j.subarray(0, count), pairs.x.subarray(0, count));
    const arena = new SparseArena();
    const empty = arena.bytes;
    const resident = arena.load(a);
    const size = 12 * count + 4 * (n + 1);
    expect(arena.bytes - empty).toBeLessThanOrEqual(size + 8 * n + 100);
    const mark = arena.mark();
    const { value, error } = arena.commutator(resident, resident);
    // [A, A] = 0: what is left is rounding, and here the sums are exact.
    expect(arena.frobenius(value)).toBe(0);
    expect(error).toBeGreaterThan(0);
    arena.release(mark);
    expect(arena.bytes - empty).toBeLessThanOrEqual(size + 8 * n + 100);
  });
});
