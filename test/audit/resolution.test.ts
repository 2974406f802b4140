import { describe, expect, it } from "vitest";
import * as thresholds from "../../src/audit/resolution.js";

describe("checkResolution", () => {
  it("passes what lies strictly between 0 and 1", () => {
    for (const x of [Number.MIN_VALUE, thresholds.DEFAULT_RESOLUTION, 0.5, 1 - 2 ** -53])
      expect(thresholds.checkResolution(x)).toBe(x);
  });

  it("refuses everything else", () => {
    for (const x of [0, -0, 1, -1e-10, 2, Number.NaN, Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY]) {
      expect(() => thresholds.checkResolution(x)).toThrow(
        expect.objectContaining({ code: "option", details: { resolution: x } }),
      );
    }
  });
});

describe("the thresholds fit together", () => {
  it("noise below level widths, level widths below label widths, all far below the resolution", () => {
    expect(thresholds.NOISE).toBeLessThan(thresholds.LEVEL_WIDTH);
    expect(thresholds.LEVEL_WIDTH).toBeLessThan(thresholds.LABEL_WIDTH);
    expect(thresholds.LABEL_WIDTH).toBeLessThan(thresholds.DEFAULT_RESOLUTION);
    expect(thresholds.COMMUTATOR_SHARE).toBeLessThan(1);
    expect(thresholds.FAR_BELOW).toBeLessThan(0.01);
    expect(thresholds.REFUSE_ABOVE).toBeLessThan(thresholds.REFUSE_ABOVE_UNSTATED);
  });
});
