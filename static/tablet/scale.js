/** Thin callers of core/drawing: the limit scale of a reading, its small form, and the scale of a wait, as elements. */
import * as drawing from "../core/drawing.js";
import { drawn } from "./dom.js";
import { dated, minus, pretty, sentence } from "./words.js";

/** How wide a drawing may be here, in CSS px: text in it is drawn at its own size. */
const measured = () => (innerWidth <= 640 ? Math.max(260, innerWidth - 28) : innerWidth >= 1000 && innerHeight <= 1000 ? 540 : 572);
// Asking for the window's size may lay the page out, which no key should wait for.
let wide = 0;
const room = () => (wide ||= measured());
/** How many characters of a sentence stand in one line there for certain: letters are seldom wider than 11.5 px (phone 9.5). */
export const lineRoom = () => Math.floor(room() / (room() < 500 ? 9.5 : 11.5));
if (typeof addEventListener === "function") addEventListener("resize", () => { wide = 0; });

/** The name under a limit; one that only says "nameplate" would be taken for the nameplate value itself. @param {string} name @param {string} plain */
const named = (name, plain) => (name && name !== "nameplate" ? name : plain);

/** @typedef {{limits: any, plate?: string | null, found?: any, text?: string | null, unit: string, old?: {text: string, name: string} | null}} Spec */

/** @param {Spec} spec */
function model(spec) {
  const { limits, plate, found, text, unit, old } = spec;
  const { low, high, caution_low, caution_high, accept_low, accept_high, low_name, high_name } = limits;
  const beside = old ? ` ${sentence(old.name)} ${minus(old.text)} ${pretty(unit)}.` : "";
  return {
    unit: pretty(unit), low, high, caution_low, caution_high, accept_low, accept_high, low_name: named(low_name, "lower limit"), high_name: named(high_name, "upper limit"),
    plate: plate ?? null, plate_name: "nameplate", value: text ? text.replace(",", ".").replace("−", "-").replace(/^\+/, "") : null, u: found?.u ?? null, margin: found?.margin ?? null,
    // Before anyone reads: a channel that no reading can be judged in is dashed, as every thing that is not judged.
    verdict: found ? found.verdict ?? null : limits.coarse || limits.fault ? "not judged" : null,
    olds: old ? [{ value: old.text, name: old.name }] : [], says: found?.words ? dated(pretty(minus(found.words))) + beside : undefined,
  };
}

/** Whether there is anything to draw a reading on; limits that rounding to a coarse meter's steps has crossed are nothing. @param {Spec} spec @returns {boolean} */
function hasLimits({ limits }) {
  if (!limits || (limits.low == null && limits.high == null)) return false;
  return limits.low == null || limits.high == null || Number(limits.low) <= Number(limits.high);
}

/** The limit scale as text, for a place that is redrawn with every key. @param {Spec} spec @returns {string} "" where there is nothing to draw on */
export const scaleText = (spec) => (hasLimits(spec) ? drawing.scale({ ...model(spec), width: room() }) : "");

/** The same without figures, for a line of a list. @param {Spec} spec @returns {string} */
export const tinyText = (spec) => (hasLimits(spec) ? drawing.tiny({ ...model(spec), width: 130 }) : "");

/** @param {Spec} spec @returns {Element | null} null where there is nothing to draw a reading on */
export const limitScale = (spec) => (hasLimits(spec) ? drawn(scaleText(spec)) : null);

/** @param {Spec} spec @returns {Element | null} */
export const smallScale = (spec) => (hasLimits(spec) ? drawn(tinyText(spec)) : null);

/** @param {{elapsed: number, least: number}} spec seconds @returns {Element} */
export const timeScale = (spec) => drawn(drawing.wait({ elapsed: spec.elapsed.toFixed(3), least: spec.least.toFixed(3), width: innerWidth >= 1000 && innerHeight <= 1000 ? 400 : room() }));
