/**
 * Arithmetic on pairs of doubles, and exp and log of such pairs: a number is hi + lo, good to some 30 digits.
 *
 * Twin of fieldkit/formula/pairs.py, line by line: the long way round, for whatever the short way (quick.js) leaves in
 * doubt. No DOM, no IO.
 */

/** @typedef {[number, number]} Pair a number hi + lo */

export const INV_LN2 = 1.4426950408889634;
export const [LN2_1, LN2_2, LN2_3] = [0.6931471803691238, 1.9082149288430703e-10, 4.275175589747649e-20];
export const SQRT_HALF = 0.7071067811865476;

/** @param {number} a @param {number} b @returns {Pair} */
export function two_sum(a, b) {
  const s = a + b;
  const t = s - a;
  return [s, a - (s - t) + (b - t)];
}

/** @param {number} a @param {number} b @returns {Pair} */
export function fast(a, b) {
  const s = a + b;
  return [s, b - (s - a)];
}

/** @param {number} a @param {number} b @returns {Pair} */
export function two_prod(a, b) {
  const p = a * b;
  let t = 134217729 * a;
  const ah = t - (t - a);
  const al = a - ah;
  t = 134217729 * b;
  const bh = t - (t - b);
  const bl = b - bh;
  return [p, ah * bh - p + ah * bl + al * bh + al * bl];
}

/** @param {Pair} a @param {Pair} b @returns {Pair} */
export function add(a, b) {
  let [s, e] = two_sum(a[0], b[0]);
  const [t, f] = two_sum(a[1], b[1]);
  [s, e] = fast(s, e + t);
  return fast(s, e + f);
}

/** @param {Pair} a @param {Pair} b @returns {Pair} */
export function mul(a, b) {
  const [p, e] = two_prod(a[0], b[0]);
  return fast(p, e + (a[0] * b[1] + a[1] * b[0]));
}

/** @param {Pair} a @param {number} b @returns {Pair} */
export function times(a, b) {
  const [p, e] = two_prod(a[0], b);
  return fast(p, e + a[1] * b);
}

/** @param {Pair} a @param {Pair} b @returns {Pair} */
export function div(a, b) {
  const q1 = a[0] / b[0];
  let p = times(b, q1);
  let r = add(a, [-p[0], -p[1]]);
  const q2 = r[0] / b[0];
  p = times(b, q2);
  r = add(r, [-p[0], -p[1]]);
  const q3 = r[0] / b[0];
  const s = fast(q1, q2);
  return add(s, [q3, 0]);
}

/** @returns {Pair[]} */
function inverse_factorials() {
  /** @type {Pair[]} */
  const found = [[1, 0]];
  for (let n = 1; n < 27; n += 1) found.push(div(found[n - 1], [n, 0]));
  return found;
}

/** 1 / n! */
export const FACTORIAL = inverse_factorials();
/** 1 / (2 n + 1) */
export const ODD = Array.from({ length: 140 }, (_, n) => div([1, 0], [2 * n + 1, 0]));

const BITS = new DataView(new ArrayBuffer(8));

/** 2 ** k exactly, for a normal result. @param {number} k */
export function power_of_two(k) {
  BITS.setUint32(0, (k + 1023) << 20);
  BITS.setUint32(4, 0);
  return BITS.getFloat64(0);
}

/** x = m * 2 ** e with m from 0.5 to below 1; x > 0. @param {number} x @returns {Pair} */
export function frexp(x) {
  const lift = x < 2.2250738585072014e-308 ? 54 : 0;
  BITS.setFloat64(0, lift ? x * 18014398509481984 : x);
  const top = BITS.getUint32(0);
  BITS.setUint32(0, (top & 0x000fffff) | 0x3fe00000);
  return [BITS.getFloat64(0), (top >> 20) - 1022 - lift];
}

/** x * 2 ** k in two exact steps and at most one rounding. @param {number} x @param {number} k */
export function scale(x, k) {
  const half = Math.floor(k / 2);
  return x * power_of_two(half) * power_of_two(k - half);
}

/** e ** x as a pair near 1 and a power of two; |x| below 800. @param {Pair} x @returns {[Pair, number]} */
export function exp(x) {
  const k = Math.floor(x[0] * INV_LN2 + 0.5);
  let r = add(two_sum(x[0], -(k * LN2_1)), [x[1], 0]);
  r = add(add(r, [-(k * LN2_2), 0]), [-(k * LN2_3), 0]);
  r = [r[0] * 0.015625, r[1] * 0.015625];
  let s = FACTORIAL[9];
  for (let n = 8; n > 0; n -= 1) s = add(mul(s, r), FACTORIAL[n]);
  let e = mul(s, r);
  for (let n = 0; n < 6; n += 1) e = add([2 * e[0], 2 * e[1]], mul(e, e));
  return [add([1, 0], e), k];
}

/** ln x as a pair; x > 0. @param {number} x @returns {Pair} */
export function log(x) {
  let [m, e] = frexp(x);
  if (m < SQRT_HALF) {
    m *= 2;
    e -= 1;
  }
  const s = div([m - 1, 0], two_sum(m, 1));
  const square = mul(s, s);
  let total = ODD[15];
  for (let n = 14; n >= 0; n -= 1) total = add(mul(total, square), ODD[n]);
  total = mul(total, s);
  total = [2 * total[0], 2 * total[1]];
  if (e === 0) return total;
  const rest = add([e * LN2_2, 0], [e * LN2_3, 0]);
  return add([e * LN2_1, 0], add(rest, total));
}
