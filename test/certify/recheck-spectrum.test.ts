import { describe, expect, it } from "vitest";
import { spectrumOf } from "../../src/certify/recheck-spectrum.js";
import { hopping } from "../../src/models/lattice.js";
import { Operator } from "../../src/operator/operator.js";

describe("the spectrum of H0 by parts", () => {
  it("is counted part by part", () => {
    // two dimers with eigenvalues ±1 and ±1, and a single site at 0
    const spectrum = spectrumOf(
      hopping(5, [
        [0, 3],
        [1, 4],
      ]),
    );
    expect(spectrum.largest).toBe(2);
    expect([-2, -0.5, 0.5, 2].map((sigma) => spectrum.count(sigma).below)).toEqual([0, 2, 3, 5]);
  });

  it("carries the uncertainty of the entries", () => {
    const exact = spectrumOf(Operator.diagonal([1, 2], { uncertainty: "exact" }));
    expect(exact.count(1.5)).toEqual({ below: 1, error: 0 });
    const vague = spectrumOf(Operator.diagonal([1, 2], { uncertainty: { absolute: 0.25 } }));
    expect(vague.count(1.5).error).toBeGreaterThanOrEqual(0.25);
  });

  it("is left alone where a part is too large", () => {
    const chain = (n: number): Operator =>
      hopping(
        n,
        Array.from({ length: n - 1 }, (_, k) => [k, k + 1] as const),
      );
    expect(spectrumOf(chain(1500)).countable).toBe(true);
    expect(spectrumOf(chain(1501)).countable).toBe(false);
  });
});
