import {
  type Csr,
  ExactOperator,
  findGoodBasis,
  type GoodBasis,
  hopping,
  type NoOperatorProposal,
  Operator,
  type ProposedOperator,
  recogniseOperator,
  Surd,
} from "goodbasis";
import { describe, expectTypeOf, it } from "vitest";

const texts = [
  ["1/2", 0],
  [0, "sqrt(2)"],
];

describe("exact numbers go wherever numbers go", () => {
  it("in matrices, factors and amplitudes", () => {
    expectTypeOf(Operator.from(texts)).toEqualTypeOf<Operator>();
    Operator.from([
      [1n, Surd.one],
      ["i", 0.5],
    ]);
    Operator.from({
      n: 2,
      entries: [
        [0, 1, "1/3"],
        [1, 0, 2, "1/3"],
      ],
    });
    Operator.from({ diagonal: ["1/3", 1] });
    Operator.from({ permutation: [1, 0], phases: ["i", { re: 0, im: -1 }] });
    Operator.diagonal(["1/3", 1]).scale("sqrt(2)").scale(2n).scale(Surd.i).scale({ re: 0, im: 1 });
    hopping(
      3,
      [
        [0, 1],
        [1, 2],
      ],
      ["1/3", 0.5],
    );
    // @ts-expect-error nothing is no number
    Operator.from([[undefined]]);
    // @ts-expect-error a complex number inside a matrix is written as text
    Operator.from([[{ re: 0, im: 1 }]]);
  });

  it("in problems, beside plain ones", () => {
    const outcome = findGoodBasis({
      h0: ExactOperator.from(texts),
      v: [
        [0, 1],
        [1, 0],
      ],
      candidates: { A: texts },
    });
    if (outcome.verdict === "good") expectTypeOf(outcome.basis).toEqualTypeOf<GoodBasis<"A">>();
  });

  it("and come out again where they are known", () => {
    const operator = Operator.from(texts);
    expectTypeOf(operator.exact).toEqualTypeOf<ExactOperator | undefined>();
    expectTypeOf(operator.csr).toEqualTypeOf<Csr>();
    expectTypeOf(recogniseOperator(operator)).toEqualTypeOf<ProposedOperator | NoOperatorProposal>();
  });
});
