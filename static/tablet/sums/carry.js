/**
 * What the ± of the values of a sum make of its results, to first order, every ± a source of its own. Pure.
 *
 * As `fieldkit calc` does it (fieldkit/formula/carried.py); derivatives and their sum are core's.
 */
import { prepare } from "../../core/slopes.js";
import { contributions, standard } from "../../core/spread.js";
import { Fault } from "../../core/values.js";
import { called } from "./book.js";
import { faultWords } from "./reckon.js";

/** @typedef {import("./book.js").Sum} Sum */
/** @typedef {import("./book.js").Argument} Argument */
/** @typedef {{argument: Argument, percent: number}} Share of the variance */
/** @typedef {{u: number, shares: Share[]}} Carried U (k = 2) in SI, and where it comes from, the largest first */

const K = 2;
/** A result that strays from the straight line by more than this part of its own U is told, where its digits show it. */
const BENT = 0.2;

/** A sum whose uncertainty can be asked. @param {Sum} sum @param {Record<string, any>} formulas @param {ReturnType<typeof import("./reckon.js").prepared>} ready */
export function carrier(sum, formulas, ready) {
  const slopes = sum.results.map((r) => prepare({ call: r.name, of: sum.arguments.map((a) => ({ name: a.name })) }, formulas));
  /**
   * @param {Record<string, number>} values @param {Record<string, number>} widths U in SI of the arguments that have one @param {number[]} results
   * @returns {{results: (Carried | null)[], says: string[]}}
   */
  return function carry(values, widths, results) {
    const wide = sum.arguments.filter((a) => Object.hasOwn(widths, a.name)), says = /** @type {string[]} */ ([]);
    const told = (/** @type {string} */ one) => { if (!says.includes(one)) says.push(one); };
    const found = results.map((value, k) => {
      const ends = wide.map((a) => [1, -1].map((s) => ready.value(k, { ...values, [a.name]: values[a.name] + s * widths[a.name] })));
      wide.forEach((a, n) => { const fault = ends[n].find((v) => v instanceof Fault); if (fault instanceof Fault) told(endWords(a, fault, sum.results[k].name)); });
      const { of } = slopes[k].gradient(values);
      if (!(of instanceof Map)) { told(faultWords(/** @type {Fault} */ (of), sum.results[k].name)); return null; }
      const parts = contributions(of, new Map(wide.map((a) => [a.name, new Map([[a.name, widths[a.name] / K]])]))), u = standard(parts);
      if (u instanceof Fault || !Number.isFinite(K * u)) { told("The uncertainty is too large to tell."); return null; }
      const most = Math.max(BENT * K * u, 0.5 * 10 ** (1 - sum.results[k].digits) * Math.abs(value));
      wide.forEach((a, n) => { if (strays(ends[n], value, (of.get(a.name) ?? 0) * widths[a.name]) > most) told(`The result bends within the ± of ${called(a)}: its own ± is only roughly right.`); });
      const shares = wide.map((argument) => { const part = (parts.get(argument.name) ?? 0) / (u || 1); return { argument, percent: 100 * part * part }; });
      return { u: K * u, shares: shares.sort((a, b) => b.percent - a.percent) };
    });
    return { results: found, says };
  };
}

/** @param {Argument} argument @param {Fault} fault @param {string} name of the formula */
function endWords(argument, fault, name) {
  const what = fault.code === "out-of-range" ? "The range ends" : "There is no result everywhere";
  return `${what} within the ± of ${called(argument)}: ${faultWords(fault, name)}`;
}

/** How far the results at both ends of a ± lie off the straight line. @param {any[]} ends @param {number} value @param {number} slope */
function strays(ends, value, slope) {
  return Math.max(0, ...ends.map((v, n) => (typeof v === "number" ? Math.abs(v - (n ? value - slope : value + slope)) : 0)));
}

/** @param {number} percent */
export const percentWords = (percent) => `${percent === 0 ? "0" : percent < 0.1 ? "under 0.1" : percent < 9.95 ? percent.toFixed(1) : percent.toFixed(0)} %`;

/** Which value to measure better, in words; "" where nothing makes a result uncertain. @param {Carried} carried */
export function mostWords({ u, shares }) {
  const [first, second] = shares;
  if (!u || !first) return "";
  if (shares.length === 1) return `All of it comes from ${called(first.argument)}.`;
  const also = second.percent > first.percent / 2 ? `, then ${called(second.argument)} (${percentWords(second.percent)})` : "";
  return `${first.percent < 50 ? "The largest part" : "Most of it"} comes from ${called(first.argument)} (${percentWords(first.percent)})${also}.`;
}
