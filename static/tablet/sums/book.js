/**
 * The sums of the kit (fieldkit/formula/sums.py says their form): what each is called, found by, and which units it may
 * be asked in. Pure; no element is made here.
 */
import { Dec, dec, to_text } from "../../core/values.js";
import { list, lower, sentence } from "../words.js";
import { MOST } from "./digits.js";

/** @typedef {import("./digits.js").Unit} Unit */
/** @typedef {{symbol: string, unit: string, factor: string, offset: string, any: "" | "any" | "difference"}} Measured */
/** @typedef {Measured & {name: string, meaning: string, low: string | null, high: string | null, whole: boolean}} Argument */
/** @typedef {{subjects: {name: string, formulas: string[]}[], formulas: Record<string, any>, pairs: Record<string, any>, units: Record<string, any>}} Book */
/** @typedef {Measured & {name: string, title: string, meaning: string, digits: number}} Result digits that an answer deserves */
/**
 * @typedef {object} Sum
 * @property {string} name @property {string} title @property {string} subject @property {string} meaning
 * @property {Argument[]} arguments @property {Result[]} results one, or two of a pair
 * @property {string} reference @property {string} decides @property {string[]} cautions @property {string[]} uses @property {string} written
 * @property {string | null} along the argument that the picture runs along
 * @property {{with: Record<string, string>, gives: string[]} | null} example
 */

/** Words of names that are not written as they are spelled there. */
const SPELLED = /** @type {Record<string, string>} */ ({ db: "dB", dbm: "dBm", dbd: "dBd", vswr: "VSWR", erp: "ERP", mpe: "MPE", rf: "RF", q: "Q" });

/** "coolant_heat_water" -> "Coolant heat water", "rf exposure" -> "RF exposure". @param {string} name of a sum or a subject */
export function titleOf(name) {
  const parts = name.split(/[_ ]/), words = parts.map((word) => SPELLED[word] ?? word).join(" ");
  return parts[0] in SPELLED ? words : sentence(words);
}

/** What one asks of a sum, put together. Null for a name that the kit does not hold. @param {Book} book @param {string} name @returns {Sum | null} */
export function sumOf(book, name) {
  const pair = Object.hasOwn(book.pairs, name) ? book.pairs[name] : null;
  const names = pair ? pair.of : Object.hasOwn(book.formulas, name) ? [name] : [];
  const of = names.map((/** @type {string} */ n) => book.formulas[n]);
  if (!of.length || of.some((/** @type {any} */ f) => !f)) return null;
  const first = of[0], whole = pair ?? first, alongs = of.map((/** @type {any} */ f) => f.plot?.along ?? null);
  return {
    name, title: titleOf(name), subject: whole.subject, meaning: whole.meaning, arguments: first.arguments,
    results: of.map((/** @type {any} */ f, /** @type {number} */ k) => ({ name: names[k], title: titleOf(names[k]), meaning: f.meaning, symbol: f.symbol, unit: f.unit, factor: f.factor, offset: f.offset, any: f.any, digits: f.digits ?? MOST })),
    reference: whole.reference, decides: whole.decides, cautions: whole.cautions ?? [], uses: pair ? [] : first.uses ?? [], written: pair ? "" : first.written ?? "",
    along: alongs.every((/** @type {any} */ a) => a === alongs[0]) ? alongs[0] : null,
    example: of.every((/** @type {any} */ f) => f.example) && first.arguments.length ? { with: first.example.with, gives: of.map((/** @type {any} */ f) => f.example.gives) } : null,
  };
}

/** Everything that a sum may be found by, small letters. @param {Book} book @param {string} name */
function haystack(book, name) {
  const sum = sumOf(book, name);
  if (!sum) return "";
  return [name, sum.title, sum.meaning, sum.subject, ...sum.arguments.flatMap((a) => [a.name, a.meaning, a.unit]), ...sum.results.map((r) => r.unit)].join(" ").toLowerCase().replaceAll("_", " ");
}

/**
 * The subjects with the sums that hold every word that was asked for; all of them where nothing was asked.
 * @param {Book} book @param {string} asked @returns {{name: string, formulas: string[]}[]}
 */
export function found(book, asked) {
  const words = asked.toLowerCase().replaceAll("_", " ").split(/\s+/).filter(Boolean);
  if (!words.length) return book.subjects;
  return book.subjects.map((s) => ({ name: s.name, formulas: s.formulas.filter((name) => { const hay = haystack(book, name); return words.every((w) => hay.includes(w)); }) })).filter((s) => s.formulas.length);
}

/** unit -> the units that may stand for it, where others of its dimension would mislead: a ratio is no angle, a level no gain */
const KINDS = /** @type {Record<string, string[]>} */ ({ 1: ["1"], "%": ["%", "1"], rad: ["rad", "deg"], deg: ["deg", "rad"], dB: ["dB"], dBm: ["dBm"], degC: ["degC", "K"] });

/** @param {string} symbol @param {any} row @returns {Unit} */
const unitOf = (symbol, row) => ({ symbol, shown: row.shown, factor: row.factor, offset: row.offset });

/** @param {any} a @param {any} b */
const alike = (a, b) => a.absolute === b.absolute && JSON.stringify(Object.entries(a.dimension).sort()) === JSON.stringify(Object.entries(b.dimension).sort());

/** A million times more or less is as far as a unit may be: nobody types an altitude in picometres. */
const FARTHEST = 1.000001e6;

/** @param {any} a @param {any} b */
const near = (a, b) => { const times = Number(a.factor) / Number(b.factor); return times <= FARTHEST && times >= 1 / FARTHEST; };

/** All units of the kind of one, itself first. @param {Book} book @param {string} symbol @returns {Unit[]} */
export function sameKind(book, symbol) {
  const own = book.units[symbol], kind = Object.hasOwn(KINDS, symbol) ? KINDS[symbol] : [symbol, ...Object.keys(book.units).filter((s) => s !== symbol && alike(book.units[s], own) && near(book.units[s], own))];
  return kind.map((s) => unitOf(s, book.units[s]));
}

/** The unit of a difference of two values in a unit: K where they are in °C, dB where they are in dBm. @param {Book} book @param {string} symbol @returns {Unit} */
export function differenceOf(book, symbol) {
  const other = book.units[symbol].absolute ? "K" : symbol === "dBm" ? "dB" : symbol;
  return unitOf(other, book.units[other]);
}

/** @param {Book} book @returns {Unit[]} */
export const everyUnit = (book) => Object.keys(book.units).map((s) => unitOf(s, book.units[s]));

/**
 * The units that a value of a sum may be in, the likeliest first. `any` is the unit chosen for the values that take any.
 * @param {Book} book @param {Measured & {whole?: boolean}} measured @param {string} any @returns {Unit[]}
 */
export function unitsFor(book, measured, any) {
  if (measured.any === "difference") return [differenceOf(book, any)];
  if (measured.any === "any") return everyUnit(book);
  if (measured.whole || !book.units[measured.symbol]) return [{ symbol: measured.symbol, shown: measured.unit, factor: measured.factor, offset: measured.offset }];
  return sameKind(book, measured.symbol);
}

/** The units that a result may be shown in. @param {Book} book @param {Result} result @param {string} any @returns {Unit[]} */
export function resultUnits(book, result, any) {
  if (result.any) return sameKind(book, result.any === "difference" ? differenceOf(book, any).symbol : any);
  return unitsFor(book, result, any);
}

/** A number without its exponent: nobody types one. @param {string} text "1.2e-3" */
function plain(text) {
  const [digits, power] = text.split(/[eE]/);
  if (power === undefined) return text;
  const from = dec(digits.replace(/^[+]/, "")), scale = from.scale - Number(power);
  return to_text(scale >= 0 ? new Dec(from.digits, scale) : new Dec(from.digits * 10n ** BigInt(-scale), 0));
}

/** "60 L/min" -> its number and its unit's symbol, as a worked example writes them. @param {Book} book @param {string} written */
export function quantity(book, written) {
  const at = written.indexOf(" "), text = at < 0 ? written : written.slice(0, at), name = at < 0 ? "1" : written.slice(at + 1).trim();
  const symbol = Object.hasOwn(book.units, name) ? name : Object.keys(book.units).find((s) => book.units[s].shown === name);
  return { text: plain(text), symbol: symbol ?? null };
}

/** The unit to begin with for values that take any: that of the worked example. @param {Book} book @param {Sum} sum */
export function firstAny(book, sum) {
  const argument = sum.arguments.find((a) => a.any === "any") ?? sum.arguments.find((a) => a.any), example = argument && sum.example?.with[argument.name];
  return (example && quantity(book, example).symbol) || "V";
}

/** What an argument is called inside a sentence. @param {Argument} argument */
export const called = (argument) => lower(argument.meaning.replace(/\.$/, "") || argument.name.replaceAll("_", " "));

/** "flow at the inlet and temperature at the outlet". @param {Argument[]} these */
export const calledAll = (these) => list(these.map(called));
