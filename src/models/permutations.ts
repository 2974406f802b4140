import { GoodBasisError } from "../errors.js";
import type { SurdInput } from "../exact/surd.js";
import { shown } from "../misuse.js";
import { readKnown } from "../operator/known.js";
import { Operator } from "../operator/operator.js";
import { readPermutation } from "../operator/read.js";

/**
 * The operator that sends ket j to ket `map[j]`, times `phases[j]` where phases are given.
 *
 * @param map - a permutation of 0 … n − 1
 * @param phases - one factor a ket: numbers, `{ re, im }`, or exact ones such as `"i"`, `"(1+i)/sqrt(2)"`
 * @throws GoodBasisError `shape`, `not-finite`, `text`, `zero-division`
 *
 * @example
 * ```ts
 * import { ketPermutation } from "goodbasis";
 *
 * const parity = ketPermutation([0, 1, 2], [1, -1, 1]);
 * console.log(parity.isDiagonal, parity.kind); // true hermitian
 * ```
 */
export function ketPermutation(map: ArrayLike<number>, phases?: readonly SurdInput[]): Operator {
  const { core, companion } = readKnown("ketPermutation", { permutation: map, phases }, undefined);
  const operator = Operator.fromCsr(core.csr, core.radius);
  return companion === undefined ? operator : Operator.withExact(operator, () => companion.value);
}

/**
 * The operator on a product of equal sites that moves the content of site s to site `map[s]`; no signs (bosonic or spin kets).
 * Site 0 is the slowest index. Products compose as the maps do: first right, then left.
 *
 * @param siteDimension - kets of one site
 * @param map - a permutation of the sites 0 … N − 1
 * @throws GoodBasisError `shape` - `map` is not a permutation; `option` - no positive whole dimension, or a space too large
 *
 * @example
 * ```ts
 * import { sitePermutation } from "goodbasis";
 *
 * const exchange = sitePermutation(2, [1, 0]); // swaps |01⟩ and |10⟩
 * console.log(exchange.entry(1, 2).re, exchange.entry(0, 0).re); // 1 1
 * ```
 */
export function sitePermutation(siteDimension: number, map: readonly number[]): Operator {
  readPermutation("sitePermutation", map);
  const whole = Number.isInteger(siteDimension) && siteDimension >= 1;
  const n = whole ? siteDimension ** map.length : 0;
  if (!whole || n >= 2 ** 31) {
    const message = `sitePermutation: expected a whole site dimension from 1 on and fewer than 2^31 kets, got ${shown(siteDimension)} on ${map.length} sites`;
    throw new GoodBasisError("option", message, { siteDimension, sites: map.length });
  }
  // Weight of the digit of site s before and after.
  const sites = map.length;
  const weight = Array.from(map, (image) => siteDimension ** (sites - 1 - image));
  const image = new Int32Array(n);
  // The images of all kets whose leading digits are fixed follow from those of fewer digits.
  let filled = 1;
  for (let s = 0; s < sites; s++) {
    const w = weight[s] as number;
    for (let k = filled - 1; k >= 0; k--) {
      const base = image[k] as number;
      for (let digit = siteDimension - 1; digit >= 0; digit--) image[k * siteDimension + digit] = base + digit * w;
    }
    filled *= siteDimension;
  }
  return Operator.permutation(image);
}

/**
 * The translation of a ring by one site: the content of site s moves to site s + 1, that of the last one to site 0. Its
 * eigenvalues are e^{2πik/N}.
 *
 * @param sites - number of sites N
 * @param siteDimension - kets of one site
 * @throws GoodBasisError `option`, `shape`
 *
 * @example
 * ```ts
 * import { translation } from "goodbasis";
 *
 * console.log(translation(3, 2).power(3).isDiagonal); // true
 * ```
 */
export function translation(sites: number, siteDimension: number): Operator {
  return sitePermutation(
    siteDimension,
    siteMap("translation", sites, siteDimension, (s) => (s + 1) % sites),
  );
}

/**
 * The reflection of a ring or chain: the content of site s moves to site `centre` − s modulo N. By default site 0 and site N − 1
 * change places.
 *
 * @param sites - number of sites N
 * @param siteDimension - kets of one site
 * @param centre - twice the position of the mirror, N − 1 when not given
 * @throws GoodBasisError `option`, `shape`
 *
 * @example
 * ```ts
 * import { reflection } from "goodbasis";
 *
 * console.log(reflection(4, 2).isHermitian); // true
 * ```
 */
export function reflection(sites: number, siteDimension: number, centre?: number): Operator {
  if (centre !== undefined && !Number.isInteger(centre)) {
    const message = `reflection: the centre must be a whole number, twice the position of the mirror, got ${shown(centre)}`;
    throw new GoodBasisError("option", message, { centre });
  }
  const twice = (): number => centre ?? sites - 1;
  return sitePermutation(
    siteDimension,
    siteMap("reflection", sites, siteDimension, (s) => (((twice() - s) % sites) + sites) % sites),
  );
}

function siteMap(verb: string, sites: number, siteDimension: number, image: (site: number) => number): number[] {
  if (!Number.isInteger(sites) || sites < 1 || sites > 64) {
    const message = `${verb}: the number of sites must be 1, 2, …, 64, got ${shown(sites)}`;
    throw new GoodBasisError("option", message, { sites });
  }
  if (!Number.isInteger(siteDimension) || siteDimension < 1) {
    const message = `${verb}: the number of kets of a site must be 1, 2, …, got ${shown(siteDimension)}`;
    throw new GoodBasisError("option", message, { siteDimension });
  }
  return Array.from({ length: sites }, (_, s) => image(s));
}
