/**
 * What a reading, a proof, a result or a wait is made of: instrument, resolution, limits, values.
 * Twin of fieldkit/run/readings.py.
 * @module
 */

import * as judge from "./judge.js";
import * as names from "./names.js";
import * as rows from "./rows.js";
import { Dec, Fault, add, dec, fixed, mul, round12, to_text, trim, typed } from "./values.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./names.js").Scope} Scope */

/** The instrument as the run's first event carries it. @param {State} state @param {string | null} name @returns {any} */
export function instrument(state, name) {
  if (!state.started || !name) return null;
  return state.started.instruments.find((/** @type {any} */ one) => one.id === name) ?? null;
}

/** The instrument that a step's meter means in this run. @param {State} state @param {any} meter @returns {string | null} */
export function meter_of(state, meter) {
  if (!meter) return null;
  if (meter.instrument) return meter.instrument;
  const meters = state.started ? state.started.meters : {};
  return Object.hasOwn(meters, meter.role) ? meters[meter.role] : null;
}

/** The step's own resolution, else the instrument's where it reads in the step's unit.
 * @param {any} control @param {any} meter @returns {string | null} */
export function resolution_of(control, meter) {
  if (control.resolution !== null) return control.resolution;
  return meter !== null && meter.unit === control.unit.symbol ? meter.resolution : null;
}

/** The limits of a number or result (or `limits`, of a point) as they are shown and applied now.
 * @param {Context} ctx @param {Scope} where @param {any} control @param {any} meter @param {any} [limits] */
export function bounds(ctx, where, control, meter, limits = null) {
  const own = limits === null ? control.limits : limits;
  const typical = limits === null ? control.typical ?? null : null;
  const resolution = resolution_of(control, meter);
  return judge.bounds(own, typical, control.unit, resolution, meter, (tree) => names.value(ctx, where, tree));
}

/** The exact SI value of a typed number, as decimal text. @param {string} text @param {any} unit */
export function si_text(text, unit) {
  const found = typed(text);
  if (!(found instanceof Dec)) throw new RangeError(text);
  return to_text(trim(add(mul(found, dec(unit.factor)), dec(unit.offset))));
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
