import { type ErrorCode, GoodBasisError } from "goodbasis";
import { describe, expectTypeOf, it } from "vitest";

describe("GoodBasisError", () => {
  it("carries a code from the closed list", () => {
    expectTypeOf<GoodBasisError["code"]>().toEqualTypeOf<ErrorCode>();
    expectTypeOf<"not-hermitian">().toExtend<ErrorCode>();
    expectTypeOf<"hermitian">().not.toExtend<ErrorCode>();
    // @ts-expect-error a code outside the list does not compile
    new GoodBasisError("hermitian", "message");
  });

  it("keeps its code and details readonly", () => {
    const error = new GoodBasisError("shape", "message");
    // @ts-expect-error the code is fixed when the error is made
    error.code = "name";
    // @ts-expect-error details are for reading
    error.details["row"] = 1;
  });
});
