import {
  type BasisState,
  findGoodBasis,
  type GoodBasis,
  Operator,
  type Outcome,
  type Perturbation,
  perturb,
  type Question,
  type StateLabel,
  type Study,
  validateBasis,
} from "goodbasis";
import { describe, expectTypeOf, it } from "vitest";

const h0 = Operator.identity(2);
const problem = { h0, v: h0, candidates: { J2: h0, Jz: { operator: h0, label: "m" } } } as const;

describe("labels are typed by the candidates' names", () => {
  it("a misspelt label does not compile", () => {
    const outcome = findGoodBasis(problem);
    expectTypeOf(outcome).toEqualTypeOf<Outcome<"J2" | "Jz">>();
    if (outcome.verdict !== "good") return;
    const [state] = outcome.basis.states;
    expectTypeOf(outcome.basis).toEqualTypeOf<GoodBasis<"J2" | "Jz">>();
    expectTypeOf(state?.labels.Jz).toEqualTypeOf<StateLabel | undefined>();
    // @ts-expect-error no candidate has this name
    state?.labels.jz;
    // @ts-expect-error nor this
    state?.labels["Lz"];
  });

  it("without candidates there are no labels", () => {
    const outcome = findGoodBasis({ h0, v: h0 });
    expectTypeOf(outcome).toEqualTypeOf<Outcome<never>>();
    // @ts-expect-error no candidate was given
    outcome.states[0]?.labels.Jz;
  });

  it("claims are made under the candidates' names", () => {
    validateBasis(problem, [[1], [0]], { J2: [1], Jz: ["1/2"] });
    validateBasis(problem, [[1], [0]], { J2: [{ re: 0, im: 1 }] });
    // @ts-expect-error no candidate has this name
    validateBasis(problem, [[1], [0]], { jz: [1] });
    // @ts-expect-error a claim is a number or a text
    validateBasis(problem, [[1], [0]], { Jz: [true] });
  });
});

describe("verdicts", () => {
  it("a basis exists under good only", () => {
    const outcome = findGoodBasis(problem);
    // @ts-expect-error the verdict has to be asked first
    outcome.basis;
    switch (outcome.verdict) {
      case "good":
        expectTypeOf(outcome.basis).toEqualTypeOf<GoodBasis<"J2" | "Jz">>();
        break;
      case "not good":
        expectTypeOf(outcome.couplings.length).toEqualTypeOf<number>();
        // @ts-expect-error a basis that is not good cannot be had
        outcome.basis;
        break;
      case "undecided":
        expectTypeOf(outcome.questions).toEqualTypeOf<readonly Question[]>();
        // @ts-expect-error nor one that is undecided
        outcome.basis;
        break;
      default:
        expectTypeOf(outcome).toBeNever();
    }
  });
});

describe("perturb takes a good basis and nothing less", () => {
  it("look-alikes do not compile", () => {
    const outcome = findGoodBasis(problem);
    if (outcome.verdict !== "good") return;
    expectTypeOf(perturb(outcome.basis)).toEqualTypeOf<Perturbation>();
    const lookalike: { states: readonly BasisState[]; levels: Study["levels"]; study: Study } = outcome.basis;
    // @ts-expect-error the same fields make no good basis
    perturb(lookalike);
    // @ts-expect-error nor does a copy
    perturb({ ...outcome.basis });
    // @ts-expect-error nor the study
    perturb(outcome.basis.study);
    // @ts-expect-error nor the outcome
    perturb(outcome);
    // @ts-expect-error nor its states
    perturb(outcome.states);
    // @ts-expect-error nor nothing
    perturb(undefined);
  });

  it("the class behind it is not exported", () => {
    // @ts-expect-error GoodBasis is a type, not a value
    new GoodBasis();
  });

  it("what it says is for reading", () => {
    const outcome = findGoodBasis(problem);
    if (outcome.verdict !== "good") return;
    const { basis } = outcome;
    // @ts-expect-error states are fixed
    basis.states = [];
    // @ts-expect-error and so is each of them
    basis.states[0] = basis.states[1];
    const [state] = basis.states;
    if (state === undefined) return;
    // @ts-expect-error the safe orders are not the caller's to raise
    state.safe = { energies: "all", states: "all" };
    // @ts-expect-error in no part
    state.safe.energies = "all";
  });

  it("options are checked", () => {
    const outcome = findGoodBasis(problem, { depth: "labels", levels: { lowest: 2 } });
    // @ts-expect-error no such depth
    findGoodBasis(problem, { depth: "third order" });
    // @ts-expect-error no such choice of levels
    findGoodBasis(problem, { levels: { highest: 2 } });
    if (outcome.verdict !== "good") return;
    // @ts-expect-error an order is a number
    perturb(outcome.basis, { order: "2" });
  });
});
