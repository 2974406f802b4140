/** Greatest common divisor of two safe integers; non-negative, and 0 only for 0 and 0. */
export function gcdSafe(a: number, b: number): number {
  let x = Math.abs(a);
  let y = Math.abs(b);
  while (y !== 0) {
    const rest = x % y;
    x = y;
    y = rest;
  }
  return x;
}

const SAFE = BigInt(Number.MAX_SAFE_INTEGER);

/** Whether a whole number is a safe integer, so that a double holds it and its neighbours. */
export function isSafe(n: bigint): boolean {
  return n <= SAFE && n >= -SAFE;
}

/** The modulus of a whole number. */
export function absolute(n: bigint): bigint {
  return n < 0n ? -n : n;
}

/** Greatest common divisor (Euclid); non-negative, and 0 only for 0 and 0. */
export function gcd(a: bigint, b: bigint): bigint {
  let x = absolute(a);
  let y = absolute(b);
  while (y !== 0n) {
    if (x <= SAFE && y <= SAFE) return BigInt(gcdSafe(Number(x), Number(y)));
    const rest = x % y;
    x = y;
    y = rest;
  }
  return x;
}

/** The number of binary digits of |n|; 0 for 0. */
export function bitLength(n: bigint): number {
  const digits = absolute(n).toString(16);
  const first = Number.parseInt(digits.charAt(0), 16);
  return 4 * (digits.length - 1) + (32 - Math.clz32(first));
}

/** The whole part of √n for n ≥ 0 (Newton's iteration from above, which descends until it is reached). */
export function floorSqrt(n: bigint): bigint {
  if (n < 0x10000000000000n) return BigInt(Math.floor(Math.sqrt(Number(n))));
  const bits = bitLength(n);
  const drop = (bits - 52 + 1) & ~1;
  const start = BigInt(Math.floor(Math.sqrt(Number(n >> BigInt(drop)))) + 1);
  let root = start << BigInt(drop / 2);
  for (;;) {
    const next = (root + n / root) >> 1n;
    if (next >= root) return root;
    root = next;
  }
}

/** √n where it is whole; undefined otherwise, and for n < 0. */
export function exactSqrt(n: bigint): bigint | undefined {
  if (n < 0n) return undefined;
  const last = Number(n & 15n);
  if (last !== 0 && last !== 1 && last !== 4 && last !== 9) return undefined;
  const root = floorSqrt(n);
  return root * root === n ? root : undefined;
}
