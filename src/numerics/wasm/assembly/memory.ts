// Access to stretches of doubles (8 bytes) and integers (4 bytes) in linear memory. A stretch is named by the byte
// address of its first number; the stub runtime allocates nothing, so every address comes from the caller.

/** Address of double i of a stretch. */
export function at(p: usize, i: i32): usize {
  return p + ((i as usize) << 3);
}

/** Double i of a stretch. */
export function get(p: usize, i: i32): f64 {
  return f64.load(p + ((i as usize) << 3));
}

/** Stores double i of a stretch. */
export function put(p: usize, i: i32, x: f64): void {
  f64.store(p + ((i as usize) << 3), x);
}

/** Integer i of a stretch. */
export function getInt(p: usize, i: i32): i32 {
  return i32.load(p + ((i as usize) << 2));
}

/** Stores integer i of a stretch. */
export function putInt(p: usize, i: i32, x: i32): void {
  i32.store(p + ((i as usize) << 2), x);
}

/** Bytes of n doubles, rounded up to a multiple of 16 so that what follows is aligned. */
export function room(n: i32): usize {
  return (((n as usize) << 3) + 15) & ~15;
}

/** Sets n doubles to zero. */
export function clear(p: usize, n: i32): void {
  memory.fill(p, 0, (n as usize) << 3);
}

/** Copies n doubles; the stretches may overlap. */
export function copy(to: usize, from: usize, n: i32): void {
  memory.copy(to, from, (n as usize) << 3);
}

/** Sum of the two lanes. */
export function lanes(v: v128): f64 {
  return f64x2.extract_lane(v, 0) + f64x2.extract_lane(v, 1);
}

/** Σ p_i q_i over n doubles. */
export function dot(n: i32, p: usize, q: usize): f64 {
  let a = f64x2.splat(0);
  let b = f64x2.splat(0);
  let i = 0;
  for (; i + 3 < n; i += 4) {
    const x = at(p, i);
    const y = at(q, i);
    a = f64x2.add(a, f64x2.mul(v128.load(x), v128.load(y)));
    b = f64x2.add(b, f64x2.mul(v128.load(x, 16), v128.load(y, 16)));
  }
  let sum = lanes(f64x2.add(a, b));
  for (; i < n; i++) sum += get(p, i) * get(q, i);
  return sum;
}

/** p_i ← factor · p_i over n doubles. */
export function scale(n: i32, p: usize, factor: f64): void {
  const f = f64x2.splat(factor);
  let i = 0;
  for (; i + 1 < n; i += 2) v128.store(at(p, i), f64x2.mul(v128.load(at(p, i)), f));
  if (i < n) put(p, i, get(p, i) * factor);
}
