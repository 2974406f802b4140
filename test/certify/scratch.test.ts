import { it } from "vitest";
import {
  angularMomentum,
  auditCommutators,
  findGoodBasis,
  Operator,
  perturb,
  productSpace,
  validateBasis,
} from "../../src/index.js";

const show = (name: string, f: () => unknown) => {
  try {
    const r = f();
    console.log(name, "=>", typeof r === "string" ? r : JSON.stringify(r));
  } catch (e) {
    console.log(
      name,
      "THROWS",
      (e as { code?: string }).code ?? (e as Error).name,
      String((e as Error).message).slice(0, 200),
    );
  }
};
const sum = (o: ReturnType<typeof findGoodBasis<string>>) =>
  `${o.verdict} levels=${o.levels.map((l) => `${l.energy}x${l.degeneracy}`).join(",")} q=${o.levels.flatMap((l) => l.questions.map((q) => q.code))} labels=${o.states
    .slice(0, 3)
    .map((s) => JSON.stringify(s.labels))
    .join(";")
    .slice(0, 300)} safe=${o.states
    .map((s) => JSON.stringify(s.safe))
    .join("")
    .slice(0, 200)}`;
const any = (x: unknown) => x as never;
it("scratch", () => {
  const h0 = Operator.diagonal([1, 1, 2]);
  const v = Operator.from([
    [-1, 0, 0],
    [0, 0, 1],
    [0, 1, 0],
  ]);
  const A = Operator.diagonal([1, 0, 0]);
  show("V=0", () => sum(findGoodBasis({ h0, v: Operator.zero(3), candidates: { A } })));
  show("V=0 no cand", () => sum(findGoodBasis({ h0, v: Operator.zero(3) })));
  show("H0=0", () => sum(findGoodBasis({ h0: Operator.zero(3), v, candidates: { A } })));
  show("H0=0 V=0", () => sum(findGoodBasis({ h0: Operator.zero(3), v: Operator.zero(3), candidates: { A } })));
  show("n=1", () => sum(findGoodBasis({ h0: [[2]], v: [[3]], candidates: { A: [[5]] } })));
  show("n=1 zero", () => sum(findGoodBasis({ h0: [[0]], v: [[0]], candidates: { A: [[0]] } })));
  show("identity", () => sum(findGoodBasis({ h0, v, candidates: { I: Operator.identity(3) } })));
  show("zero candidate", () => sum(findGoodBasis({ h0, v, candidates: { Z: Operator.zero(3) } })));
  show("h0 cand", () => sum(findGoodBasis({ h0, v, candidates: { E: h0 } })));
  show("v cand", () => sum(findGoodBasis({ h0, v, candidates: { W: v } })));
  show("dup", () => sum(findGoodBasis({ h0, v, candidates: { A, B: A, C: A.scale(-1) } })));
  show("phases*1e-34 candidate", () => sum(findGoodBasis({ h0, v, candidates: { A: A.scale(1.0545718e-34) } })));
  show("cand 1e150", () => sum(findGoodBasis({ h0, v, candidates: { A: A.scale(1e150) } })));
  show("cand 1e-150", () => sum(findGoodBasis({ h0, v, candidates: { A: A.scale(1e-150) } })));
  show("cand 1e-300", () => sum(findGoodBasis({ h0, v, candidates: { A: A.scale(1e-300) } })));
  show("all 1e200", () => sum(findGoodBasis({ h0: h0.scale(1e200), v: v.scale(1e200), candidates: { A } })));
  show("all 1e200 A 1e200", () =>
    sum(findGoodBasis({ h0: h0.scale(1e200), v: v.scale(1e200), candidates: { A: A.scale(1e200) } })),
  );
  show("all 1e300", () => sum(findGoodBasis({ h0: h0.scale(1e300), v: v.scale(1e300), candidates: { A } })));
  show("all 1e-310", () => sum(findGoodBasis({ h0: h0.scale(1e-310), v: v.scale(1e-310), candidates: { A } })));
  show("p 1e-310", () => {
    const o = findGoodBasis({ h0: h0.scale(1e-310), v: v.scale(1e-310), candidates: { A } });
    return o.verdict === "good" ? perturb(o.basis).states.map((s) => s.second?.[0]?.[0]) : o.verdict;
  });
  show("p 1e300", () => {
    const o = findGoodBasis({ h0: h0.scale(1e300), v: v.scale(1e300), candidates: { A } });
    return o.verdict === "good" ? perturb(o.basis).states.map((s) => s.second?.[0]?.[0]) : o.verdict;
  });
  show("p 1e150", () => {
    const o = findGoodBasis({ h0: h0.scale(1e150), v: v.scale(1e150), candidates: { A } });
    return o.verdict === "good" ? perturb(o.basis).states.map((s) => s.second?.[0]?.[0]) : o.verdict;
  });
  const good = findGoodBasis({ h0, v, candidates: { A } });
  if (good.verdict !== "good") throw new Error();
  for (const [n, o] of Object.entries({
    null: null,
    five: 5,
    str: "x",
    order2: { order: "2" },
    order3: { order: 3 },
    orderNaN: { order: NaN },
    neg: { order: -1 },
    half: { order: 1.5 },
    states2: { states: 2 },
    select5: { select: 5 },
    selectS: { select: "01" },
    selectLen: { select: ["length"] },
    selHalf: { select: [0.5] },
    sel9: { select: [9] },
    selneg: { select: [-1] },
    selNull: { select: null },
    selProto: { select: ["constructor"] },
  }))
    show(`perturb ${n}`, () => perturb(good.basis, any(o)).states.length);
  for (const [n, b] of Object.entries({
    null: null,
    undef: undefined,
    str: "x",
    obj: {},
    outcome: good,
    study: good.basis.study,
    clone: Object.create(Object.getPrototypeOf(good.basis)),
    proxy: new Proxy(good.basis, {}),
  }))
    show(`perturb basis ${n}`, () => perturb(any(b)).states.length);
  show("struct clone", () => structuredClone(good.basis));
  for (const [n, o] of Object.entries({
    null: null,
    five: 5,
    levelsS: { levels: "low" },
    levelsNull: { levels: null },
    lowest0: { levels: { lowest: 0 } },
    lowestS: { levels: { lowest: "2" } },
    levelsArr: { levels: [0] },
    win: { levels: { from: "a", to: "b" } },
    winu: { levels: { from: undefined, to: 3 } },
    winN: { levels: { from: NaN, to: 3 } },
    nearS: { levels: { nearest: "1" } },
    nearC: { levels: { nearest: 1, count: 0.5 } },
    depth: { depth: "deep" },
    depth5: { depth: 5 },
    lamNaN: { lambda: NaN },
    lam0: { lambda: 0 },
    lamneg: { lambda: -1 },
    lamS: { lambda: "1" },
    lamInf: { lambda: Infinity },
    lamBig: { lambda: 1n },
    ref0: { refuseAbove: 0 },
    refN: { refuseAbove: null },
    res0: { resolution: 0 },
    res1: { resolution: 1 },
    resN: { resolution: NaN },
    resS: { resolution: "0.1" },
    resO: { resolution: {} },
    lw: { levelWidth: -1 },
    lwN: { levelWidth: NaN },
    lwS: { levelWidth: "1" },
    lwInf: { levelWidth: Infinity },
    prog: { onProgress: 5 },
  }))
    show(`find opt ${n}`, () => sum(findGoodBasis({ h0, v, candidates: { A } }, any(o))));
  for (const [n, p] of Object.entries({
    null: null,
    undef: undefined,
    five: 5,
    empty: {},
    noV: { h0 },
    vNull: { h0, v: null },
    v5: { h0, v: 5 },
    vEmpty: { h0, v: {} },
    h0str: { h0: "x", v },
    cand5: { h0, v, candidates: 5 },
    candNull: { h0, v, candidates: null },
    candA: { h0, v, candidates: { A: 5 } },
    candAn: { h0, v, candidates: { A: null } },
    candOp: { h0, v, candidates: { A: { operator: 5 } } },
    candObj: { h0, v, candidates: { A: {} } },
    label: { h0, v, candidates: { A: { operator: A, label: "x" } } },
    kets: { h0, v, kets: ["a"] },
    kets5: { h0, v, kets: 5 },
    ketsN: { h0, v, kets: [1, 2, 3] },
    ketsDup: { h0, v, kets: ["a", "a", "b"] },
    unit: { h0, v, unit: 5 },
    nan: { h0: [[NaN]], v: [[1]] },
    nonh: {
      h0: [
        [0, 1],
        [0, 0],
      ],
      v: [
        [1, 0],
        [0, 1],
      ],
    },
    vH0: { h0, v: { H0: v } },
    candV: { h0, v, candidates: { V: A } },
    ladder5: { h0, v, candidates: { A: { operator: A, ladder: 5 } } },
  }))
    show(`find prob ${n}`, () => sum(findGoodBasis(any(p))));
  const eye = [
    [1, 0, 0],
    [0, 1, 0],
    [0, 0, 1],
  ];
  for (const [n, c] of Object.entries({
    null: null,
    five: 5,
    empty: [],
    ragged: [
      [1, 0, 0],
      [0, 1],
      [0, 0, 1],
    ],
    nan: [
      [NaN, 0, 0],
      [0, 1, 0],
      [0, 0, 1],
    ],
    str: [
      ["1", 0, 0],
      [0, 1, 0],
      [0, 0, 1],
    ],
    wide: [
      [1, 0, 0, 0],
      [0, 1, 0, 0],
      [0, 0, 1, 0],
    ],
    short: [[1], [0]],
    rowNull: [null, [0], [1]],
    flat: [1, 0, 0],
    re5: { re: 5 },
    imShort: { re: eye, im: [[0]] },
    zero: [[0], [0], [0]],
  }))
    show(`validate cols ${n}`, () => validateBasis({ h0, v, candidates: { A } }, any(c)).verdict);
  for (const [n, l] of Object.entries({
    null: null,
    five: 5,
    unknown: { B: [1, 1, 1] },
    short: { A: [1] },
    obj: { A: [{}, 0, 0] },
    nul: { A: [null, 0, 0] },
    txt: { A: ["x", 0, 0] },
    div0: { A: ["1/0", 0, 0] },
    notArr: { A: 5 },
    nan: { A: [NaN, 0, 0] },
    ok: { A: [1, 0, 0] },
    okTxt: { A: ["1", "0", "0"] },
    cNaN: { A: [{ re: NaN, im: 0 }, 0, 0] },
  }))
    show(`validate labels ${n}`, () => validateBasis({ h0, v, candidates: { A } }, eye, any(l)).verdict);
  for (const [n, o] of Object.entries({
    null: null,
    res0: { resolution: 0 },
    lw: { levelWidth: -1 },
    lwN: { levelWidth: NaN },
    lwS: { levelWidth: "x" },
    lam: { lambda: NaN },
  }))
    show(`validate opt ${n}`, () => validateBasis({ h0, v, candidates: { A } }, eye, undefined, any(o)).verdict);
});
