// The dense real matrix product: packed panels and a 4 × 4 block of sums held in registers, two columns a vector.
// Blocking for the cache and packing follow Goto and van de Geijn, ACM Trans. Math. Softw. 34, 12 (2008).

import { at, clear, get, put, room } from "./memory.ts";

/** Depth of a packed panel: a strip of 4 rows and one of 4 columns stay in the first-level cache. */
const DEPTH: i32 = 192;
/** Rows of A packed at a time. */
const ROWS: i32 = 96;
/** Columns of B packed at a time. */
const COLS: i32 = 512;

/** Bytes of scratch that {@link addProduct} asks for. */
export function productScratch(): usize {
  return room(DEPTH * (COLS + 4)) + room(DEPTH * (ROWS + 4)) + room(16);
}

/**
 * C ← C + alpha A B. Entry (i, j) of A is double `i * aRow + j * aCol` of its stretch, and so for B; C has rows of
 * `cRow` doubles and must not overlap A or B.
 *
 * @param m - rows of A and of C
 * @param n - columns of B and of C
 * @param k - columns of A, rows of B
 */
export function addProduct(
  m: i32,
  n: i32,
  k: i32,
  alpha: f64,
  a: usize,
  aRow: i32,
  aCol: i32,
  b: usize,
  bRow: i32,
  bCol: i32,
  c: usize,
  cRow: i32,
  scratch: usize,
): void {
  const packedB = scratch;
  const packedA = packedB + room(DEPTH * (COLS + 4));
  const spill = packedA + room(DEPTH * (ROWS + 4));
  for (let col = 0; col < n; col += COLS) {
    const cols = min(COLS, n - col);
    for (let inner = 0; inner < k; inner += DEPTH) {
      const depth = min(DEPTH, k - inner);
      pack(at(b, inner * bRow + col * bCol), bCol, bRow, cols, depth, 1, packedB);
      for (let row = 0; row < m; row += ROWS) {
        const rows = min(ROWS, m - row);
        pack(at(a, row * aRow + inner * aCol), aRow, aCol, rows, depth, alpha, packedA);
        for (let j = 0; j < cols; j += 4) {
          for (let i = 0; i < rows; i += 4) {
            const to = at(c, (row + i) * cRow + col + j);
            const whole = rows - i >= 4 && cols - j >= 4;
            const target = whole ? to : spill;
            if (!whole) clear(spill, 16);
            block(depth, at(packedA, i * depth), at(packedB, j * depth), target, whole ? cRow : 4);
            if (!whole) addSpill(min(4, rows - i), min(4, cols - j), spill, to, cRow);
          }
        }
      }
    }
  }
}

/** Packs lines in strips of four, padded with zeros: within a strip, the four entries of one depth lie side by side. */
function pack(from: usize, lineStep: i32, depthStep: i32, lines: i32, depth: i32, factor: f64, to: usize): void {
  const line = (lineStep as usize) << 3;
  const step = (depthStep as usize) << 3;
  const f = f64x2.splat(factor);
  for (let first = 0; first < lines; first += 4) {
    let p = at(from, first * lineStep);
    const width = lines - first;
    if (width >= 4 && lineStep === 1) {
      for (let q = 0; q < depth; q++) {
        v128.store(to, f64x2.mul(v128.load(p), f));
        v128.store(to, f64x2.mul(v128.load(p, 16), f), 16);
        to += 32;
        p += step;
      }
    } else if (width >= 4) {
      let q = 0;
      if (depthStep === 1) {
        // Two depths at a time, transposed in registers.
        for (; q + 1 < depth; q += 2) {
          const x = f64x2.mul(v128.load(p), f);
          const y = f64x2.mul(v128.load(p + line), f);
          const z = f64x2.mul(v128.load(p + 2 * line), f);
          const w = f64x2.mul(v128.load(p + 3 * line), f);
          v128.store(to, v128.shuffle<f64>(x, y, 0, 2));
          v128.store(to, v128.shuffle<f64>(z, w, 0, 2), 16);
          v128.store(to, v128.shuffle<f64>(x, y, 1, 3), 32);
          v128.store(to, v128.shuffle<f64>(z, w, 1, 3), 48);
          to += 64;
          p += 16;
        }
      }
      for (; q < depth; q++) {
        f64.store(to, factor * f64.load(p));
        f64.store(to, factor * f64.load(p + line), 8);
        f64.store(to, factor * f64.load(p + 2 * line), 16);
        f64.store(to, factor * f64.load(p + 3 * line), 24);
        to += 32;
        p += step;
      }
    } else {
      for (let q = 0; q < depth; q++) {
        for (let r = 0; r < 4; r++) put(to, r, r < width ? factor * f64.load(p + (r as usize) * line) : 0);
        to += 32;
        p += step;
      }
    }
  }
}

/** Adds the product of one packed strip of A with one of B to 4 × 4 entries of C. */
function block(depth: i32, a: usize, b: usize, c: usize, cRow: i32): void {
  let s00 = f64x2.splat(0);
  let s01 = s00;
  let s10 = s00;
  let s11 = s00;
  let s20 = s00;
  let s21 = s00;
  let s30 = s00;
  let s31 = s00;
  const end = at(a, 4 * depth);
  while (a < end) {
    const b0 = v128.load(b);
    const b1 = v128.load(b, 16);
    let x = v128.load64_splat(a);
    s00 = f64x2.add(s00, f64x2.mul(x, b0));
    s01 = f64x2.add(s01, f64x2.mul(x, b1));
    x = v128.load64_splat(a, 8);
    s10 = f64x2.add(s10, f64x2.mul(x, b0));
    s11 = f64x2.add(s11, f64x2.mul(x, b1));
    x = v128.load64_splat(a, 16);
    s20 = f64x2.add(s20, f64x2.mul(x, b0));
    s21 = f64x2.add(s21, f64x2.mul(x, b1));
    x = v128.load64_splat(a, 24);
    s30 = f64x2.add(s30, f64x2.mul(x, b0));
    s31 = f64x2.add(s31, f64x2.mul(x, b1));
    a += 32;
    b += 32;
  }
  // All of C is read before any of it is written: rows a multiple of 4096 bytes apart would make a load wait for the
  // store before it.
  const c1 = at(c, cRow);
  const c2 = at(c1, cRow);
  const c3 = at(c2, cRow);
  s00 = f64x2.add(v128.load(c), s00);
  s01 = f64x2.add(v128.load(c, 16), s01);
  s10 = f64x2.add(v128.load(c1), s10);
  s11 = f64x2.add(v128.load(c1, 16), s11);
  s20 = f64x2.add(v128.load(c2), s20);
  s21 = f64x2.add(v128.load(c2, 16), s21);
  s30 = f64x2.add(v128.load(c3), s30);
  s31 = f64x2.add(v128.load(c3, 16), s31);
  v128.store(c, s00);
  v128.store(c, s01, 16);
  v128.store(c1, s10);
  v128.store(c1, s11, 16);
  v128.store(c2, s20);
  v128.store(c2, s21, 16);
  v128.store(c3, s30);
  v128.store(c3, s31, 16);
}

/** Adds the corner of a 4 × 4 block that lies inside the matrix. */
function addSpill(rows: i32, cols: i32, from: usize, c: usize, cRow: i32): void {
  for (let i = 0; i < rows; i++) {
    for (let j = 0; j < cols; j++) put(c, i * cRow + j, get(c, i * cRow + j) + get(from, 4 * i + j));
  }
}
