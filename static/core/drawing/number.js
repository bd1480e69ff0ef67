// Exact decimal arithmetic for drawings: decimal strings as BigInt, positions in tenths of a pixel.
// Twin of fieldkit/drawing/number.py.

const DECIMAL = /^([+-]?)([0-9]+)(?:\.([0-9]*))?(?:[eE]([+-]?[0-9]{1,3}))?$/;
const MOST_DIGITS = 40;

/** @typedef {string | null | undefined} Text */

/** @param {bigint} a @param {bigint} b positive @returns {bigint} a / b, down */
export function floor(a, b) {
  const q = a / b;
  return a % b !== 0n && a < 0n ? q - 1n : q;
}

/** @param {Text} text @returns {[bigint, number] | null} mantissa and decimals; null if it is no number */
export function parts(text) {
  if (text === null || text === undefined) return null;
  const found = DECIMAL.exec(String(text).trim().replaceAll("\u2212", "-").replaceAll(",", "."));
  if (!found) return null;
  const [, sign, whole, given, exponent] = found;
  const power = Number(exponent || "0");
  if (whole.length > MOST_DIGITS || Math.abs(power) > MOST_DIGITS) return null;
  const fraction = (given || "").slice(0, MOST_DIGITS);
  let mantissa = BigInt(whole + fraction);
  let decimals = fraction.length - power;
  if (decimals < 0) [mantissa, decimals] = [mantissa * 10n ** BigInt(-decimals), 0];
  return [sign === "-" ? -mantissa : mantissa, decimals];
}

/** @param {...Text} texts @returns {number} the most decimals that any of them has */
export function decimals(...texts) {
  return Math.max(0, ...texts.map((t) => parts(t)?.[1] ?? 0));
}

/** @param {Text} text @param {number} places @returns {bigint | null} the number times 10^places, exactly */
export function scaled(text, places) {
  const p = parts(text);
  return p === null ? null : p[0] * 10n ** BigInt(places - p[1]);
}

/** @param {bigint} a @param {bigint} b positive @returns {bigint} a / b to the nearest integer, halves up */
export function ratio(a, b) {
  return floor(2n * a + b, 2n * b);
}

/** @param {number} a @param {number} b @returns {number} a / b down, for whole numbers of pixels */
export function half(a, b = 2) {
  return Math.floor(a / b);
}

/** @param {number} tenths @returns {string} tenths of a pixel as SVG writes them */
export function px(tenths) {
  const size = Math.abs(tenths);
  const tenth = size % 10;
  return (tenths < 0 ? "-" : "") + String((size - tenth) / 10) + (tenth ? `.${tenth}` : "");
}

/** @param {bigint} value @param {number} places @param {number} keep @returns {string} with a true minus sign */
export function shown(value, places, keep) {
  const plain = value < 0n ? -value : value;
  const size = places > keep ? ratio(plain, 10n ** BigInt(places - keep)) : plain * 10n ** BigInt(keep - places);
  const digits = String(size).padStart(keep + 1, "0");
  const text = keep === 0 ? digits : `${digits.slice(0, -keep)}.${digits.slice(-keep)}`;
  return (value < 0n && size ? "\u2212" : "") + text;
}

/** @param {Text} value @returns {string} as typed, with a true minus sign and a point */
export function text(value) {
  if (value === null || value === undefined) return "";
  return String(value).trim().replaceAll(",", ".").replaceAll("-", "\u2212");
}

/** @param {string} words @param {number} size px @returns {number} about how wide, in tenths of a pixel */
export function wide(words, size) {
  return half([...words].length * size * 56, 10);
}
