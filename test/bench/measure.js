/**
 * Least time of each task over several rounds; in every round all tasks run one after the other, so that a slow moment of the
 * machine meets them alike.
 *
 * @param {readonly (() => () => void)[]} tasks - each prepares, not timed, and returns what is timed
 * @param {number} rounds
 * @returns {number[]} milliseconds
 */
export function interleaved(tasks, rounds) {
  const least = tasks.map(() => Number.POSITIVE_INFINITY);
  for (let round = 0; round < rounds; round++) {
    tasks.forEach((prepare, k) => {
      least[k] = Math.min(Number(least[k]), once(prepare));
    });
  }
  return least;
}

/**
 * Time of one run, after collecting what earlier ones left.
 *
 * @param {() => () => void} prepare - prepares, not timed, and returns what is timed
 * @returns {number} milliseconds
 */
export function once(prepare) {
  const run = prepare();
  globalThis.gc?.();
  const begun = performance.now();
  run();
  return performance.now() - begun;
}

/**
 * Calls a function until the given time has passed, at least once.
 *
 * @param {number} ms
 * @param {() => void} call
 * @returns {number} the number of calls
 */
export function repeatFor(ms, call) {
  const end = performance.now() + ms;
  let count = 0;
  do {
    call();
    count++;
  } while (performance.now() < end);
  return count;
}
