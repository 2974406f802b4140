import { Operator } from "../../dist/index.js";
import { random, shuffle } from "./random.js";

/** Entries of V in a row: one on the diagonal and one with each of nine partners. */
const PARTNERS = 9;
/** The first of the nine pairings keep inside the level. */
const INSIDE = 3;

/**
 * A sparse problem in which H0 is diagonal and parity (of the ket's number) is conserved. Kets 0 … `level` − 1 are one level at
 * energy 0; the other energies are random. V pairs every ket with nine of its own parity at random; three of the pairings pair
 * level with level, so that V joins the states of one parity in the level.
 *
 * @param {number} n - even
 * @param {number} level - states in the level, even
 */
export function sparseProblem(n, level) {
  const draw = random(20231);
  const energies = new Float64Array(n);
  const parity = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    energies[i] = i < level ? 0 : 2 + draw();
    parity[i] = i % 2 === 0 ? 1 : -1;
  }
  return {
    h0: Operator.diagonal(energies),
    v: Operator.fromCsr(perturbation(n, level, draw)),
    candidates: { P: { operator: Operator.diagonal(parity), label: /** @type {const} */ ("parity") } },
  };
}

/**
 * @param {number} n
 * @param {number} level
 * @param {() => number} draw
 */
function perturbation(n, level, draw) {
  const width = PARTNERS + 1;
  const partner = new Int32Array(n * width);
  const value = new Float64Array(n * width);
  for (let i = 0; i < n; i++) {
    partner[i * width] = i;
    value[i * width] = draw();
  }
  for (let slot = 1; slot < width; slot++) {
    for (const parity of [0, 1]) {
      const parts = slot <= INSIDE ? [range(parity, level), range(level + parity, n)] : [range(parity, n)];
      for (const part of parts) {
        shuffle(part, draw);
        for (let k = 0; k + 1 < part.length; k += 2) {
          const [i, j] = [Number(part[k]), Number(part[k + 1])];
          partner[i * width + slot] = j;
          partner[j * width + slot] = i;
          value[i * width + slot] = value[j * width + slot] = draw();
        }
        // An odd one out has no partner in this pairing.
        if (part.length % 2 === 1) partner[Number(part[part.length - 1]) * width + slot] = -1;
      }
    }
  }
  return sortedRows(n, width, partner, value);
}

/**
 * Rows with ascending columns; where two pairings agree, the first one counts.
 *
 * @param {number} n
 * @param {number} width
 * @param {Int32Array} partner
 * @param {Float64Array} value
 */
function sortedRows(n, width, partner, value) {
  const ptr = new Int32Array(n + 1);
  const col = new Int32Array(n * width);
  const re = new Float64Array(n * width);
  let count = 0;
  for (let i = 0; i < n; i++) {
    const first = count;
    for (let slot = 0; slot < width; slot++) {
      const j = Number(partner[i * width + slot]);
      if (j < 0 || col.subarray(first, count).includes(j)) continue;
      let place = count++;
      for (; place > first && Number(col[place - 1]) > j; place--) {
        col[place] = Number(col[place - 1]);
        re[place] = Number(re[place - 1]);
      }
      col[place] = j;
      re[place] = Number(value[i * width + slot]);
    }
    ptr[i + 1] = count;
  }
  return { rows: n, cols: n, ptr, col: col.slice(0, count), re: re.slice(0, count), im: undefined };
}

/**
 * @param {number} from
 * @param {number} to
 * @returns {Int32Array} from, from + 2, … below `to`
 */
function range(from, to) {
  return Int32Array.from({ length: Math.max(0, Math.ceil((to - from) / 2)) }, (_, k) => from + 2 * k);
}
