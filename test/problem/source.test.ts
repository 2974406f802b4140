import { describe, expect, it } from "vitest";
import { findGoodBasis } from "../../src/certify/find.js";
import { inSource } from "../../src/problem/source.js";
import { errorOf, readFields } from "./files.js";

const two = { h0: { diagonal: [0, 1] }, v: { diagonal: [1, 0] } };
const three = { diagonal: [1, 2, 3] };
const skew = [
  [0, 1],
  [2, 0],
];

/** What the main job says of a file with these fields; its own options count as stated there. */
function found(fields: Readonly<Record<string, unknown>>): string {
  const read = readFields({ ...two, ...fields });
  return errorOf(() => inSource(read, Object.keys(read.options), () => findGoodBasis(read.problem, read.options)));
}

describe("errors that come after reading name file, line and field", () => {
  it.each<readonly [string, Readonly<Record<string, unknown>>, RegExp]>([
    ["H0", { h0: skew }, /^not-hermitian: p\.json, line 4, h0: H0 is not Hermitian/],
    ["V", { v: skew }, /^not-hermitian: p\.json, line \d+, v: V is not Hermitian/],
    ["V by name", { v: { stark: skew } }, /^not-hermitian: p\.json, line \d+, v\.stark: stark is not/],
    ["a candidate", { candidates: { A: three } }, /^shape: p\.json, line \d+, candidates\.A: A is 3 × 3/],
    [
      "a ladder",
      { candidates: { A: { operator: { diagonal: [1, 2] }, ladder: three } } },
      /^shape: p\.json, line \d+, candidates\.A\.ladder: A\.ladder is 3 × 3/,
    ],
    ["a name", { candidates: { V: { diagonal: [1, 2] } } }, /^name: p\.json, line \d+, candidates\.V: candidate "V"/],
    ["levels", { options: { levels: { from: 5, to: 6 } } }, /^no-level: p\.json, line \d+, options\.levels: no level/],
    ["resolution", { options: { resolution: 2 } }, /^option: p\.json, line \d+, options\.resolution: resolution is 2/],
  ])("%s", (_, fields, message) => {
    expect(found(fields)).toMatch(message);
  });

  it("but not for options that come from elsewhere, nor errors that are about nothing in the file", () => {
    const read = readFields({ ...two, options: { levels: { from: 5, to: 6 } } });
    const from = (own: readonly string[], levels: unknown): string =>
      errorOf(() => inSource(read, own, () => Reflect.apply(findGoodBasis, undefined, [read.problem, { levels }])));
    expect(from([], { from: 7, to: 8 })).toMatch(/^no-level: no level/);
    expect(() =>
      inSource(read, [], () => {
        throw new RangeError("its own");
      }),
    ).toThrow(RangeError);
  });
});
