/**
 * Least processor time of each task over several rounds; in every round all tasks run one after the other, so that a slow moment of the
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
 * Processor time of one run, after collecting what earlier ones left. It counts all threads of the process, so that memory
 * collected on a second core is not had for nothing, and not what else the machine does meanwhile.
 *
 * @param {() => () => void} prepare - prepares, not timed, and returns what is timed
 * @returns {number} milliseconds
 */
export function once(prepare) {
  const run = prepare();
  globalThis.gc?.();
  const begun = process.cpuUsage();
  run();
  const { user, system } = process.cpuUsage(begun);
  return (user + system) / 1000;
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
