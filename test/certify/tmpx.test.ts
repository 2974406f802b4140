import { it } from "vitest";
import { findGoodBasis, Operator } from "../../src/index.js";
import { generator } from "../numerics/eigen/matrices.js";
it("x", () => {
  for (let seed = 1; seed < 6; seed++) {
    const r = generator(seed);
    const n = 4;
    const rows: number[][] = [];
    while (rows.length < n) { let x = Array.from({length:n},()=>r()); for (let p=0;p<2;p++) for (const o of rows){const d=o.reduce((s,y,k)=>s+y*x[k]!,0); x=x.map((y,k)=>y-d*o[k]!);} const nn=Math.hypot(...x); rows.push(x.map(y=>y/nn)); }
    const rot=(d:number[])=>{const g=rows.map((a)=>rows.map((b)=>0)); for(let i=0;i<n;i++)for(let j=0;j<n;j++){let s=0;for(let k=0;k<n;k++)s+=rows[i]![k]!*d[k]!*rows[j]![k]!;g[i]![j]=s;} return g.map((row,i)=>row.map((x,j)=>(x+g[j]![i]!)/2));};
    const o = findGoodBasis({h0: rot([0,0,1,2]), v: rot([1,1,2,-1])});
    console.log(seed, o.verdict, o.levels.flatMap(l=>l.questions.map(q=>q.message)), o.states.map(s=>s.safe));
  }
  for (const e of [1e-4,1e-6,1e-8,1e-10,1e-12]) {
   const o = findGoodBasis({h0: Operator.diagonal([0,0,1]), v: [[.3,0,e],[0,.3,0],[e,0,.1]]});
   console.log(e, o.verdict, o.levels.flatMap(l=>l.questions.map(q=>q.message)), o.states.map(s=>s.safe));
  }
});
