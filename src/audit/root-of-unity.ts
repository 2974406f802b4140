/**
 * e^{2πi k/N}, each part to within two units in its last place, and exact at the multiples of a quarter and of a twelfth
 * turn whose coordinates are 0, ±1/2 or ±1.
 *
 * @param k - any integer
 * @param order - N ≥ 1
 */
export function rootOfUnity(k: number, order: number): { re: number; im: number } {
  const turn = ((k % order) + order) % order;
  return { re: cosineOfTurn(turn, order), im: cosineOfTurn(4 * turn - order, 4 * order) };
}

/** cos(2π k/N) with the argument folded into the first eighth of a turn. */
function cosineOfTurn(k: number, order: number): number {
  let fold = Math.abs(k % order);
  if (2 * fold > order) fold = order - fold;
  if (4 * fold > order) return -cosineOfTurn(order - 2 * fold, 2 * order);
  if (fold === 0) return 1;
  if (4 * fold === order) return 0;
  if (6 * fold === order) return 0.5;
  const angle = (2 * Math.PI * fold) / order;
  return 8 * fold <= order ? Math.cos(angle) : Math.sin((Math.PI * (order - 4 * fold)) / (2 * order));
}
