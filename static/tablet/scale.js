/** Thin callers of core/drawing: the limit scale of a reading, its small form, and the scale of a wait, as elements. */
import * as drawing from "../core/drawing.js";
import { drawn } from "./dom.js";
import { pretty } from "./words.js";

/** How wide a drawing may be here, in CSS px: text in it is drawn at its own size. */
const room = () => (innerWidth <= 640 ? Math.max(260, innerWidth - 28) : innerWidth >= 1000 && innerHeight <= 1000 ? 540 : 572);

/** The name under a limit; one that only says "nameplate" would be taken for the nameplate value itself. @param {string} name @param {string} plain */
const named = (name, plain) => (name && name !== "nameplate" ? name : plain);

/** @param {{limits: any, plate?: string | null, found?: any, text?: string | null, unit: string, old?: {text: string, name: string} | null}} spec */
function model(spec) {
  const { limits, plate, found, text, unit, old } = spec;
  const { low, high, caution_low, caution_high, accept_low, accept_high, low_name, high_name } = limits;
  return {
    unit: pretty(unit), low, high, caution_low, caution_high, accept_low, accept_high, low_name: named(low_name, "lower limit"), high_name: named(high_name, "upper limit"),
    plate: plate ?? null, plate_name: "nameplate", value: text ? text.replace(",", ".").replace("−", "-").replace(/^\+/, "") : null, u: found?.u ?? null, margin: found?.margin ?? null,
    verdict: found?.verdict ?? null, olds: old ? [{ value: old.text, name: old.name }] : [],
  };
}

/** @param {any} spec @returns {Element | null} null where there is nothing to draw a reading on */
export function limitScale(spec) {
  if (!spec.limits || (spec.limits.low == null && spec.limits.high == null)) return null;
  return drawn(drawing.scale({ ...model(spec), width: room() }));
}

/** @param {any} spec @returns {Element | null} */
export function smallScale(spec) {
  if (!spec.limits || (spec.limits.low == null && spec.limits.high == null)) return null;
  return drawn(drawing.tiny({ ...model(spec), width: 130 }));
}

/** @param {{elapsed: number, least: number}} spec seconds @returns {Element} */
export const timeScale = (spec) => drawn(drawing.wait({ elapsed: spec.elapsed.toFixed(3), least: spec.least.toFixed(3), width: innerWidth >= 1000 && innerHeight <= 1000 ? 400 : room() }));
