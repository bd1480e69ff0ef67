/**
 * Which instrument and which of its ranges a step is read with: what is proposed, what may be chosen instead.
 * Twin of fieldkit/run/ranges.py, which says what it means.
 * @module
 */

import * as judge from "./judge.js";
import * as names from "./names.js";
import * as readings from "./readings.js";
import * as rows from "./rows.js";
import { compare, dec } from "./values.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./names.js").Scope} Scope */
/** @typedef {{instrument?: string | null, range?: string | null} | null} Using */

/** The flat view of the range that a step is read with; null where it is read with no instrument of this run.
 * @param {Context} ctx @param {State} state @param {Scope} where @param {any} step @param {Using} [using] @returns {any} */
export function in_use(ctx, state, where, step, using = null) {
  const control = step ? step.control : {};
  const chosen = using ?? {};
  const one = readings.aboard(state, chosen.instrument) ?? readings.aboard(state, readings.meter_of(state, readings.asked_of(control)));
  if (one === null || !step || !["number", "prove"].includes(control.control)) return null;
  const named = chosen.range || "";
  const found = named ? readings.range_of(one, named) : null;
  return readings.flat(one, found ?? proposed(ctx, state, where, step, one));
}

/** The range of an instrument that a step is probably read on.
 * @param {Context} ctx @param {State} state @param {Scope} where @param {any} step @param {any} one @returns {any} */
export function proposed(ctx, state, where, step, one) {
  const { control } = step;
  const ranges = readings.usable(one, control.unit.symbol);
  if (ranges.length < 2) return ranges[0] ?? null;
  for (const row of [...state.log].reverse()) {
    // of two ranges with one name the later counts, here as in the twin
    const last = row.instrument === one.id ? ranges.findLast((found) => found.name === row.range) : undefined;
    if (last) return last;
  }
  const wanted = wanted_of(ctx, where, control);
  const ordered = readings.by_size(ranges);
  const holding = wanted.length ? ordered.filter((found) => wanted.every((text) => holds(found, text))) : [];
  return holding[0] ?? ordered[ordered.length - 1];
}

/** What a range should hold: the limits (of a proof all of them) and the plate, else what is typical.
 * @param {Context} ctx @param {Scope} where @param {any} control @returns {string[]} */
function wanted_of(ctx, where, control) {
  const bounds = (/** @type {any} */ limits, /** @type {any} */ typical) =>
    judge.bounds(limits ?? null, typical ?? null, control.unit, null, null, (tree) => names.value(ctx, where, tree)) ?? {};
  const known = (/** @type {any[]} */ texts) => texts.filter((text) => text !== null && text !== undefined);
  if (control.control === "prove") {
    const sides = readings.proof_fields(control).map(([, , limits]) => bounds(limits, null));
    return known(sides.flatMap((side) => [side.low, side.high]));
  }
  const found = bounds(control.limits, control.typical);
  const plate = control.plate ? rows.shown(names.value(ctx, where, control.plate), control.unit, null) : null;
  const wanted = known([found.low, found.high, plate]);
  return wanted.length ? wanted : known([found.typical_low, found.typical_high]);
}

/** The value lies on the range. @param {any} found @param {string} text */
function holds(found, text) {
  const { low, high } = readings.with_range({}, found);
  const value = dec(text);
  return (low === null || compare(value, dec(low)) >= 0) && (high === null || compare(value, dec(high)) <= 0);
}

/** Names to choose from: `instruments` (a proof has its tester alone) and `ranges` of the one in use.
 * @param {State} state @param {any} step @param {any} meter @returns {{instruments: string[], ranges: string[]}} */
export function offers(state, step, meter) {
  const control = step ? step.control : {};
  const asked = readings.asked_of(control);
  if (meter === null || !asked) return { instruments: [], ranges: [] };
  const unit = control.unit.symbol;
  const meant = readings.meter_of(state, asked);
  const others = control.control === "number" ? state.started.instruments : [];
  const like = others.filter((/** @type {any} */ one) => one.id !== meant && is_like(one, meter, unit));
  return {
    instruments: [...(meant === null ? [] : [meant]), ...like.map((/** @type {any} */ one) => one.id)],
    ranges: readings.usable(meter, unit).map((one) => one.name),
  };
}

/** An instrument that reads the same, in the same unit. @param {any} one @param {any} meter @param {string} unit */
function is_like(one, meter, unit) {
  return one.reads === meter.reads && one.ranges.some((/** @type {any} */ found) => found.unit === unit);
}

/** Why a meter is not taken where the step takes none that is overdue; "" where it is.
 * @param {any} asked @param {any} meter @param {string} day @returns {string} */
export function overdue(asked, meter, day) {
  if (!asked || meter === null || asked.overdue !== "refuse") return "";
  if (!meter.calibrated_to) return `No calibration of ${meter.id} is known, and this step takes no overdue meter. Use another one.`;
  if (!judge.overdue(meter, day)) return "";
  return `The calibration of ${meter.id} ran out on ${meter.calibrated_to}, and this step takes no overdue meter. Use another one.`;
}
