import fc from "fast-check";
import { EigenvalueDecomposition, Matrix } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { GoodBasisError } from "../../src/errors.js";
import { plainEigen } from "../../src/numerics/eigen/plain.js";
import type { EigenEngine, EigenTuning } from "../../src/numerics/eigen/types.js";
import {
  type EigenOptions,
  type EigenWindow,
  type HermitianEigen,
  hermitianEigenBy,
} from "../../src/numerics/eigen.js";
import { wasmEigen } from "../../src/numerics/wasm/eigen.js";
import {
  conjugated,
  generator,
  quality,
  randomSample,
  type Sample,
  sample,
  U,
  withSpectrum,
} from "./eigen/matrices.js";

/** Both implementations of every kernel; all tests run on each. */
const ENGINES: readonly [string, EigenEngine][] = [
  ["WebAssembly", wasmEigen],
  ["plain TypeScript", plainEigen],
];

const TUNINGS: readonly EigenTuning[] = [
  { leaf: 32, blockedFrom: 64, blockWidth: 32 },
  { leaf: 1, blockedFrom: 3, blockWidth: 1 },
  { leaf: 3, blockedFrom: 3, blockWidth: 5 },
  { leaf: 7, blockedFrom: 1000, blockWidth: 1 },
  { leaf: 1000, blockedFrom: 3, blockWidth: 16 },
];

/**
 * Solves, requires order and 20 n u in both norms (Frobenius, which bounds the spectral one), and hands the result on.
 */
function solvedBy(engine: EigenEngine, of: Sample, tuning?: EigenTuning): HermitianEigen {
  const found = hermitianEigenBy(engine, of.n, of.re, of.im, {}, tuning);
  const { residual, orthogonality } = quality(of, found);
  const where = `n = ${of.n}, ${of.im ? "complex" : "real"}, ${JSON.stringify(tuning)}`;
  expect(residual, `residual, ${where}`).toBeLessThanOrEqual(20);
  expect(orthogonality, `orthogonality, ${where}`).toBeLessThanOrEqual(20);
  for (let k = 1; k < of.n; k++) expect(found.values[k]).toBeGreaterThanOrEqual(found.values[k - 1] as number);
  return found;
}

/**
 * Requires 20 n u of a large matrix: up to order 330 and at 512 of all eigenpairs, else of 24, spread over the whole spectrum,
 * against all others.
 */
function expectSolved(of: Sample, solve: (n: number, re: Float64Array, im?: Float64Array) => HermitianEigen): void {
  const { n } = of;
  const found = solve(n, of.re, of.im);
  const which = n <= 330 || n === 512 ? undefined : list(24, (k) => Math.floor((k * (n - 1)) / 23));
  const { residual, orthogonality } = quality(of, found, which);
  expect(residual, `residual, n = ${n}`).toBeLessThanOrEqual(20);
  expect(orthogonality, `orthogonality, n = ${n}`).toBeLessThanOrEqual(20);
}

/** Requires known eigenvalues (any order) within 20 n u of the largest. */
function expectValues(found: HermitianEigen, known: readonly number[]): void {
  const sorted = [...known].sort((a, b) => a - b);
  const norm = Math.max(...known.map(Math.abs));
  sorted.forEach((value, k) => {
    expect(Math.abs((found.values[k] as number) - value)).toBeLessThanOrEqual(20 * known.length * U * norm);
  });
}

function codeOf(run: () => unknown): string {
  try {
    run();
  } catch (error) {
    if (error instanceof GoodBasisError) return error.code;
    throw error;
  }
  return "nothing thrown";
}

const list = (n: number, value: (k: number) => number): number[] => Array.from({ length: n }, (_, k) => value(k));

describe.each(ENGINES)("hermitianEigen by %s", (_engine, engine) => {
  const solved = (of: Sample, tuning?: EigenTuning): HermitianEigen => solvedBy(engine, of, tuning);
  const hermitianEigen = (n: number, re: Float64Array, im?: Float64Array, options?: EigenOptions): HermitianEigen =>
    hermitianEigenBy(engine, n, re, im, options);

  it.each([false, true])(
    "solves random matrices of orders up to 70 and next to every bound (complex: %s)",
    (complex) => {
      for (const n of [
        ...list(70, (k) => k + 1),
        79,
        80,
        81,
        82,
        95,
        96,
        97,
        98,
        127,
        128,
        129,
        130,
        191,
        192,
        193,
        194,
      ]) {
        solved(randomSample(n, complex, n));
      }
    },
  );

  it.each([false, true])(
    "solves random matrices of large orders, 24 pairs checked of the largest (complex: %s)",
    (complex) => {
      // Widths and thresholds of both engines, and the strips of their products.
      const orders =
        engine === wasmEigen
          ? [
              199, 200, 201, 255, 256, 257, 258, 287, 288, 289, 290, 299, 300, 301, 302, 383, 384, 385, 386, 511, 512,
              513, 600,
            ]
          : [255, 256, 257, 258, 319, 320, 321, 383, 384, 385, 512, 513, 600];
      for (const n of orders) {
        expectSolved(randomSample(n, complex, n), hermitianEigen);
      }
    },
  );

  it.each([false, true])("solves hard spectra of large orders (complex: %s)", (complex) => {
    const n = 330;
    const spectra: ((k: number) => number)[] = [
      (k) => k % 10,
      (k) => (k % 4) + (1e-14 * k) / n,
      (k) => (k % 4) + (1e-10 * k) / n,
      (k) => (k % 4) + (1e-6 * k) / n,
      (k) => 10 ** ((-300 * k) / n),
      (k) => (k < n / 3 ? 1 : 0),
      (k) => (k % 2 === 0 ? 1 : -1),
    ];
    for (const [seed, value] of spectra.entries()) {
      const diagonal = sample(n, complex, (i, j) => [i === j ? value(i) : 0, 0]);
      expectSolved(conjugated(diagonal, 12, seed + 1), hermitianEigen);
    }
  });

  // The plain twin needs seconds for 512.
  const many = engine === wasmEigen ? 512 : 200;
  it.each([false, true])(
    `keeps ${many} vectors orthogonal to 1e-14, ten distinct eigenvalues (complex: %s)`,
    (complex) => {
      const n = many;
      const of = conjugated(
        sample(n, complex, (i, j) => [i === j ? i % 10 : 0, 0]),
        12,
        3,
      );
      const { re, im } = hermitianEigen(n, of.re, of.im);
      let worst = 0;
      for (let i = 0; i < n; i++) {
        for (let k = 0; k <= i; k += 1 + (i % 5)) {
          let p = i === k ? -1 : 0;
          let q = 0;
          for (let j = 0; j < n; j++) {
            const [a, b] = [re[i * n + j] as number, im?.[i * n + j] ?? 0];
            const [c, d] = [re[k * n + j] as number, im?.[k * n + j] ?? 0];
            p += a * c + b * d;
            q += a * d - b * c;
          }
          worst = Math.max(worst, Math.abs(p), Math.abs(q));
        }
      }
      expect(worst).toBeLessThanOrEqual(1e-14);
    },
  );

  it.each(TUNINGS)("solves with the thresholds $leaf, $blockedFrom, $blockWidth", (tuning) => {
    for (const complex of [false, true]) {
      for (const n of [2, 3, 4, 5, 6, 7, 8, 9, 13, 16, 17, 31, 33, 50]) {
        solved(randomSample(n, complex, 100 + n), tuning);
        solved(
          sample(n, complex, (i, j) => [i === j ? i % 3 : 0, 0]),
          tuning,
        );
        solved(
          sample(n, complex, () => [1, 0]),
          tuning,
        );
        solved(
          withSpectrum(
            list(n, (k) => k % 2),
            complex,
            n,
          ),
          tuning,
        );
      }
    }
  });

  describe.each([false, true])("hard spectra (complex: %s)", (complex) => {
    const spectra: [string, (n: number) => number[]][] = [
      ...list(10, (k) => k + 1).map((m): [string, (n: number) => number[]] => [
        `${m} distinct eigenvalues`,
        (n) => list(n, (k) => (k % m) - m / 3),
      ]),
      ...[1e-14, 1e-10, 1e-6].map((width): [string, (n: number) => number[]] => [
        `clusters of width ${width}`,
        (n) => list(n, (k) => (k % 4) + (width * k) / n),
      ]),
      ["a projector", (n) => list(n, (k) => (k < n / 3 ? 1 : 0))],
      ["plus and minus one", (n) => list(n, (k) => (k % 2 === 0 ? 1 : -1))],
      ["a geometric row down to 1e-300", (n) => list(n, (k) => 10 ** ((-300 * k) / n))],
      ["one far from the rest", (n) => list(n, (k) => (k === 0 ? 1e12 : 1 + k * 1e-3))],
    ];
    it.each(spectra)("%s", (_, values) => {
      for (const n of [3, 20, 61, 110]) {
        const of = withSpectrum(values(n), complex, 7 * n);
        const known = values(n);
        expectValues(solved(of), known);
        solved(of, { leaf: 2, blockedFrom: 3, blockWidth: 4 });
      }
    });

    it("graded from 1e-300 to 1e300, both ways", () => {
      for (const n of [2, 3, 8, 40, 100]) {
        const base = randomSample(n, complex, n);
        for (const sign of [-1, 1]) {
          const scale = (i: number): number => 10 ** (sign * (-150 + (300 * i) / (n - 1)));
          const at = (m: Float64Array | undefined, i: number, j: number): number =>
            (m?.[i * n + j] ?? 0) * scale(i) * scale(j);
          solved(sample(n, complex, (i, j) => [at(base.re, i, j), at(base.im, i, j)]));
        }
      }
    });

    it("glued Wilkinson matrices (Wilkinson, The Algebraic Eigenvalue Problem, 1965)", () => {
      for (const glue of [0, 1e-14, 1e-8]) {
        const wilkinson = sample(105, complex, (i, j) => {
          if (i === j) return [Math.abs((i % 21) - 10), 0];
          return i - j > 1 ? [0, 0] : [i % 21 === 0 ? glue : 1, 0];
        });
        for (const tuning of TUNINGS) solved(wilkinson, tuning);
        solved(conjugated(wilkinson, 20, 5));
      }
    });

    it("zero, identity, all ones, diagonal, block diagonal", () => {
      for (const n of [1, 2, 3, 12, 40, 100]) {
        const zero = solved(sample(n, complex, () => [0, 0]));
        expect([...zero.values]).toEqual(list(n, () => 0));
        const identity = solved(sample(n, complex, (i, j) => [i === j ? 1 : 0, 0]));
        expect([...identity.values]).toEqual(list(n, () => 1));
        expectValues(
          solved(sample(n, complex, () => [1, 0])),
          list(n, (k) => (k === 0 ? n : 0)),
        );
        const diagonal = solved(sample(n, complex, (i, j) => [i === j ? (i * 7) % n : 0, 0]));
        expect([...diagonal.values]).toEqual(list(n, (k) => (k * 7) % n).sort((a, b) => a - b));
        const random = generator(n);
        solved(sample(n, complex, (i, j) => (i >> 2 === j >> 2 ? [random(), random()] : [0, 0])));
      }
    });

    it("random matrices with entries that underflow beside the others", () => {
      for (const tiny of [1e-140, 1e-160, 1e-200, 1e-310]) {
        const random = generator(11);
        const of = sample(12, complex, (i, j) => {
          const scale = i >= 6 !== j >= 6 || i % 3 === 1 ? tiny : 1;
          return [scale * random(), scale * random()];
        });
        for (const tuning of TUNINGS) solved(of, tuning);
      }
    });
  });

  it("keeps phases of modulus one where the entries that give them have lost their digits", () => {
    solved(sample(2, true, (i, j) => (i === j ? [1 + i / 2, 0] : [1.5e-323, 1.5e-323])));
    for (const size of [1.6e-162, 1e-161, 1e-310]) {
      solved(sample(3, true, (i, j) => (i === j ? [i, 0] : j === 0 ? [1, 0.5] : [size, 0.6 * size])));
      solved(sample(3, true, (i, j) => (i === j ? [i, 0] : [size, 0.6 * size])));
    }
  });

  it("finds the eigenvalues of the angular momentum matrices Jx and Jy", () => {
    for (const n of [2, 3, 4, 11, 24, 60, 101]) {
      const j = (n - 1) / 2;
      const known = list(n, (k) => k - j);
      const step = (i: number): number => Math.sqrt(i * (n - i)) / 2;
      expectValues(solved(sample(n, false, (i, k) => [i - k === 1 ? step(i) : 0, 0])), known);
      expectValues(solved(sample(n, true, (i, k) => [0, i - k === 1 ? step(i) : 0])), known);
    }
  });

  it("agrees with ml-matrix, on complex matrices through the real embedding of twice the order", () => {
    for (const n of [1, 2, 3, 5, 9, 20, 45]) {
      const real = randomSample(n, false, 3 * n);
      expectValues(
        hermitianEigen(n, real.re, undefined),
        reference(n, (i, k) => real.re[i * n + k] as number),
      );
      const { re, im } = randomSample(n, true, 3 * n + 1);
      const embedded = reference(2 * n, (i, k) => {
        const at = (i % n) * n + (k % n);
        if (i < n === k < n) return re[at] as number;
        return (i < n ? -1 : 1) * (im?.[at] ?? 0);
      });
      expectValues(
        hermitianEigen(n, re, im),
        embedded.filter((_, k) => k % 2 === 0),
      );
      expectValues(
        hermitianEigen(n, re, im),
        embedded.filter((_, k) => k % 2 === 1),
      );
    }
  });

  it("keeps real and complex drivers together: zero imaginary parts and phases change no eigenvalue", () => {
    for (const n of [1, 2, 3, 7, 40, 100]) {
      const { re } = randomSample(n, false, n);
      const real = hermitianEigen(n, re, undefined);
      expect(real.im).toBeUndefined();
      expectValues(solved({ n, re, im: new Float64Array(n * n) }), [...real.values]);
      const turned = sample(n, true, (i, j) => {
        const x = re[i * n + j] as number;
        return [x * Math.cos(i - j), x * Math.sin(i - j)];
      });
      expectValues(solved(turned), [...real.values]);
    }
  });

  it("scales by powers of two exactly", () => {
    for (const complex of [false, true]) {
      for (const n of [1, 2, 3, 9, 40]) {
        const { re, im } = randomSample(n, complex, n);
        const plain = hermitianEigen(n, re, im);
        for (const exponent of [-900, -300, 300, 900]) {
          const factor = 2 ** exponent;
          const scaled = hermitianEigen(
            n,
            re.map((x) => x * factor),
            im?.map((x) => x * factor),
          );
          expect(scaled.values).toEqual(plain.values.map((x) => x * factor));
          expect(scaled.re).toEqual(plain.re);
          expect(scaled.im).toEqual(plain.im);
        }
      }
    }
  });

  it("takes the smallest and the largest doubles", () => {
    const smallest = solved(sample(3, false, () => [5e-324, 0]));
    expect([...smallest.values]).toEqual([0, 0, 1.5e-323]);
    const largest = hermitianEigen(2, Float64Array.of(0, Number.MAX_VALUE, Number.MAX_VALUE, 0));
    expect([...largest.values]).toEqual([-Number.MAX_VALUE, Number.MAX_VALUE]);
    const ones = new Float64Array(9).fill(Number.MAX_VALUE);
    expect(codeOf(() => hermitianEigen(3, ones, undefined))).toBe("not-finite");
  });

  it("reads the lower triangle alone where it is told to, changes nothing, and repeats itself bit for bit", () => {
    for (const complex of [false, true]) {
      for (const n of [1, 2, 3, 10, 33, 100]) {
        const { re, im } = randomSample(n, complex, n);
        const first = hermitianEigen(n, re, im);
        const spoil = (m: Float64Array): Float64Array => m.map((x, k) => (k % n > Math.floor(k / n) ? Number.NaN : x));
        const lower = spoil(re);
        const lowerIm = im && spoil(im);
        const before = [lower.slice(), lowerIm?.slice()];
        expect(hermitianEigen(n, lower, lowerIm, { upper: "ignore" })).toEqual(first);
        expect([lower, lowerIm]).toEqual(before);
        hermitianEigen(5, randomSample(5, !complex, 1).re, randomSample(5, !complex, 1).im);
        expect(hermitianEigen(n, re, im)).toEqual(first);
      }
    }
  });

  it("refuses what is not finite and arrays of the wrong length", () => {
    for (const bad of [Number.NaN, Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY]) {
      for (const at of [0, 3, 4, 8]) {
        const { re, im } = randomSample(3, true, at);
        const spoiled = re.map((x, k) => (k === at ? bad : x));
        expect(codeOf(() => hermitianEigen(3, spoiled, undefined))).toBe("not-finite");
        expect(codeOf(() => hermitianEigen(3, spoiled, im))).toBe("not-finite");
        expect(codeOf(() => hermitianEigen(3, re, spoiled))).toBe("not-finite");
      }
    }
    expect(() => hermitianEigen(2, Float64Array.of(1, Number.NaN, 0, 1), undefined)).toThrow("entry (0, 1) is NaN");
    expect(() => hermitianEigen(2, Float64Array.of(1, 0, Number.NaN, 1), undefined)).toThrow("entry (1, 0) is NaN");
    expect(() => hermitianEigen(2, Float64Array.of(1, 0, 0, Number.NaN), undefined)).toThrow("entry (1, 1) is NaN");
    expect(codeOf(() => hermitianEigen(2, new Float64Array(3), undefined))).toBe("shape");
    expect(codeOf(() => hermitianEigen(2, new Float64Array(4), new Float64Array(3)))).toBe("shape");
    const rows = JSON.parse("[[0, 1], [1, 0]]");
    expect(codeOf(() => hermitianEigen(2, rows, undefined))).toBe("shape");
    expect(codeOf(() => hermitianEigen(2, new Float64Array(4), rows))).toBe("shape");
    expect(codeOf(() => hermitianEigen(1.5, new Float64Array(2), undefined))).toBe("shape");
  });

  it("solves the empty matrix", () => {
    const empty = hermitianEigen(0, new Float64Array(0), undefined);
    expect([empty.n, empty.values.length, empty.re.length, empty.im]).toEqual([0, 0, 0, undefined]);
  });

  it("solves small matrices of small integers with any thresholds", () => {
    const cases = fc.record({
      n: fc.integer({ min: 1, max: 14 }),
      entries: fc.array(fc.tuple(fc.integer({ min: -1, max: 1 }), fc.integer({ min: -1, max: 1 })), {
        minLength: 105,
        maxLength: 105,
      }),
      complex: fc.boolean(),
      leaf: fc.integer({ min: 1, max: 6 }),
      blockedFrom: fc.integer({ min: 1, max: 14 }),
      blockWidth: fc.integer({ min: 1, max: 6 }),
    });
    fc.assert(
      fc.property(cases, ({ n, entries, complex, ...tuning }) => {
        solved(
          sample(n, complex, (i, j) => entries[(i * (i + 1)) / 2 + j] ?? [0, 0]),
          tuning,
        );
      }),
      { seed: 20, numRuns: 300 },
    );
  });

  describe("windows", () => {
    const of = randomSample(37, true, 4);
    const blocks = sample(24, true, (i, j) => {
      const at = i * 37 + j;
      return i % 3 === j % 3 ? [of.re[at] as number, of.im?.[at] ?? 0] : [0, 0];
    });
    it.each([
      ["in one piece", of],
      ["in three pieces", blocks],
    ])("give the stretch of all eigenpairs that they name (%s)", (_, { n, re, im }) => {
      const all = hermitianEigen(n, re, im);
      const middle = all.values[10] as number;
      const cases: [EigenWindow, number, number][] = [
        [{}, 0, n],
        [{ from: 3, to: 9 }, 3, 9],
        [{ from: 5, to: 5 }, 5, 5],
        [{ low: middle }, 10, n],
        [{ high: middle }, 0, 11],
        [{ low: middle, high: middle }, 10, 11],
        [{ low: middle, from: 12, to: 20 }, 12, 20],
        [{ low: middle, from: 2, to: 13 }, 10, 13],
        [{ low: 1e9 }, n, n],
        [{ high: -1e9 }, 0, 0],
      ];
      for (const tuning of [undefined, { leaf: 3, blockedFrom: 3, blockWidth: 4 }]) {
        const whole = hermitianEigenBy(engine, n, re, im, {}, tuning);
        for (const [window, from, to] of cases) {
          // The last digit of the eigenvalue that bounds a window may change with the thresholds.
          if (tuning !== undefined && ("low" in window || "high" in window)) continue;
          const found = hermitianEigenBy(engine, n, re, im, { window }, tuning);
          expect([found.first, found.values.length]).toEqual([from, to - from]);
          expect(found.values).toEqual(whole.values.slice(from, to));
          // Rows pass through products of another height; the sums that make an entry are the same.
          expect(found.re).toEqual(whole.re.slice(from * n, to * n));
          expect(found.im).toEqual(whole.im?.slice(from * n, to * n));
        }
      }
    });

    it.each([false, true])(
      "have the bits of the whole, at every height of the last group of rows (complex: %s)",
      (complex) => {
        for (const n of [2, 3, 4, 5, 6, 7, 9, 12, 16, 31, 33, 40, 63, 79, 80, 97, 120]) {
          const { re, im } = randomSample(n, complex, n);
          const whole = hermitianEigen(n, re, im);
          const step = n < 20 ? 1 : Math.floor(n / 7);
          for (let from = 0; from < n; from += step) {
            for (const to of [from + 1, from + 2, from + 3, from + 4, from + 6, n]) {
              if (to > n) continue;
              const ends = { low: whole.values[from] as number, high: whole.values[to - 1] as number };
              for (const window of [{ from, to }, ends]) {
                const found = hermitianEigen(n, re, im, { window });
                expect(found.first).toBe(from);
                expect(found.values).toEqual(whole.values.slice(from, to));
                expect(found.re).toEqual(whole.re.slice(from * n, to * n));
                expect(found.im).toEqual(whole.im?.slice(from * n, to * n));
              }
            }
          }
        }
      },
    );

    it("without eigenvalues say how many lie below, within their indices, in one piece or in several", () => {
      const connected = sample(3, false, (i, j) => [i + j + 1, 0]);
      const pieces = sample(3, false, (i, j) => [i === j ? 1 : 0, 0]);
      for (const { n, re, im } of [connected, pieces]) {
        const first = (window: EigenWindow): number => {
          const found = hermitianEigen(n, re, im, { window });
          expect([found.values.length, found.re.length]).toEqual([0, 0]);
          return found.first;
        };
        expect(first({ low: 100 })).toBe(3);
        expect(first({ low: 100, to: 2 })).toBe(2);
        expect(first({ high: -100 })).toBe(0);
        expect(first({ high: -100, from: 2 })).toBe(2);
        expect(first({ from: 1, to: 1 })).toBe(1);
        expect(first({ low: 100, from: 1, to: 1 })).toBe(1);
      }
    });

    it("of orders zero and one", () => {
      const one = Float64Array.of(5);
      expect(hermitianEigen(1, one, undefined, { window: { low: 6 } })).toMatchObject({ n: 1, first: 1 });
      expect(hermitianEigen(1, one, undefined, { window: { high: 4 } }).values.length).toBe(0);
      expect(hermitianEigen(1, one, Float64Array.of(0), { window: { low: 5 } })).toMatchObject({
        values: one,
        im: Float64Array.of(0),
      });
    });

    it("that are none are refused", () => {
      const bad: EigenWindow[] = [
        { from: -1 },
        { from: 3, to: 2 },
        { to: 38 },
        { from: 0.5 },
        { low: 1, high: 0 },
        { low: Number.NaN },
      ];
      for (const window of bad) {
        expect(codeOf(() => hermitianEigen(37, of.re, of.im, { window }))).toBe("option");
      }
    });
  });

  it("refuses a matrix that is not Hermitian, unless the lower triangle is to stand for it", () => {
    for (const complex of [false, true]) {
      for (const n of [2, 6, 15, 16, 17, 33, 50]) {
        const { re, im } = randomSample(n, complex, 5);
        const first = hermitianEigen(n, re, im);
        const spoil = (m: Float64Array, at: number, x: number): Float64Array => m.map((y, k) => (k === at ? y + x : y));
        const verdict = (a: Float64Array, b?: Float64Array): string => codeOf(() => hermitianEigen(n, a, b));
        const ends: [number, number][] = [
          [0, 1],
          [0, n - 1],
          [n - 2, n - 1],
        ];
        for (const [i, j] of ends) {
          const at = i * n + j;
          expect(verdict(spoil(re, at, 1e-17 * n), im)).toBe("nothing thrown");
          expect(verdict(spoil(re, at, 1e-14 * n), im)).toBe("not-hermitian");
          expect(verdict(spoil(re, at, Number.NaN), im)).toBe("not-finite");
          expect(verdict(spoil(re, at, Number.POSITIVE_INFINITY), im)).toBe("not-finite");
          expect(hermitianEigen(n, spoil(re, at, 1), im, { upper: "ignore" })).toEqual(first);
          expect(() => hermitianEigen(n, spoil(re, at, 1), im)).toThrow(`entries (${j}, ${i}) and (${i}, ${j})`);
          if (im === undefined) continue;
          expect(verdict(re, spoil(im, at, 1e-14 * n))).toBe("not-hermitian");
          expect(verdict(re, spoil(im, at, Number.NaN))).toBe("not-finite");
        }
        // The diagonal of a Hermitian matrix is real.
        if (im !== undefined) expect(verdict(re, spoil(im, n + 1, 1e-14 * n))).toBe("not-hermitian");
      }
    }
  });

  it("keeps the promise for every matrix that it accepts as Hermitian", () => {
    for (const complex of [false, true]) {
      for (const n of [2, 5, 16, 40, 90]) {
        const made = [randomSample(n, complex, n), sample(n, complex, (i, j) => [i === j ? 1 : 0, 0])];
        for (const { re, im } of made) {
          let row = 0;
          for (let i = 0; i < n; i++) {
            let square = 0;
            for (let k = i * n; k < i * n + n; k++) square += (re[k] as number) ** 2 + (im?.[k] ?? 0) ** 2;
            row = Math.max(row, Math.sqrt(square));
          }
          // Of one sign throughout, so that its spectral norm is close to its Frobenius norm.
          const bent = (share: number): Sample => {
            const each = (share * n * U * row) / Math.sqrt((n * (n - 1)) / 2);
            return { n, re: re.map((x, k) => (k % n > Math.floor(k / n) ? x + each : x)), im };
          };
          solved(bent(7.9 - 0.5));
          expect(codeOf(() => hermitianEigen(n, bent(10).re, im))).toBe("not-hermitian");
          const scaled = bent(10).re.map((x) => x * 2 ** -1000);
          expect(
            codeOf(() =>
              hermitianEigen(
                n,
                scaled,
                im?.map((y) => y * 2 ** -1000),
              ),
            ),
          ).toBe("not-hermitian");
        }
      }
    }
    // One unit in the last place too much in every entry of a triangle is within the bound of an entry, not of the matrix.
    const n = 64;
    const skew = Float64Array.from({ length: n * n }, (_, k) => {
      const [i, j] = [Math.floor(k / n), k % n];
      return i === j ? 1 : j > i ? 0.999 * n * U : 0;
    });
    expect(codeOf(() => hermitianEigen(n, skew, undefined))).toBe("not-hermitian");
  });

  it("keeps the promise for subnormal matrices but for the rounding of eigenvalues to what there is", () => {
    for (const complex of [false, true]) {
      for (const exponent of [-1022, -1040, -1060, -1070]) {
        const n = 12;
        const { re, im } = randomSample(n, complex, 3);
        const small = (m: Float64Array): Float64Array => m.map((x) => x * 2 ** exponent);
        const of = { n, re: small(re), im: im && small(im) };
        const found = hermitianEigen(n, of.re, of.im);
        const { residual, orthogonality } = quality(of, found);
        const norm = Math.max(...found.values.map(Math.abs));
        // Residuals are in units of n u ‖A‖; √n roundings of half of 2^−1074 come on top.
        expect(residual).toBeLessThanOrEqual(20 + (Math.sqrt(n) * 2 ** -1074) / norm / 2 / (n * U));
        expect(orthogonality).toBeLessThanOrEqual(20);
      }
    }
  });

  it("refuses options that are none", () => {
    const { re } = randomSample(3, false, 1);
    for (const options of [
      null,
      7,
      { window: null },
      { window: 7 },
      { upper: "bogus" },
      { upper: null },
      { window: { low: "a" } },
    ]) {
      expect(codeOf(() => hermitianEigen(3, re, undefined, options as never))).toBe("option");
    }
    expect(codeOf(() => hermitianEigen("3" as never, re, undefined))).toBe("shape");
    expect(codeOf(() => hermitianEigen(3, re, null as never))).toBe("shape");
  });

  it("solves in pieces what falls into pieces", () => {
    for (const complex of [false, true]) {
      const random = generator(8);
      const scattered = sample(60, complex, (i, j) => ((i - j) % 7 === 0 ? [random(), random()] : [0, 0]));
      const found = solved(scattered);
      for (let k = 0; k < 60; k++) {
        const support = list(60, (j) => j).filter((j) => found.re[k * 60 + j] !== 0);
        expect(new Set(support.map((j) => j % 7)).size).toBe(1);
      }
    }
  });

  it("is measured by a check that notices a wrong digit", () => {
    const of = randomSample(20, true, 1);
    const found = hermitianEigen(20, of.re, of.im);
    const spoil = (m: Float64Array, at: number): Float64Array => m.map((x, k) => (k === at ? x + 1e-12 : x));
    expect(quality(of, { ...found, values: spoil(found.values, 7) }).residual).toBeGreaterThan(20);
    expect(quality(of, { ...found, re: spoil(found.re, 33) }).orthogonality).toBeGreaterThan(20);
    expect(quality(of, { ...found, im: found.im?.map((x) => -x) }).residual).toBeGreaterThan(1e10);
  });
});

/** Ascending eigenvalues by ml-matrix. */
function reference(n: number, entry: (i: number, k: number) => number): number[] {
  const rows = list(n, (i) => i).map((i) => list(n, (k) => entry(i, k)));
  const found = new EigenvalueDecomposition(new Matrix(rows), { assumeSymmetric: true });
  return found.realEigenvalues.sort((a, b) => a - b);
}
