import { describe, expect, it } from "vitest";
import { findGoodBasis, type GoodBasis, perturb } from "../../src/index.js";

const problem = {
  h0: { diagonal: [1, 1, 2] },
  v: [
    [-1, 0, 0],
    [0, 0, 1],
    [0, 1, 0],
  ],
  candidates: { A: { diagonal: [1, 0, 0] } },
};

function good(): GoodBasis<"A"> {
  const outcome = findGoodBasis(problem);
  if (outcome.verdict !== "good") throw new Error(outcome.verdict);
  return outcome.basis;
}

/** What plain JavaScript would hand over. */
function untyped(value: unknown): never {
  return value as never;
}

const forged = expect.objectContaining({ name: "GoodBasisError", code: "not-certified" });

describe("a good basis cannot be forged", () => {
  const basis = good();

  it.each([
    ["nothing", undefined],
    ["null", null],
    ["a word", "good"],
    ["a number", 1],
    ["a function", () => basis],
    ["an empty object", {}],
    ["a look-alike", { states: basis.states, levels: basis.levels, study: basis.study }],
    ["the outcome", { ...findGoodBasis(problem) }],
    ["the study", basis.study],
    ["a spread copy", { ...basis }],
    ["its JSON", JSON.parse(JSON.stringify(basis))],
    ["its structured clone", structuredClone(basis)],
    ["an heir of its prototype", Object.create(Object.getPrototypeOf(basis))],
    ["an heir of itself", Object.create(basis)],
    ["a proxy", new Proxy(basis, {})],
    ["an object with its prototype set", Object.setPrototypeOf({ states: basis.states }, Object.getPrototypeOf(basis))],
  ])("%s does not pass", (_, lookalike) => {
    expect(() => perturb(untyped(lookalike))).toThrow(forged);
  });

  it("its constructor, reached through the prototype, refuses every key", () => {
    const Certified = (Object.getPrototypeOf(basis) as { constructor: new (...given: unknown[]) => object })
      .constructor;
    for (const key of [undefined, null, Symbol("certified"), Symbol.for("certified"), "certified", {}]) {
      expect(() => new Certified(key, basis.study)).toThrow(forged);
      expect(() => Reflect.construct(Certified, [key, basis.study], Object)).toThrow(forged);
    }
    class Heir extends Certified {}
    expect(() => new Heir(Symbol("certified"), basis.study)).toThrow(forged);
  });

  it("no key hangs on the basis, its prototype or its constructor", () => {
    const own = (Object.getPrototypeOf(basis) as { constructor: object }).constructor;
    expect(Object.getOwnPropertySymbols(basis)).toEqual([]);
    expect(Object.getOwnPropertySymbols(Object.getPrototypeOf(basis))).toEqual([]);
    expect(Object.getOwnPropertySymbols(own)).toEqual([]);
    expect(Object.getOwnPropertyNames(basis)).toEqual([]);
  });

  it("nothing that it hands out can be changed, but what typed arrays hold", () => {
    const own = good();
    const mutable: string[] = [];
    const visit = (value: unknown, path: string): void => {
      if (typeof value !== "object" || value === null || ArrayBuffer.isView(value) || value instanceof Map) return;
      if (!Object.isFrozen(value)) mutable.push(path);
      for (const [key, { value: item }] of Object.entries(Object.getOwnPropertyDescriptors(value))) {
        visit(item, `${path}.${key}`);
      }
    };
    visit(own.states, "states");
    visit(own.levels, "levels");
    visit(own.study, "study");
    expect(mutable).toEqual([]);
    const [first] = own.states;
    expect(() => Object.assign(first?.shifts[0] ?? {}, { value: 42 })).toThrow(TypeError);
    expect(() => Object.assign(first?.labels.A ?? {}, { text: "7" })).toThrow(TypeError);
    expect(perturb(own, { order: 1 }).states[0]?.first?.[0]?.value).toBe(first?.shifts[0]?.value);
  });

  it("an undecided or not-good outcome has no basis", () => {
    const outcome = findGoodBasis(
      {
        ...problem,
        v: [
          [0, 1, 0],
          [1, 0, 0],
          [0, 0, 0],
        ],
        candidates: {},
      },
      { depth: "labels" },
    );
    expect(outcome.verdict).toBe("not good");
    expect("basis" in outcome).toBe(false);
  });
});

describe("a good basis cannot be talked into more than was proved", () => {
  // The plane rotor's pair is left together at first order: short second-order formulas are refused.
  const basis = (() => {
    const outcome = findGoodBasis({ h0: { diagonal: [0, 1, 1] }, v: { diagonal: [0, 1, 1] } });
    if (outcome.verdict !== "good") throw new Error(outcome.verdict);
    return outcome.basis;
  })();
  const unsafe = expect.objectContaining({ code: "unsafe-order" });

  it("refuses to begin with", () => {
    expect(() => perturb(basis, { order: 2 })).toThrow(unsafe);
  });

  it("and after every attempt to write into it", () => {
    const attempts: (() => unknown)[] = [
      () => Object.assign(basis.states[1]?.safe ?? {}, { energies: "all", states: "all" }),
      () => Object.assign(basis.states[1] ?? {}, { safe: { energies: "all", states: "all" } }),
      () => Object.assign(basis.states, { 1: basis.states[0], 2: basis.states[0] }),
      () => Object.assign(basis.study, { states: [] }),
      () => Object.assign(basis, { states: [] }),
      () => Object.defineProperty(basis, "study", { value: { ...basis.study, states: [] } }),
    ];
    for (const attempt of attempts) {
      expect(attempt).toThrow(TypeError);
      expect(() => perturb(basis, { order: 2 })).toThrow(unsafe);
    }
  });

  it("vectors that are written into change nothing that is computed from them", () => {
    const before = JSON.stringify(perturb(good(), { states: 1 }));
    const own = good();
    for (const { vector } of own.states) vector.re.fill(7);
    expect(JSON.stringify(perturb(own, { states: 1 }))).toBe(before);
  });
});
