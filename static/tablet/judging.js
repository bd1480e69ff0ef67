/** The verdict on what is being typed, by the same judge that the record is made with; plus the meter it came from, in words. */
import { judge } from "../core/judge.js";
import { h, put } from "./dom.js";
import { reword } from "./redraw.js";
import { lineRoom } from "./scale.js";
import { dated, day, minus, pretty } from "./words.js";

/** "Meter DM-04, ±(0.3 % + 1 digit), calibrated to 30 Nov 2026", as parts; `instrument` is that of progress. @param {any} instrument @param {any} meter @param {string} today */
export function meterWords(instrument, meter, today) {
  if (!instrument) return null;
  const { percent, digits, percent_of_range } = instrument;
  const parts = [Number(percent) ? `${percent} %` : "", Number(percent_of_range) ? `${percent_of_range} % of range` : "", Number(digits) ? `${digits} digit${Number(digits) === 1 ? "" : "s"}` : ""];
  const accuracy = parts.filter(Boolean).join(" + ");
  const overdue = Boolean(instrument.calibrated_to && today && instrument.calibrated_to.slice(0, 10) < today.slice(0, 10));
  const calibrated = instrument.calibrated_to ? (overdue ? `calibration ran out on ${day(instrument.calibrated_to)}` : `calibrated to ${day(instrument.calibrated_to)}`) : "";
  return {
    kind: meter?.hand_at ? `Hand meter at the ${meter.hand_at}` : "Meter", id: instrument.id, overdue,
    accuracy: accuracy ? `±(${accuracy})` : "", calibrated,
  };
}

/**
 * @param {{text: string, unit: string, limits: any, resolution?: string | null, instrument: any, protects?: boolean, day?: string}} reading
 * @returns {any} what core/judge says: a verdict with its words, or {refused}
 */
export function judged(reading) {
  const resolution = reading.resolution ?? reading.limits?.resolution ?? reading.instrument?.resolution ?? null;
  return judge(reading.text, reading.unit, reading.limits ?? null, resolution, reading.instrument ?? null, reading.protects ?? false, (reading.day ?? "").slice(0, 10));
}

/** What the end of a line may waste, in characters, on a word that no longer fits there. */
const WORD = 5;

/** The judge's sentence with the value before the colon in bold; remarks on it are marked at the side. @param {HTMLElement} node @param {any} found */
export function showSentence(node, found) {
  const words = dated(pretty(minus(found?.words ?? found?.refused?.says ?? ""))), at = found?.words ? words.indexOf(": ") : -1;
  showWords(node, at > 0 ? words.slice(0, at + 1) : "", at > 0 ? words.slice(at + 1) : words, Boolean(found?.near || found?.untypical || found?.overdue || found?.reach));
}

/**
 * Words of which the first are bold. Elements stay from key to key, and so does the height that they need at most: the next
 * key lays out these words and nothing else, and moves no key under a finger. Without any words it starts anew.
 * @param {HTMLElement} node @param {string} bold @param {string} rest @param {boolean} [warned]
 */
export function showWords(node, bold, rest, warned = false) {
  if (!node.firstElementChild?.matches(".words")) put(node, h("span", { class: "words" }, h("b"), h("span")));
  const words = /** @type {HTMLElement} */ (node.firstElementChild), length = bold.length + rest.length;
  reword(/** @type {Node} */ (words.firstChild), bold);
  reword(/** @type {Node} */ (words.lastChild), rest);
  if (words.classList.contains("warned") !== warned) words.classList.toggle("warned", warned);
  const lines = String(Math.max(2, length ? Number(node.dataset.lines ?? 0) : 0, Math.ceil(length / (lineRoom() - WORD))));
  if (node.dataset.lines !== lines) node.dataset.lines = lines;
}
