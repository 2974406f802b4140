import { test } from "vitest";
import { onlyMember } from "../../src/audit/label-family.js";
import { rootOfUnity } from "../../src/refine/orbits.js";
import { numberText } from "../../src/refine/label.js";
import { judgeCommutator } from "../../src/audit/commutators.js";
import { prepareProblem } from "../../src/audit/problem.js";
import { Operator } from "../../src/operator/operator.js";
import { findGoodBasis } from "../../src/index.js";
test("x", () => {
  let worst = 0; let at = "";
  for (let N = 1; N <= 400; N++) for (let k = 0; k < N; k++) {
    const r = rootOfUnity(k, N);
    const m = onlyMember({ root: N }, r, 0.3 * Math.sin(Math.PI / N) < 1/17 ? 0.3 * Math.sin(Math.PI / N) : 1/17);
    if (!m) { console.log("none", N, k); continue; }
    const d = Math.hypot(m.re - r.re, m.im - r.im);
    if (d > worst) { worst = d; at = `${k}/${N}`; }
  }
  console.log("root worst", worst, at, 4 * 2 ** -52);
  console.log(onlyMember("m", { re: 1e15 + 0.25, im: 0 }, 0), onlyMember({ rational: 1000000 }, { re: 1e6 + 1e-10 , im: 0 }, 0), onlyMember("m", { re: 1 + 2 ** -52, im: 0 }, 0));
  console.log(numberText({ re: -1e-7, im: 0 }), numberText({ re: 1e-7, im: -1e-9 }));
  const z = Operator.diagonal([1, -1]); const x = Operator.from([[0, 1e-170], [1e-170, 0]]);
  console.log(judgeCommutator({ name: "z", operator: z }, { name: "x", operator: x }, 1e-10, String));
  const big = Operator.from([[0, 1e160], [1e160, 0]]);
  console.log(judgeCommutator({ name: "z", operator: Operator.diagonal([1, 1+1e-14]) }, { name: "x", operator: big }, 1e-10, String));
  for (const v of [undefined, null, 5, "ab"]) try { prepareProblem({ h0: [[1]], v: v as never }); console.log("ok?"); } catch (e) { console.log(String(e)); }
  for (const c of [undefined, null, 5]) try { prepareProblem({ h0: [[1]], v: [[1]], candidates: { A: c as never } }); console.log("ok?"); } catch (e) { console.log(String(e)); }
  for (const kets of [null, "ab", new Array(2)]) try { prepareProblem({ h0: [[1, 0], [0, 1]], v: [[1, 0], [0, 1]], kets: kets as never }); console.log("ok?"); } catch (e) { console.log(String(e)); }
  const o = findGoodBasis({ h0: [[0, 1e-170], [1e-170, 0]], v: [[1, 0], [0, 1]] });
  console.log(o.verdict, JSON.stringify(o.verdict === "good" ? o.basis.states.map((s) => [s.energy, s.energyPlusMinus]) : (o as any).questions));
  const o2 = findGoodBasis({ h0: [[0, 1e170], [1e170, 0]], v: [[1, 0], [0, 1]] });
  console.log(o2.verdict, JSON.stringify(o2.verdict === "good" ? o2.basis.states.map((s) => [s.energy, s.energyPlusMinus]) : (o2 as any).questions));
});
