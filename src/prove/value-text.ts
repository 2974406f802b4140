import type { Polynomial } from "../exact/polynomial.js";
import type { BlockValue } from "./proof.js";

/** An eigenvalue, or the eigenvalues of a block, in words. */
export function valueText(value: BlockValue): string {
  if (value.kind === "value") return value.value.text();
  if (value.kind === "unknown") return "unknown";
  const near = value.roots.intervals
    .map(({ low, high }) => low.plus(high).over(2).toNumber().toPrecision(6))
    .join(", ");
  const which = value.part === "whole" ? "" : value.part === "re" ? ", real parts" : ", imaginary parts";
  return `roots of ${polynomialText(value.roots.polynomial)} (${near}${which})`;
}

/** A polynomial in x, highest power first. */
function polynomialText(p: Polynomial): string {
  const terms = p.flatMap((c, k) => {
    if (c.isZero) return [];
    const power = k === 0 ? "" : k === 1 ? "x" : `x^${k}`;
    if (power !== "" && c.equals(1)) return [`+ ${power}`];
    if (power !== "" && c.equals(-1)) return [`- ${power}`];
    const negative = c.isReal && c.sign() < 0;
    const text = (negative ? c.negate() : c).text();
    const bare = /^[^+\-\s]*$/.test(text);
    const factor = bare ? text : `(${text})`;
    return [`${negative ? "-" : "+"} ${factor}${power === "" ? "" : ` ${power}`}`];
  });
  if (terms.length === 0) return "0";
  const text = terms.reverse().join(" ");
  return text.replace(/^\+ /, "").replace(/^- /, "-");
}
