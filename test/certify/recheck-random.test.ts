import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { Problem } from "../../src/audit/problem.js";
import { type FindOptions, findGoodBasis } from "../../src/certify/find.js";
import { recheck } from "../../src/certify/recheck.js";

type Dense = { readonly re: number[][]; readonly im: number[][] };

/** A product of complex Givens rotations, as rows; unitary to rounding. */
function rotation(n: number, angles: readonly number[], complex: boolean): Dense {
  const re = Array.from({ length: n }, (_, i) => Array.from({ length: n }, (_, j) => (i === j ? 1 : 0)));
  const im = re.map((row) => row.map(() => 0));
  angles.forEach((angle, k) => {
    const i = k % n;
    const j = (k * 3 + 1) % n;
    if (i === j) return;
    const phase = complex ? 7 * angle : 0;
    const c = Math.cos(angle);
    const [u, v] = [Math.sin(angle) * Math.cos(phase), Math.sin(angle) * Math.sin(phase)];
    for (let m = 0; m < n; m++) {
      const [a, b, x, y] = [re[i]?.[m] ?? 0, im[i]?.[m] ?? 0, re[j]?.[m] ?? 0, im[j]?.[m] ?? 0];
      (re[i] as number[])[m] = c * a - (u * x - v * y);
      (im[i] as number[])[m] = c * b - (u * y + v * x);
      (re[j] as number[])[m] = c * x + (u * a + v * b);
      (im[j] as number[])[m] = c * y + (u * b - v * a);
    }
  });
  return { re, im };
}

/** U† M U for a Hermitian or diagonal M, made Hermitian to the last bit where it is meant to be. */
function turned(u: Dense, m: Dense, hermitian: boolean): Dense {
  const n = u.re.length;
  const at = (x: Dense, i: number, j: number): [number, number] => [x.re[i]?.[j] ?? 0, x.im[i]?.[j] ?? 0];
  const product = (left: Dense, right: Dense, adjoint: boolean): Dense => {
    const re: number[][] = [];
    const im: number[][] = [];
    for (let i = 0; i < n; i++) {
      const x = new Array<number>(n).fill(0);
      const y = new Array<number>(n).fill(0);
      for (let j = 0; j < n; j++) {
        for (let k = 0; k < n; k++) {
          const [a, b] = adjoint ? at(left, k, i) : at(left, i, k);
          const [c, d] = at(right, k, j);
          const sign = adjoint ? -1 : 1;
          x[j] = (x[j] as number) + a * c - sign * b * d;
          y[j] = (y[j] as number) + a * d + sign * b * c;
        }
      }
      re.push(x);
      im.push(y);
    }
    return { re, im };
  };
  const out = product(u, product(m, u, false), true);
  if (!hermitian) return out;
  const mean = (x: number[][], sign: number): number[][] =>
    x.map((row, i) => row.map((value, j) => (value + sign * (x[j]?.[i] ?? 0)) / 2));
  return { re: mean(out.re, 1), im: mean(out.im, -1) };
}

function diagonal(re: readonly number[], im: readonly number[] = []): Dense {
  const spread = (values: readonly number[]): number[][] =>
    re.map((_, i) => re.map((_, j) => (i === j ? (values[i] ?? 0) : 0)));
  return { re: spread(re), im: spread(im) };
}

interface Draft {
  readonly energies: readonly number[];
  readonly labels: readonly number[];
  readonly elements: readonly number[];
  readonly angles: readonly number[];
  readonly complex: boolean;
  readonly rotated: boolean;
  readonly labelled: boolean;
  readonly rooted: boolean;
}

/** Degenerate levels, a V that conserves the planted labels, all of it turned into another basis. */
function planted(draft: Draft): Problem {
  const { energies, labels, elements, angles, complex, rotated } = draft;
  const n = energies.length;
  const u = rotation(n, rotated ? angles : [], complex);
  const re = energies.map(() => new Array<number>(n).fill(0));
  const im = energies.map(() => new Array<number>(n).fill(0));
  let next = 0;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const x = elements[next++ % elements.length] as number;
      const y = complex && i !== j ? (elements[next++ % elements.length] as number) : 0;
      if (labels[i] !== labels[j]) continue;
      (re[i] as number[])[j] = x;
      (re[j] as number[])[i] = x;
      (im[i] as number[])[j] = y;
      (im[j] as number[])[i] = -y;
    }
  }
  const turn = (k: number): number => (2 * Math.PI * k) / 3;
  const root = diagonal(
    labels.map((k) => Math.cos(turn(k))),
    labels.map((k) => Math.sin(turn(k))),
  );
  return {
    h0: turned(u, diagonal(energies), true),
    v: turned(u, { re, im }, true),
    candidates: {
      ...(draft.labelled ? { A: turned(u, diagonal(labels), true) } : {}),
      ...(draft.rooted ? { T: { operator: turned(u, root, false), label: { root: 3 } } } : {}),
    },
  };
}

describe("recheck", () => {
  it("passes every certificate of a problem with planted symmetries", () => {
    const number = fc.double({ min: -1, max: 1, noNaN: true }).map((x) => (Math.abs(x) < 1e-100 ? 0 : x));
    const draft = fc.integer({ min: 2, max: 8 }).chain((n) =>
      fc.record({
        energies: fc.array(fc.constantFrom(0, 0, 1, 3), { minLength: n, maxLength: n }),
        labels: fc.array(fc.constantFrom(-1, 0, 1), { minLength: n, maxLength: n }),
        elements: fc.array(fc.oneof(fc.constantFrom(0, 0.5), number), {
          minLength: 17,
          maxLength: 17,
        }),
        angles: fc.array(fc.double({ min: -3, max: 3, noNaN: true }), { minLength: 12, maxLength: 12 }),
        complex: fc.boolean(),
        rotated: fc.boolean(),
        labelled: fc.boolean(),
        rooted: fc.boolean(),
      }),
    );
    const options: fc.Arbitrary<FindOptions> = fc.constantFrom<FindOptions>(
      {},
      { levels: { lowest: 1 } },
      { levels: { nearest: 1 } },
      { depth: "labels" },
      { depth: "first order" },
      { lambda: 0.5 },
    );
    const seen = new Set<string>();
    fc.assert(
      fc.property(draft, options, (given, how) => {
        const problem = planted(given);
        const outcome = findGoodBasis(problem, how);
        seen.add(outcome.verdict);
        const report = recheck(JSON.parse(JSON.stringify(outcome.certificate())), problem);
        expect(report.findings).toEqual([]);
      }),
      { seed: 1931, numRuns: 400 },
    );
    expect([...seen].sort()).toEqual(["good", "not good", "undecided"]);
  });
});
