import { describe, expect, it } from "vitest";
import * as goodbasis from "../src/index.js";
import { didYouMean, shown } from "../src/misuse.js";

const { ExactOperator, ExactVector, findGoodBasis, GoodBasisError, Operator, Surd } = goodbasis;

const problem = {
  h0: { diagonal: [1, 1, 2] },
  v: [
    [-1, 0, 0],
    [0, 0, 1],
    [0, 1, 0],
  ],
  candidates: { A: { diagonal: [1, 0, 0] } },
};
const outcome = findGoodBasis(problem);
if (outcome.verdict !== "good") throw new Error(outcome.verdict);
const { basis } = outcome;
const certificate = outcome.certificate();
const two = Operator.diagonal([1, 2]);

const flip = ExactOperator.from([
  [0, 1],
  [1, 0],
]);
const up = ExactVector.unit(2, 0);
const plane = [up, ExactVector.unit(2, 1)];
const signs = [Surd.from(1), Surd.from(-1)];

/** Classes whose objects come from their own makers alone. */
const MADE: readonly string[] = ["ExactOperator", "ExactVector", "Operator", "Surd"];
/** Functions for which an empty list is an answer, not a mistake. */
const MAY_BE_EMPTY: readonly string[] = ["orthogonalise"];

/** Arguments with which every exported function works; a function that is missing here fails the test below. */
const WORKING: Readonly<Record<string, readonly unknown[]>> = {
  GoodBasisError: ["shape", "a message", {}],
  ExactOperator: [],
  ExactVector: [],
  Operator: [],
  Surd: [],
  angularMomentum: [1],
  annihilates: [flip, signs, plane],
  auditCommutators: [problem, { resolution: 1e-9 }],
  basisTable: [basis, { terms: 2 }],
  characteristicPolynomial: [flip],
  exactEigenspace: [flip, 1, plane],
  exactKernel: [[flip]],
  exactRank: [flip],
  exactRootOfUnity: [1, 8],
  fieldRoots: [[Surd.from(-2), Surd.zero, Surd.one]],
  findGoodBasis: [problem, { depth: "full" }],
  fixExactPhase: [up],
  formatAudit: [outcome.audit, { width: 80 }],
  formatOutcome: [outcome, { width: 80 }],
  formatRecheck: [{ ok: true, checked: 1, findings: [], notChecked: [] }, { width: 80 }],
  formatTable: [goodbasis.basisTable(basis), "text", { digits: 5 }],
  hopping: [2, [[0, 1]], [-1]],
  ketPermutation: [
    [1, 0],
    [1, -1],
  ],
  minimalPolynomial: [flip],
  orthogonalise: [plane],
  oscillator: [3],
  perturb: [basis, { order: 2, states: 0, select: [0] }],
  productSpace: [[3, 2]],
  projectorTraces: [flip, signs],
  readBasis: ["[[1, 0], [0, 1]]", { name: "b.json", n: 2 }],
  readMatrixMarket: ["%%MatrixMarket matrix array real general\n1 1\n2\n", { name: "m.mtx" }],
  readProblem: [goodbasis.writeProblem(problem), { name: "p.json" }],
  recognise: [0.5, { tolerance: 1e-10, scale: 1, maxDenominator: 10, maxSquare: 0 }],
  recogniseMatrix: [two.csr, { tolerance: 1e-10, scale: 1, maxDenominator: 10, maxSquare: 0 }],
  recogniseOperator: [two, { tolerance: 1e-10, scale: 1, maxDenominator: 10, maxSquare: 0 }],
  recheck: [certificate, problem],
  reflection: [3, 2, 0],
  represent: [flip, plane],
  sitePermutation: [2, [1, 0]],
  spectralPart: [flip, signs, 0, up],
  spinChain: [2, 0.5],
  toMatrixMarket: [two],
  translation: [3, 2],
  validateBasis: [problem, Operator.identity(3), { A: [1, 0, 0] }, { resolution: 1e-9 }],
  writeProblem: [problem, { title: "t" }],
};

/** Methods of the objects that builders return, and of operators. */
const OBJECTS: Readonly<Record<string, object>> = {
  productSpace: goodbasis.productSpace([3, 2]),
  spinChain: goodbasis.spinChain(2),
  oscillator: goodbasis.oscillator(3),
  operator: Operator.from([
    [1, 2],
    [2, 5],
  ]),
  Operator,
  exactOperator: flip,
  ExactOperator,
  exactVector: up,
  ExactVector,
  surd: Surd.from("sqrt(2)"),
  Surd,
};

/** Methods that are no part of the public face, and trust what the library hands them. */
const INTERNAL: readonly string[] = ["fromTerms"];

/** What plain JavaScript may hand over by mistake. */
const ODD: readonly (readonly [string, unknown])[] = [
  ["undefined", undefined],
  ["null", null],
  ["{}", {}],
  ["[]", []],
  ["[[]]", [[]]],
  ["7", 7],
  ["-1", -1],
  ["NaN", Number.NaN],
  ["Infinity", Number.POSITIVE_INFINITY],
  ['"x"', "x"],
  ['""', ""],
  ['"1"', "1"],
  ["true", true],
  ["() => 0", (): number => 0],
  ["10n", 10n],
  ["[10n]", [10n]],
  ["{ n: 10n }", { n: 10n }],
  ["Symbol()", Symbol("odd")],
  ["[Symbol()]", [Symbol("odd")]],
  ["new Map()", new Map()],
  ["new Date()", new Date(0)],
  ["a DataView", new DataView(new ArrayBuffer(8))],
  ["Object.create(null)", Object.create(null)],
  ["an operator", two],
  ["a basis", basis],
];

const CODES = [
  "shape",
  "not-finite",
  "not-hermitian",
  "not-normal",
  "name",
  "option",
  "no-level",
  "unsafe-order",
].concat(["not-certified", "wrong-problem", "file", "text", "zero-division", "not-real", "budget"]);

/** What comes of a call: "returned", or the message of a typed error; anything else thrown is a defect. */
function attempt(call: () => unknown): string {
  try {
    call();
    return "returned";
  } catch (error) {
    if (!(error instanceof GoodBasisError)) return `raw ${String(error)}`;
    if (!CODES.includes(error.code)) return `raw code ${error.code}`;
    const poor =
      error.message.length < 20 || /\[object |function\s*\w*\(\)|=>/.test(error.message.replace(/[(][)] => 0/g, ""));
    return poor ? `raw message "${error.message}"` : error.message;
  }
}

function callOf(name: string, value: unknown): (...args: readonly unknown[]) => unknown {
  if (typeof value !== "function") throw new Error(`${name} is no function`);
  const isClass = /^class\b/.test(Function.prototype.toString.call(value));
  return (...args) => (isClass ? Reflect.construct(value, args) : Reflect.apply(value, undefined, args));
}

const functions = Object.entries(goodbasis).filter(([, value]) => typeof value === "function");

describe("every exported function, from plain JavaScript", () => {
  it("is in the list of this test", () => {
    expect(functions.map(([name]) => name).sort()).toEqual(Object.keys(WORKING).sort());
    for (const [name, args] of Object.entries(WORKING)) {
      if (MADE.includes(name)) continue;
      expect(
        attempt(() => callOf(name, Reflect.get(goodbasis, name))(...args)),
        name,
      ).toBe("returned");
    }
  });

  for (const [name, value] of functions) {
    const call = callOf(name, value);
    if (name === "GoodBasisError") continue; // made to be thrown, with any message
    const works = WORKING[name] ?? [];

    it(`${name} refuses odd arguments with a typed error, whichever they are`, () => {
      expect(attempt(() => call())).not.toMatch(/^raw/);
      for (const [first, odd] of ODD) {
        expect(
          attempt(() => call(odd)),
          `${name}(${first})`,
        ).not.toMatch(/^raw/);
        for (const [second, other] of ODD) {
          if (odd === 7 && other === 7) continue; // seven spins of j = 7 are a large space, and no misuse
          expect(
            attempt(() => call(odd, other)),
            `${name}(${first}, ${second})`,
          ).not.toMatch(/^raw/);
        }
        for (let k = 0; k < Math.max(1, works.length + 1); k++) {
          const args = [...works];
          args[k] = odd;
          expect(
            attempt(() => call(...args)),
            `${name} with ${first} in place ${k}`,
          ).not.toMatch(/^raw/);
        }
      }
    });

    it(`${name} takes none of nothing, null, {}, [], words, functions and NaN for its first argument`, () => {
      expect(
        attempt(() => call()),
        `${name}()`,
      ).not.toBe("returned");
      for (const odd of [undefined, null, {}, [], "x", (): number => 0, Number.NaN]) {
        if (Array.isArray(odd) && MAY_BE_EMPTY.includes(name)) continue;
        expect(
          attempt(() => call(odd)),
          `${name}(${String(odd)})`,
        ).not.toBe("returned");
      }
    });

    it(`${name} refuses options that hold null or an unknown name`, () => {
      const last = works.length - 1;
      const options: unknown = works[last];
      const isOptions =
        typeof options === "object" && options !== null && Object.getPrototypeOf(options) === Object.prototype;
      if (!isOptions || last < 1 || name === "recheck") return;
      for (const key of Object.keys(options)) {
        const message = attempt(() => call(...works.slice(0, last), { ...options, [key]: null }));
        expect(message).toContain(`the option ${key} is null`);
        expect(message).toContain(name);
        const misspelt = attempt(() => call(...works.slice(0, last), { [`${key}s`]: 1 }));
        expect(misspelt).toContain(`there is no option "${key}s"; did you mean "${key}"?`);
      }
    });
  }
});

/** The value with `odd` in place of each of its fields and items in turn, however deep, and with the path of that place. */
function* spoilt(value: unknown, odd: unknown, path = ""): Generator<readonly [string, unknown]> {
  yield [path, odd];
  if (Array.isArray(value)) {
    for (const [k, item] of value.entries()) {
      for (const [at, changed] of spoilt(item, odd, `${path}[${k}]`))
        yield [at, value.map((own: unknown, i) => (i === k ? changed : own))];
    }
  } else if (typeof value === "object" && value !== null && Object.getPrototypeOf(value) === Object.prototype) {
    for (const [key, item] of Object.entries(value)) {
      for (const [at, changed] of spoilt(item, odd, `${path}.${key}`)) yield [at, { ...value, [key]: changed }];
    }
  }
}

describe("every field of what is handed over", () => {
  const forms = {
    h0: {
      re: [
        [1, 0, 0],
        [0, 1, 0],
        [0, 0, 2],
      ],
      im: [
        [0, 0, 0],
        [0, 0, 0],
        [0, 0, 0],
      ],
    },
    v: {
      stark: {
        n: 3,
        entries: [
          [0, 1, 0.5, 0.5],
          [1, 0, 0.5, -0.5],
        ],
      },
      zeeman: { diagonal: [1, 1, 2], imaginary: [0, 0, 0] },
    },
    candidates: {
      A: { operator: { permutation: [0, 1, 2], phases: [1, 1, { re: -1, im: 0 }] }, label: { root: 2 } },
      B: { operator: { diagonal: [1, 1, 0] }, label: "m", ladder: { n: 3, entries: [] } },
    },
    kets: ["a", "b", "c"],
    unit: "eV",
  };
  const exactForms = {
    h0: {
      re: [
        ["1/3", 0],
        [0, "1/3"],
      ],
      im: [
        [0, 0],
        [0, 0],
      ],
    },
    v: {
      stark: {
        n: 2,
        entries: [
          [0, 1, "1/2", "sqrt(2)"],
          [1, 0, Surd.from("1/2-i*sqrt(2)")],
        ],
      },
      zeeman: { diagonal: [1, 2n], imaginary: ["0", 0] },
      mixed: [
        ["√2", 1],
        [1, 0.5],
      ],
    },
    candidates: { A: { permutation: [1, 0], phases: ["i", { re: 0, im: -1 }] } },
  };
  const options = {
    levels: { nearest: 1, count: 1 },
    resolution: 1e-10,
    lambda: 1,
    refuseAbove: 1,
    levelWidth: 0,
  };
  const file: unknown = JSON.parse(
    goodbasis.writeProblem(problem, { title: "t", options: { levels: { from: 0, to: 3 } } }),
  );
  const exactFile: unknown = {
    ...JSON.parse(goodbasis.writeProblem({ h0: [["1/3"]], v: [[2n]] })),
    v: { radii: [1e-9], n: 1, triplets: [[0, 0, 0.5]], exact: ["1/2"] },
    define: {
      a: { hopping: [[0, 1]], amplitude: "1/3" },
      b: { diagonal: ["1/3"] },
      c: { permutation: [0], phases: ["i"] },
    },
    n: 2,
  };
  const calls: readonly (readonly [string, unknown, (changed: unknown) => unknown])[] = [
    ["a problem", forms, (changed) => Reflect.apply(findGoodBasis, undefined, [changed])],
    ["exact numbers", exactForms, (changed) => Reflect.apply(findGoodBasis, undefined, [changed])],
    ["exact numbers to write", exactForms, (changed) => Reflect.apply(goodbasis.writeProblem, undefined, [changed])],
    ["an exact file", exactFile, (changed) => Reflect.apply(goodbasis.readProblem, undefined, [changed])],
    ["a problem to audit", forms, (changed) => Reflect.apply(goodbasis.auditCommutators, undefined, [changed])],
    ["a problem to write", forms, (changed) => Reflect.apply(goodbasis.writeProblem, undefined, [changed])],
    ["options", options, (changed) => Reflect.apply(findGoodBasis, undefined, [problem, changed])],
    ["a file", file, (changed) => Reflect.apply(goodbasis.readProblem, undefined, [changed])],
    [
      "a basis and its labels",
      [
        [
          [1, 0, 0],
          [0, 1, 0],
          [0, 0, 1],
        ],
        { A: [1, { re: 0, im: 0 }, "0"] },
        { lambda: 1, levelWidth: 0 },
      ],
      (changed) =>
        Reflect.apply(goodbasis.validateBasis, undefined, [problem, ...(Array.isArray(changed) ? changed : [changed])]),
    ],
    [
      "a basis file",
      { states: [{ a: 1 }, [0, "i"]], labels: { A: [1, "3/2"] } },
      (changed) => Reflect.apply(goodbasis.readBasis, undefined, [changed, { kets: ["a", "b"] }]),
    ],
    ["a certificate", certificate, (changed) => Reflect.apply(goodbasis.recheck, undefined, [changed, problem])],
    [
      "options of tables",
      { columns: ["E0"], terms: 2, threshold: 0, levels: [0] },
      (changed) => Reflect.apply(goodbasis.basisTable, undefined, [basis, changed]),
    ],
    [
      "options of perturb",
      { order: 2, states: 1, select: [0] },
      (changed) => Reflect.apply(goodbasis.perturb, undefined, [basis, changed]),
    ],
  ];

  it.each(calls)("%s", (_, value, call) => {
    if (value !== certificate) expect(attempt(() => call(value))).toBe("returned");
    // a certificate has too many places for all of them
    for (const [name, odd] of value === certificate ? ODD.slice(0, 3) : ODD) {
      for (const [path, changed] of spoilt(value, odd)) {
        expect(
          attempt(() => call(changed)),
          `${name} at ${path || "the top"}`,
        ).not.toMatch(/^raw/);
      }
    }
  });
});

describe("messages name the function, what was expected, what came and the next step", () => {
  it.each<readonly [string, () => unknown, RegExp]>([
    [
      "a table",
      () => Reflect.apply(goodbasis.formatTable, undefined, [{}]),
      /^formatTable: expected a table .*got \{\}; pass what basisTable/,
    ],
    [
      "a format",
      () => Reflect.apply(goodbasis.formatTable, undefined, [goodbasis.basisTable(basis), "xls"]),
      /^formatTable: there is no format "xls"; give "text"/,
    ],
    [
      "an outcome",
      () => Reflect.apply(goodbasis.formatOutcome, undefined, [basis]),
      /^formatOutcome: expected an outcome, got an object of class CertifiedBasis; pass what findGoodBasis returns/,
    ],
    [
      "an audit",
      () => Reflect.apply(goodbasis.formatAudit, undefined, [7]),
      /^formatAudit: expected an audit, got 7; pass what auditCommutators/,
    ],
    [
      "a report",
      () => Reflect.apply(goodbasis.formatRecheck, undefined, ["x"]),
      /^formatRecheck: expected a report .*got "x"; pass what recheck returns/,
    ],
    [
      "sites",
      () => Reflect.apply(goodbasis.hopping, undefined, []),
      /^hopping: expected a number of sites, 1, 2, …, got nothing/,
    ],
    [
      "bonds",
      () => Reflect.apply(goodbasis.hopping, undefined, [2]),
      /^hopping: expected a list of bonds \[\[i, j\], …\] between sites, got nothing/,
    ],
    [
      "an amplitude",
      () => Reflect.apply(goodbasis.hopping, undefined, [2, [[0, 1]], null]),
      /^hopping: the amplitude of bond 0 is null; expected a number/,
    ],
    [
      "j as text",
      () => Reflect.apply(goodbasis.angularMomentum, undefined, ["1"]),
      /^angularMomentum: j must be one of the numbers .*got "1"/,
    ],
    ["j = null", () => Reflect.apply(goodbasis.angularMomentum, undefined, [null]), /^angularMomentum: .*got null/],
    [
      "dimensions",
      () => Reflect.apply(goodbasis.productSpace, undefined, [7]),
      /^productSpace: expected a list of dimensions such as \[3, 2\], got 7/,
    ],
    [
      "a map",
      () => Reflect.apply(goodbasis.sitePermutation, undefined, [2, 7]),
      /^sitePermutation: expected a list, .*got 7/,
    ],
    [
      "kets of a site",
      () => Reflect.apply(goodbasis.translation, undefined, [3]),
      /^translation: the number of kets of a site must be 1, 2, …, got nothing/,
    ],
    [
      "a text",
      () => Reflect.apply(goodbasis.readMatrixMarket, undefined, [7]),
      /^readMatrixMarket: expected the text of a Matrix Market file, got 7; pass the contents/,
    ],
    [
      "an operator",
      () => Reflect.apply(goodbasis.toMatrixMarket, undefined, [[[1]]]),
      /^toMatrixMarket: expected an Operator, got \[\[1\]\]; make one with Operator\.from/,
    ],
    [
      "a problem",
      () => Reflect.apply(goodbasis.writeProblem, undefined, []),
      /^writeProblem: expected a problem, got nothing; give \{ h0, v/,
    ],
    [
      "sparse rows",
      () => Reflect.construct(Operator, []),
      /^Operator: expected square sparse rows .*got nothing; make one with Operator\.from/,
    ],
    ["an operand", () => Reflect.apply(two.plus, two, [3]), /^plus: expected an Operator, got 3/],
  ])("%s", (_, call, message) => {
    expect(attempt(call)).toMatch(message);
  });

  it("whatever the value is", () => {
    const circle: unknown[] = [];
    circle.push(circle);
    const cases: readonly (readonly [unknown, string])[] = [
      [undefined, "nothing"],
      [null, "null"],
      [-0.5, "-0.5"],
      ["a\nb", '"a\\nb"'],
      [10n, "10n, a bigint"],
      [{ a: [1] }, '{"a":[1]}'],
      [circle, "an array of 1"],
      [{ a: 1n }, "an object"],
      [new Map(), "an object of class Map"],
      [Object.create(null), "{}"],
      ["x".repeat(99), `"${"x".repeat(56)}…`],
    ];
    for (const [value, text] of cases) expect(shown(value)).toBe(text);
  });

  it("with the name that was probably meant, or none", () => {
    const known = ["candidates", "kets", "h0", "v", "unit"];
    expect(didYouMean("candidate", known)).toBe('; did you mean "candidates"?');
    expect(didYouMean("H0", known)).toBe('; did you mean "h0"?');
    expect(didYouMean("untis", ["units"])).toBe('; did you mean "units"?');
    expect(didYouMean("kats", known)).toBe('; did you mean "kets"?');
    expect(didYouMean("temperature", known)).toBe("");
    expect(didYouMean("anything", [])).toBe("");
  });
});

describe("the methods of what builders return", () => {
  for (const [name, object] of Object.entries(OBJECTS)) {
    const keys = new Set([
      ...Object.getOwnPropertyNames(object),
      ...Object.getOwnPropertyNames(Object.getPrototypeOf(object)),
    ]);
    for (const key of keys) {
      const getter = Object.getOwnPropertyDescriptor(Object.getPrototypeOf(object), key)?.get;
      const own =
        Object.getOwnPropertyDescriptor(Function.prototype, key) ??
        Object.getOwnPropertyDescriptor(Object.prototype, key);
      const method: unknown = getter === undefined && own === undefined ? Reflect.get(object, key) : undefined;
      if (typeof method !== "function" || INTERNAL.includes(key)) continue;
      it(`${name}.${key}`, () => {
        const call = (...args: readonly unknown[]): string => attempt(() => Reflect.apply(method, object, args));
        expect(call()).not.toMatch(/^raw/);
        for (const [first, odd] of ODD) {
          expect(call(odd), `${key}(${first})`).not.toMatch(/^raw/);
          for (const [second, other] of ODD) {
            expect(call(odd, other), `${key}(${first}, ${second})`).not.toMatch(/^raw/);
            expect(call(1, odd, other), `${key}(1, ${first}, ${second})`).not.toMatch(/^raw/);
          }
        }
      });
    }
  }
});
