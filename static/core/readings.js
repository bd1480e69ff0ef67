/**
 * What a reading, a proof, a result or a wait is made of: instrument and range, resolution, limits, values.
 * Twin of fieldkit/run/readings.py.
 * @module
 */

import * as clock from "./clock.js";
import * as judge from "./judge.js";
import * as names from "./names.js";
import * as rows from "./rows.js";
import { Dec, Fault, add, compare, dec, fixed, mul, number, round12, to_text, trim, typed } from "./values.js";
import * as worth from "./worth.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./names.js").Scope} Scope */

/** What a flat view has of its range, beside the range's name. */
export const RANGE = Object.freeze(["unit", "low", "high", "resolution", "percent", "digits", "percent_of_range"]);

/** The instrument as the run's first event carries it, with all its ranges.
 * @param {State} state @param {string | null | undefined} name @returns {any} */
export function aboard(state, name) {
  if (!state.started || !name) return null;
  return state.started.instruments.find((/** @type {any} */ one) => one.id === name) ?? null;
}

/** The flat view of one range of an instrument of this run; null where the run carries no such instrument.
 * @param {State} state @param {string | null} name @param {string} [range] @returns {any} */
export function instrument(state, name, range = "") {
  const one = aboard(state, name);
  return one === null ? null : flat(one, range_of(one, range));
}

/** The range of that name; "" is the only one of an instrument that has one. @param {any} one @param {string} name @returns {any} */
export function range_of(one, name) {
  if (name === "" && one.ranges.length === 1) return one.ranges[0];
  return one.ranges.find((/** @type {any} */ found) => found.name === name) ?? null;
}

/** An instrument with the figures of one of its ranges, as judge.js wants it. @param {any} one @param {any} found @returns {any} */
export function flat(one, found) {
  const { id, reads, certificate, calibrated_on, interval_months, temperature, ranges } = one;
  const calibrated_to = one.calibrated_to || clock.months_later(calibrated_on, interval_months);
  return with_range({ id, reads, certificate, calibrated_on, interval_months, temperature, calibrated_to, ranges }, found);
}

/** The same instrument on another range. A text that is no number says nothing. @param {any} meter @param {any} found @returns {any} */
export function with_range(meter, found) {
  if (found === null) return { ...meter, range: null, ...Object.fromEntries(RANGE.map((key) => [key, null])) };
  const figures = RANGE.slice(1).map((key) => [key, figure(found[key], key === "low" || key === "high")]);
  return { ...meter, range: found.name, unit: found.unit, ...Object.fromEntries(figures) };
}

/** @param {string | null} text @param {boolean} [signed] */
function figure(text, signed = true) {
  const found = text === null ? null : number(text);
  return typeof found === "number" && (signed || found >= 0) ? text : null;
}

/** The ranges that read in a unit; all of them where none does. @param {any} one @param {string} unit @returns {any[]} */
export function usable(one, unit) {
  const found = one.ranges.filter((/** @type {any} */ range) => range.unit === unit);
  return found.length ? found : [...one.ranges];
}

/** The instrument that a step's meter means in this run. @param {State} state @param {any} meter @returns {string | null} */
export function meter_of(state, meter) {
  if (!meter) return null;
  if (meter.instrument) return meter.instrument;
  const meters = state.started ? state.started.meters : {};
  return Object.hasOwn(meters, meter.role) ? meters[meter.role] : null;
}

/** The meter that a step asks for: a reading's, or the tester of a proof. @param {any} control @returns {any} */
export function asked_of(control) {
  return control.meter ?? control.tester ?? null;
}

/** The step's own resolution, else that of the range in use where it reads in the step's unit.
 * @param {any} control @param {any} meter @returns {string | null} */
export function resolution_of(control, meter) {
  if (control.resolution !== null) return control.resolution;
  return meter !== null && meter.unit === control.unit.symbol ? meter.resolution : null;
}

/** The limits of a number or result (or `limits`, of a point) as they are shown and applied now.
 * @param {Context} ctx @param {Scope} where @param {any} control @param {any} meter @param {any} [limits] */
export function bounds(ctx, where, control, meter, limits = null) {
  const found = bounds_on(ctx, where, control, meter, limits);
  if (found === null || meter === null || !meter.range || !(found.coarse || found.reach)) return found;
  const use = `: use ${instead(ctx, where, control, meter, limits)}`;
  return { ...found, coarse: found.coarse && found.coarse + use, reach: found.reach && found.reach + use };
}

/** @param {Context} ctx @param {Scope} where @param {any} control @param {any} meter @param {any} limits */
function bounds_on(ctx, where, control, meter, limits) {
  const own = limits === null ? control.limits : limits;
  const typical = limits === null ? control.typical ?? null : null;
  const resolution = resolution_of(control, meter);
  return judge.bounds(own, typical, control.unit, resolution, meter, (tree) => names.value(ctx, where, tree));
}

/** The smallest range of the same instrument that the limits can be judged on.
 * @param {Context} ctx @param {Scope} where @param {any} control @param {any} meter @param {any} limits */
function instead(ctx, where, control, meter, limits) {
  const own = meter.ranges.filter((/** @type {any} */ found) => found.unit === control.unit.symbol);
  for (const other of by_size(own)) {
    const judged = bounds_on(ctx, where, control, with_range(meter, other), limits);
    if (judged !== null && !judged.coarse && !judged.reach) return `the ${other.name} range`;
  }
  return "another meter";
}

/** Ranges from the smallest full scale to the largest; one without an upper end is the largest.
 * @param {any[]} ranges @returns {any[]} */
export function by_size(ranges) {
  /** @type {[Dec | null, any][]} */
  const ordered = [];
  for (const found of ranges) {
    const size = figure(found.high) === null ? null : worth.full_scale(with_range({}, found));
    let place = ordered.length;
    while (place && smaller(size, ordered[place - 1][0])) place -= 1;
    ordered.splice(place, 0, [size, found]);
  }
  return ordered.map(([, found]) => found);
}

/** @param {Dec | null} a @param {Dec | null} b */
function smaller(a, b) {
  return a !== null && (b === null || compare(a, b) < 0);
}

/** A typed number as plain decimal text, with its decimals. @param {string} text @returns {string} */
export function plain(text) {
  const found = typed(text);
  if (!(found instanceof Dec)) throw new RangeError(text);
  return to_text(found);
}

/** The exact SI value of a typed number, as decimal text. @param {string} text @param {any} unit */
export function si_text(text, unit) {
  return to_text(trim(add(mul(dec(plain(text)), dec(unit.factor)), dec(unit.offset))));
}

/** A result now: its SI value (12 digits), its text in the unit, the sentence of a fault (then both are empty).
 * @param {Context} ctx @param {Scope} where @param {any} control @returns {[string, string, string]} */
export function result_text(ctx, where, control) {
  const si = names.value(ctx, where, control.value);
  if (si instanceof Fault) return ["", "", si.says];
  const text = rows.shown(si, control.unit, control.resolution);
  return text === null ? ["", "", "It is no number."] : [round12(si), text, ""];
}

/** What a proof asks for, in order: field of the event, title, limits.
 * @param {any} control @returns {[string, string, any][]} */
export function proof_fields(control) {
  return [
    ["before", control.known_source, control.known],
    ...control.points.map((/** @type {any} */ p) => [`points.${p.name}`, p.title, p.limits]),
    ["after", control.known_source, control.known],
  ];
}

/** What a wait has counted: texts of least, greatest and needed seconds, and `left`; null before it has begun.
 * @param {Context} ctx @param {Scope} where @param {{clock: string, least: any}} control */
export function waited(ctx, where, control) {
  const least = where.names[control.clock];
  const cut = control.clock.indexOf(":");
  const [head, rest] = cut < 0 ? [control.clock, ""] : [control.clock.slice(0, cut), control.clock.slice(cut + 1)];
  const name = `${head === "age" ? "oldest" : "oldest-since"}:${rest}`;
  const greatest = name in where.names ? where.names[name] : least;
  const needed = names.value(ctx, where, control.least);
  if (typeof least !== "number" || typeof needed !== "number" || typeof greatest !== "number") return null;
  const texts = { least: fixed(least, 3), greatest: fixed(greatest, 3), needed: fixed(needed, 3) };
  return { texts, left: Math.max(0, needed - least) };
}
