/** The verdict on what is being typed, by the same judge that the record is made with; plus the meter it came from, in words. */
import { judge } from "../core/judge.js";
import { h, put } from "./dom.js";
import { day, minus, pretty } from "./words.js";

/** "Deck meter DM-04, ±(0.3 % + 1 digit), calibrated to 30 Nov 2026", as parts; `instrument` is that of progress. @param {any} instrument @param {any} meter @param {string} today */
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

/** The judge's sentence with the value before the colon in bold; remarks on it are marked at the side. @param {HTMLElement} node @param {any} found */
export function showSentence(node, found) {
  const words = pretty(minus(found?.words ?? found?.refused?.says ?? "")), at = found?.words ? words.indexOf(": ") : -1;
  node.classList.toggle("warned", Boolean(found?.near || found?.untypical || found?.overdue));
  put(node, at > 0 ? [h("b", {}, words.slice(0, at + 1)), words.slice(at + 1)] : words);
}
