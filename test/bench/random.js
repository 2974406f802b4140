/**
 * A seeded stream of numbers between −1 and 1, the ends excluded: the 32-bit shift-register generator of Marsaglia, J. Stat.
 * Softw. 8, issue 14 (2003), with the shifts 13, 17, 5.
 *
 * @param {number} seed - any whole number
 * @returns {() => number}
 */
export function random(seed) {
  let state = (Math.imul(seed, 2654435761) ^ 0x9e3779b9) | 1;
  return () => {
    state ^= state << 13;
    state ^= state >>> 17;
    state ^= state << 5;
    return state / 2 ** 31;
  };
}

/**
 * The numbers of a list in random order (Fisher and Yates), in place.
 *
 * @param {Int32Array} list
 * @param {() => number} draw - from {@link random}
 */
export function shuffle(list, draw) {
  for (let k = list.length - 1; k > 0; k--) {
    const m = Math.floor(((draw() + 1) / 2) * (k + 1));
    const kept = Number(list[k]);
    list[k] = Number(list[m]);
    list[m] = kept;
  }
}
