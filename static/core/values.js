/**
 * What an answer can be: numbers as typed, exact decimals, numbers rounded and printed, named error values.
 *
 * Twin of fieldkit/values.py (its docstring says what was decided); tests/vectors/values/ holds them together.
 * No DOM, no IO.
 */

/** Every code that a Fault can have. */
export const FAULTS = Object.freeze([
  "divide-by-zero",
  "overflow",
  "out-of-range",
  "missing",
  "wrong-type",
  "domain",
  "unknown-name",
  "unknown-function",
  "too-deep",
  "bad-tree",
]);

export const MAX_DIGITS = 15;

const SPACES = " \t\n\r\x0b\x0c\u00a0\u2000\u2001\u2002\u2003\u2004\u2005\u2006\u2007\u2008\u2009\u200a\u202f\u3000";
const SIGNS = "+-\u2212";
const DIGITS = "0123456789";
const PLAIN = /^-?[0-9]+(\.[0-9]+)?$/;
const EXPONENT = /^[+\-\u2212]?[0-9]+([.,][0-9]+)?[eE][+\-\u2212]?[0-9]*$/;
const OTHER_DIGIT = /\p{Nd}/u;

/** The answer of a formula that has none: a code out of FAULTS, and a sentence. A value, never thrown. */
export class Fault {
  /** @param {string} code @param {string} says */
  constructor(code, says) {
    this.code = code;
    this.says = says;
  }
}

/** Not allowed now: a stable code, and a sentence for the person. */
export class Refusal {
  /** @param {string} code @param {string} sentence */
  constructor(code, sentence) {
    this.code = code;
    this.sentence = sentence;
  }
}

/** An exact decimal: digits / 10 ** scale. Trailing zeros are kept, so 6.30 has scale 2. */
export class Dec {
  /** @param {bigint} digits @param {number} scale */
  constructor(digits, scale) {
    this.digits = digits;
    this.scale = scale;
  }
}

/** @typedef {{factor: string, offset: string}} Scaled si = shown * factor + offset, as decimal strings */

/**
 * The number that a person wrote, exactly; or a Refusal that says what to write.
 * @param {string} text
 * @returns {Dec | Refusal}
 */
export function typed(text) {
  const refusal = refused(text);
  if (refusal) return new Refusal(refusal[0], refusal[1]);
  return dec(text.replace(",", ".").replace("\u2212", "-").replace(/^\+/, ""));
}

/** @param {string} text @returns {[string, string] | null} */
function refused(text) {
  const chars = [...text];
  if (text === "") return ["nothing-typed", "Nothing is written here. Write the number that the instrument shows."];
  if (chars.some((c) => SPACES.includes(c))) {
    return ["space", "There is a space in it. Write the number without spaces, like 1200.5."];
  }
  if (chars.some((c) => (c.codePointAt(0) ?? 0) > 127 && OTHER_DIGIT.test(c))) {
    return ["other-digits", "These are other digits. Write it with the digits 0 to 9."];
  }
  if (chars.filter((c) => ".,".includes(c)).length > 1) {
    return ["two-separators", "There is more than one point or comma. Write one at most, like 1234.5."];
  }
  if (EXPONENT.test(text)) return ["exponent", "It has an exponent. Write all its digits, as the meter shows them."];
  if (chars.some((c) => "'\u2019_".includes(c))) {
    return ["thousands", "It has a mark between thousands. Write the digits alone, like 1234.5."];
  }
  if (chars.slice(1).some((c) => SIGNS.includes(c))) {
    return ["sign", "The sign is not in front. Write one sign at most, as the first character, like -87.5."];
  }
  if (chars.some((c) => !(DIGITS + ".," + SIGNS).includes(c)) || !chars.some((c) => DIGITS.includes(c))) {
    return ["not-a-number", "This is no number. Write digits only, without the unit, like 12.5."];
  }
  const body = SIGNS.includes(text[0]) ? text.slice(1) : text;
  if (".,".includes(body[0])) return ["no-digit-before", `There is no digit before the point. Write 0${body}.`];
  if (".,".includes(body[body.length - 1])) {
    return ["no-digit-after", `There is no digit after the point. Write ${body.slice(0, -1)} or ${body}0.`];
  }
  if (chars.filter((c) => DIGITS.includes(c)).length > MAX_DIGITS) {
    return ["too-many-digits", `It has more than ${MAX_DIGITS} digits. Write what the instrument shows.`];
  }
  return null;
}

/**
 * The decimal that a program-made text spells: "-12.50". Throws RangeError on anything else.
 * @param {string} text
 */
export function dec(text) {
  if (typeof text !== "string" || !PLAIN.test(text)) throw new RangeError(`not a plain decimal: ${text}`);
  const at = text.indexOf(".");
  const part = at < 0 ? "" : text.slice(at + 1);
  const whole = at < 0 ? text : text.slice(0, at);
  return new Dec(BigInt(whole + part), part.length);
}

/** @param {number} n */
function ten(n) {
  return 10n ** BigInt(n);
}

/** @param {Dec} a @param {Dec} b @returns {[bigint, bigint, number]} */
function aligned(a, b) {
  const scale = Math.max(a.scale, b.scale);
  return [a.digits * ten(scale - a.scale), b.digits * ten(scale - b.scale), scale];
}

/** -1 where a < b, 0 where they are equal (6.3 and 6.30 are), 1 where a > b. @param {Dec} a @param {Dec} b */
export function compare(a, b) {
  const [x, y] = aligned(a, b);
  return x > y ? 1 : x < y ? -1 : 0;
}

/** @param {Dec} a @param {Dec} b */
export function add(a, b) {
  const [x, y, scale] = aligned(a, b);
  return new Dec(x + y, scale);
}

/** @param {Dec} a @param {Dec} b */
export function sub(a, b) {
  const [x, y, scale] = aligned(a, b);
  return new Dec(x - y, scale);
}

/** @param {Dec} a @param {Dec} b */
export function mul(a, b) {
  return new Dec(a.digits * b.digits, a.scale + b.scale);
}

/** The number without its sign. @param {Dec} a */
export function magnitude(a) {
  return new Dec(size_of(a.digits), a.scale);
}

/** @param {bigint} n */
function size_of(n) {
  return n < 0n ? -n : n;
}

/**
 * Plain decimal text with the number's own decimals, or with `decimals` of them, rounded half to even.
 * @param {Dec} a @param {number | null} [decimals]
 */
export function to_text(a, decimals = null) {
  if (decimals === null) return point(a.digits, a.scale);
  if (decimals >= a.scale) return point(a.digits * ten(decimals - a.scale), decimals);
  return point(divide_even(a.digits, ten(a.scale - decimals)), decimals);
}

/** The same number without trailing zeros after the point. @param {Dec} a */
export function trim(a) {
  let { digits, scale } = a;
  while (scale > 0 && digits % 10n === 0n) {
    digits /= 10n;
    scale -= 1;
  }
  return new Dec(digits, scale);
}

/** How many decimals a decimal text has: 2 for "0.01". @param {string} text */
export function decimals(text) {
  return dec(text).scale;
}

/** The nearest double. Throws RangeError beyond the range of doubles. @param {Dec} a */
export function to_float(a) {
  const x = a.digits === 0n ? 0 : Number(point(a.digits, a.scale));
  if (!Number.isFinite(x)) throw new RangeError("beyond the range of doubles");
  return x;
}

/**
 * The nearest double to a plain decimal text; a Fault for any other text. Never throws.
 * @param {string} text
 * @returns {number | Fault}
 */
export function number(text) {
  if (text.length > 1000 || !PLAIN.test(text)) return new Fault("bad-tree", "A number in the formula is not a plain decimal.");
  const value = Number(text);
  if (!Number.isFinite(value)) return new Fault("overflow", "The number is too large.");
  return value;
}

/**
 * Twelve significant digits of the exact binary value of `x`, half to even, as plain decimal text.
 * @param {number} x
 */
export function round12(x) {
  const [top, bottom] = ratio(x);
  return round_ratio(top, bottom, 12);
}

/** `x` with `places` decimals, its exact binary value rounded half to even. @param {number} x @param {number} places */
export function fixed(x, places) {
  const [top, bottom] = ratio(x);
  return point(divide_even(top * ten(places), bottom), places);
}

const BITS = new DataView(new ArrayBuffer(8));

/** The exact value of a double as [top, bottom], bottom > 0. @param {number} x @returns {[bigint, bigint]} */
function ratio(x) {
  if (!Number.isFinite(x)) throw new RangeError(`${x} has no digits`);
  BITS.setFloat64(0, x);
  const bits = BITS.getBigUint64(0);
  const field = Number((bits >> 52n) & 0x7ffn);
  const fraction = bits & 0xfffffffffffffn;
  const size = field === 0 ? fraction : fraction | 0x10000000000000n;
  const power = (field === 0 ? 1 : field) - 1075;
  const top = bits >> 63n ? -size : size;
  return power >= 0 ? [top << BigInt(power), 1n] : [top, 1n << BigInt(-power)];
}

/** top / bottom to the nearest integer, ties to even; bottom > 0. @param {bigint} top @param {bigint} bottom */
function divide_even(top, bottom) {
  let whole = floor_div(top, bottom);
  const rest = top - whole * bottom;
  if (rest * 2n > bottom || (rest * 2n === bottom && (whole & 1n) === 1n)) whole += 1n;
  return whole;
}

/** @param {bigint} top @param {bigint} bottom bottom > 0 */
function floor_div(top, bottom) {
  const whole = top / bottom;
  return top < 0n && whole * bottom !== top ? whole - 1n : whole;
}

/** @param {bigint} top @param {bigint} bottom @param {number} count */
function round_ratio(top, bottom, count) {
  if (top === 0n) return "0";
  const size = size_of(top);
  let ahead = size.toString().length - bottom.toString().length;
  ahead += at_least(size, bottom, ahead) ? 1 : 0;
  let scale = count - ahead;
  let digits = scale >= 0 ? divide_even(size * ten(scale), bottom) : divide_even(size, bottom * ten(-scale));
  while (digits % 10n === 0n) {
    digits /= 10n;
    scale -= 1;
  }
  if (scale < 0) {
    digits *= ten(-scale);
    scale = 0;
  }
  return point(top < 0n ? -digits : digits, scale);
}

/** size / bottom >= 10 ** power. @param {bigint} size @param {bigint} bottom @param {number} power */
function at_least(size, bottom, power) {
  return power >= 0 ? size >= bottom * ten(power) : size * ten(-power) >= bottom;
}

/** @param {bigint} digits @param {number} scale */
function point(digits, scale) {
  let body = size_of(digits).toString().padStart(scale + 1, "0");
  if (scale) body = `${body.slice(0, -scale)}.${body.slice(-scale)}`;
  return digits < 0n ? `-${body}` : body;
}

/**
 * A limit rounded to the resolution, to the safe side: a "low" limit up, a "high" limit down.
 * @param {string} text @param {string | null} resolution @param {string} side
 */
export function inward(text, resolution, side) {
  if (side !== "low" && side !== "high") throw new RangeError(`side is ${side}; it is low or high`);
  const limit = dec(text);
  if (resolution === null || dec(resolution).digits === 0n) return text;
  const step = magnitude(dec(resolution));
  const [top, unit] = aligned(limit, step);
  const count = side === "high" ? floor_div(top, unit) : -floor_div(-top, unit);
  return point(count * step.digits, step.scale);
}

/**
 * A value and its uncertainty as they stand beside each other: "41.54", "0.83".
 * @param {string} text @param {string} u @param {string | null} resolution @returns {[string, string]}
 */
export function beside(text, u, resolution) {
  const size = magnitude(dec(u));
  if (size.digits === 0n) return [text, "0"];
  let place = second_place(size);
  if (resolution !== null) place = Math.max(place, -decimals(resolution));
  const count = steps(size, place);
  return [at_place(steps(dec(text), place), place), at_place(count > 1n ? count : 1n, place)];
}

/** The power of ten of the second significant digit, as it is once rounded there: 0.0996 is 0.10. @param {Dec} size */
function second_place(size) {
  const place = size.digits.toString().length - size.scale - 2;
  return steps(size, place) >= 100n ? place + 1 : place;
}

/** How many times a power of ten goes into a number, to the nearest, ties to even. @param {Dec} a @param {number} place */
function steps(a, place) {
  return divide_even(a.digits * ten(Math.max(0, -place)), ten(Math.max(0, place) + a.scale));
}

/** So many of a power of ten, with the decimals that it has. @param {bigint} count @param {number} place */
function at_place(count, place) {
  return place < 0 ? point(count, -place) : point(count * ten(place), 0);
}

/** An SI value in `unit`, twelve significant digits. @param {number} si @param {Scaled} unit */
export function to_shown(si, unit) {
  const offset = dec(unit.offset);
  const factor = dec(unit.factor);
  let [top, bottom] = ratio(si);
  if (offset.digits !== 0n) {
    const less = sub(dec(round12(si)), offset);
    [top, bottom] = [less.digits, ten(less.scale)];
  }
  return round_ratio(top * ten(factor.scale), bottom * factor.digits, 12);
}

/** A decimal text in `unit` as SI, computed exactly and rounded once. @param {string} text @param {Scaled} unit */
export function to_si(text, unit) {
  return to_float(add(mul(dec(text), dec(unit.factor)), dec(unit.offset)));
}
