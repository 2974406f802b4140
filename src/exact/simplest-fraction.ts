/** p / q, q ≥ 1. */
export type Ratio = readonly [p: bigint, q: bigint];

/**
 * The fraction with the smallest denominator in a closed interval, by continued fractions of both ends.
 *
 * @param low - at least 0
 * @param high - at least `low`
 */
export function simplestBetween([a, b]: Ratio, [c, d]: Ratio): Ratio {
  const whole = a / b;
  if (whole * b === a) return [whole, 1n];
  if ((whole + 1n) * d <= c) return [whole + 1n, 1n];
  // both ends lie strictly inside (whole, whole + 1): go on with the reciprocals of what is left, in reverse order
  const [p, q] = simplestBetween([d, c - whole * d], [b, a - whole * b]);
  return [whole * p + q, p];
}

/**
 * The neighbours of p / q among all fractions with denominators up to `most` (its neighbours in the Farey sequence): p′ / q′
 * with |p q′ − p′ q| = 1 and q′ as large as possible.
 *
 * @param fraction - in lowest terms, q ≤ most
 */
export function fareyNeighbours([p, q]: Ratio, most: bigint): { below: Ratio; above: Ratio } {
  const inverse = inverseModulo(p, q);
  const largest = (residue: bigint): bigint => most - modulo(most - residue, q);
  const [s, t] = [largest(inverse), largest(-inverse)];
  return { below: [(p * s - 1n) / q, s], above: [(p * t + 1n) / q, t] };
}

function modulo(n: bigint, q: bigint): bigint {
  const rest = n % q;
  return rest < 0n ? rest + q : rest;
}

/** x with p x = 1 modulo q, for coprime p and q (Euclid). */
function inverseModulo(p: bigint, q: bigint): bigint {
  let [r, s] = [modulo(p, q), q];
  let [x, y] = [1n, 0n];
  while (s !== 0n) {
    const quotient = r / s;
    [r, s] = [s, r - quotient * s];
    [x, y] = [y, x - quotient * y];
  }
  return modulo(x, q);
}
