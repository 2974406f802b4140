import { describe, expect, it } from "vitest";
import { GoodBasisError } from "../src/errors.js";

describe("GoodBasisError", () => {
  it("is an Error that a caller can tell apart by class, name and code", () => {
    const error = new GoodBasisError("shape", "Operator.from: row 1 has 1 entry, expected 2");
    expect(error).toBeInstanceOf(Error);
    expect(error).toBeInstanceOf(GoodBasisError);
    expect(error.name).toBe("GoodBasisError");
    expect(error.code).toBe("shape");
    expect(String(error)).toBe("GoodBasisError: Operator.from: row 1 has 1 entry, expected 2");
  });

  it("hands the facts over as given, and an empty record when there are none", () => {
    const details = { row: 3, column: 1, value: Number.NaN };
    expect(new GoodBasisError("not-finite", "message", details).details).toEqual(details);
    expect(new GoodBasisError("not-finite", "message").details).toEqual({});
  });

  it("points its stack at the place that threw", () => {
    function misuse(): never {
      throw new GoodBasisError("option", "message");
    }
    let stack = "";
    try {
      misuse();
    } catch (error) {
      stack = error instanceof GoodBasisError ? (error.stack ?? "") : "";
    }
    expect(stack.split("\n")[1]).toContain("misuse");
  });
});
