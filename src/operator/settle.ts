import { GoodBasisError } from "../errors.js";
import type { Csr } from "../numerics/csr.js";
import type { Radius, Uncertain } from "./radius.js";

/**
 * The tidy form of a computed matrix: entries that are exactly zero with radius zero are dropped, a radius that is zero
 * throughout becomes `"exact"`, and overflow is refused.
 *
 * @param verb - the operation, for the message
 * @param csr - the computed matrix
 * @param radius - its radii
 * @throws GoodBasisError `not-finite` - an entry overflowed
 */
export function settle(verb: string, csr: Csr, radius: Radius): Uncertain {
  requireFinite(verb, csr);
  let kept: Radius = radius;
  if (radius instanceof Float64Array && radius.every((r) => r === 0)) kept = "exact";
  return hasSureZero(csr, kept) ? dropSureZeros(csr, kept) : { csr, radius: kept };
}

function requireFinite(verb: string, csr: Csr): void {
  for (const part of csr.im === undefined ? [csr.re] : [csr.re, csr.im]) {
    for (let e = 0; e < part.length; e++) {
      const x = part[e] as number;
      if (x - x !== 0) {
        throw new GoodBasisError(
          "not-finite",
          `${verb}: an entry of the result overflows the double-precision range; rescale the operators (change the unit)`,
        );
      }
    }
  }
}

function isSureZero(csr: Csr, radius: Radius, e: number): boolean {
  if (csr.re[e] !== 0 || (csr.im !== undefined && csr.im[e] !== 0)) return false;
  return !(radius instanceof Float64Array) || radius[e] === 0;
}

function hasSureZero(csr: Csr, radius: Radius): boolean {
  for (let e = 0; e < csr.re.length; e++) if (isSureZero(csr, radius, e)) return true;
  return false;
}

function dropSureZeros(csr: Csr, radius: Radius): Uncertain {
  const count = csr.re.length;
  const ptr = new Int32Array(csr.rows + 1);
  const col = new Int32Array(count);
  const re = new Float64Array(count);
  const im = csr.im === undefined ? undefined : new Float64Array(count);
  const own = radius instanceof Float64Array ? new Float64Array(count) : undefined;
  let f = 0;
  for (let row = 0; row < csr.rows; row++) {
    const end = csr.ptr[row + 1] as number;
    for (let e = csr.ptr[row] as number; e < end; e++) {
      if (isSureZero(csr, radius, e)) continue;
      col[f] = csr.col[e] as number;
      re[f] = csr.re[e] as number;
      if (im !== undefined && csr.im !== undefined) im[f] = csr.im[e] as number;
      if (own !== undefined && radius instanceof Float64Array) own[f] = radius[e] as number;
      f++;
    }
    ptr[row + 1] = f;
  }
  const small: Csr = {
    rows: csr.rows,
    cols: csr.cols,
    ptr,
    col: col.slice(0, f),
    re: re.slice(0, f),
    im: im?.slice(0, f),
  };
  return { csr: small, radius: own === undefined ? radius : own.slice(0, f) };
}
