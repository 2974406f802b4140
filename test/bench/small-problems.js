import { angularMomentum, Operator, productSpace } from "../../dist/index.js";
import { random } from "./random.js";

/**
 * @typedef {import("../../dist/index.js").Problem} Problem
 * @typedef {import("../../dist/index.js").MatrixData} MatrixData
 * @typedef {{ re: number[][], im: number[][] }} Square
 */

/**
 * Linear Stark effect of hydrogen, n = 2, in a field along z: kets 2s, 2p m = +1, 0, −1. L² is broken by V.
 *
 * @param {number} seed - of the field
 * @returns {Problem}
 */
export function stark(seed) {
  const field = 2 + random(seed)();
  const couple = (/** @type {number} */ x) => [
    [0, 0, x, 0],
    [0, 0, 0, 0],
    [x, 0, 0, 0],
    [0, 0, 0, 0],
  ];
  return {
    h0: { diagonal: [-1 / 8, -1 / 8, -1 / 8, -1 / 8] },
    v: couple(-3 * field),
    candidates: { Lz: { diagonal: [0, 1, 0, -1] }, Az: couple(1), L2: { diagonal: [0, 2, 2, 2] } },
  };
}

/**
 * Spin–orbit coupling of a 2D term as H0 and its Zeeman term as V; Jz is conserved, L² and S² are multiples of the identity.
 *
 * @param {number} seed - of the coupling
 * @returns {Problem}
 */
export function doublet(seed) {
  const draw = random(seed);
  const [l, s] = [angularMomentum(2), angularMomentum(1 / 2)];
  const space = productSpace([l.n, s.n]);
  const orbit = { z: space.embed(l.z, 0), plus: space.embed(l.plus, 0), minus: space.embed(l.minus, 0) };
  const spin = { z: space.embed(s.z, 1), plus: space.embed(s.plus, 1), minus: space.embed(s.minus, 1) };
  const turn = orbit.plus.times(spin.minus).plus(orbit.minus.times(spin.plus)).scale(0.5);
  return {
    h0: rows(
      orbit.z
        .times(spin.z)
        .plus(turn)
        .scale(2 + draw()),
    ),
    v: rows(orbit.z.plus(spin.z.scale(2)).scale(2 + draw())),
    candidates: {
      Jz: rows(orbit.z.plus(spin.z)),
      L2: rows(space.embed(l.squared, 0)),
      S2: rows(space.embed(s.squared, 1)),
    },
  };
}

/**
 * @param {Operator} operator - a real one
 * @returns {number[][]} its entries as nested arrays, so that reading them is part of the job
 */
function rows(operator) {
  const { re } = operator.dense();
  return Array.from({ length: operator.n }, (_, i) => Array.from(re.subarray(i * operator.n, (i + 1) * operator.n)));
}

/**
 * A random problem with a hidden symmetry: up to four blocks, V a full random matrix inside each, every level with one state in
 * each block; three conserved candidates A, B, C; all matrices turned by one random rotation and therefore dense.
 *
 * @param {number} n - a power of two
 * @param {boolean} complex - whether V and the rotation are complex
 * @param {number} seed
 * @returns {Problem}
 */
export function planted(n, complex, seed) {
  const draw = random(seed);
  const levels = Math.max(1, n / 4);
  const block = (/** @type {number} */ i) => Math.floor(i / levels);
  const u = rotation(n, complex, draw);
  const v = square(n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const [x, y] = [draw(), complex && i !== j ? draw() : 0];
      if (block(i) !== block(j)) continue;
      put(v, i, j, x, y);
      put(v, j, i, x, -y);
    }
  }
  const turned = (/** @type {(i: number) => number} */ value) => {
    const diagonal = square(n);
    for (let i = 0; i < n; i++) put(diagonal, i, i, value(i), 0);
    return matrix(conjugated(u, diagonal), complex);
  };
  return {
    h0: turned((i) => i % levels),
    v: matrix(conjugated(u, v), complex),
    candidates: {
      A: turned((i) => (block(i) % 2 === 0 ? 1 : -1)),
      B: turned((i) => (block(i) < 2 ? 1 : -1)),
      C: turned(block),
    },
  };
}

/**
 * @param {Square} a
 * @param {boolean} complex
 * @returns {MatrixData}
 */
function matrix({ re, im }, complex) {
  return complex ? { re, im } : re;
}

/**
 * @param {number} n
 * @returns {Square} the zero matrix
 */
function square(n) {
  const zeros = () => Array.from({ length: n }, () => new Array(n).fill(0));
  return { re: zeros(), im: zeros() };
}

/**
 * @param {Square} a
 * @param {number} i
 * @param {number} j
 * @param {number} x
 * @param {number} y
 */
function put(a, i, j, x, y) {
  const [re, im] = [a.re[i], a.im[i]];
  if (re === undefined || im === undefined) throw new RangeError(`row ${i} of ${a.re.length}`);
  re[j] = x;
  im[j] = y;
}

/**
 * @param {Square} a
 * @param {number} i
 * @param {number} j
 * @returns {[number, number]}
 */
function get(a, i, j) {
  return [Number(a.re[i]?.[j]), Number(a.im[i]?.[j])];
}

/**
 * A random unitary matrix (orthogonal where it is real): Gram–Schmidt, twice, on random rows.
 *
 * @param {number} n
 * @param {boolean} complex
 * @param {() => number} draw
 * @returns {Square}
 */
function rotation(n, complex, draw) {
  const u = square(n);
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < n; k++) put(u, i, k, draw(), complex ? draw() : 0);
    for (let pass = 0; pass < 2; pass++) {
      for (let j = 0; j < i; j++) {
        const [c, d] = inner(u, j, i);
        for (let k = 0; k < n; k++) {
          const [[x, y], [p, q]] = [get(u, i, k), get(u, j, k)];
          put(u, i, k, x - (c * p - d * q), y - (c * q + d * p));
        }
      }
    }
    const norm = Math.sqrt(inner(u, i, i)[0]);
    for (let k = 0; k < n; k++) {
      const [x, y] = get(u, i, k);
      put(u, i, k, x / norm, y / norm);
    }
  }
  return u;
}

/**
 * @param {Square} u
 * @param {number} a
 * @param {number} b
 * @returns {[number, number]} Σ_k conj(u_ak) u_bk
 */
function inner(u, a, b) {
  let [re, im] = [0, 0];
  for (let k = 0; k < u.re.length; k++) {
    const [[x, y], [p, q]] = [get(u, a, k), get(u, b, k)];
    re += x * p + y * q;
    im += x * q - y * p;
  }
  return [re, im];
}

/**
 * @param {Square} u
 * @param {Square} a - Hermitian
 * @returns {Square} U† A U, exactly Hermitian
 */
function conjugated(u, a) {
  const n = u.re.length;
  const half = square(n);
  const out = square(n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      let [re, im] = [0, 0];
      for (let k = 0; k < n; k++) {
        const [[x, y], [p, q]] = [get(a, i, k), get(u, k, j)];
        re += x * p - y * q;
        im += x * q + y * p;
      }
      put(half, i, j, re, im);
    }
  }
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let [re, im] = [0, 0];
      for (let k = 0; k < n; k++) {
        const [[x, y], [p, q]] = [get(u, k, i), get(half, k, j)];
        re += x * p + y * q;
        im += x * q - y * p;
      }
      put(out, i, j, re, i === j ? 0 : im);
      put(out, j, i, re, i === j ? 0 : -im);
    }
  }
  return out;
}
