/**
 * What the uncertainty of a reading or a result is made of, kept with its value in the state.
 * Twin of fieldkit/run/results.py, which says what parts and sources are.
 * @module
 */

import * as judge from "./judge.js";
import * as names from "./names.js";
import * as rows from "./rows.js";
import * as spread from "./spread.js";
import { Fault, dec, round12, to_float } from "./values.js";
import * as worth from "./worth.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./names.js").Scope} Scope */
/** @typedef {[string, string][]} Parts */

/** Parts are kept to 12 digits: where they cancel, what is left below this share of them is nothing. */
const LEAST = 1e-11;

/** The part of a reading, plain decimal text in the step's unit. A count without a meter is exact.
 * @param {any} control @param {any} meter @param {string} text @param {number} seq @returns {Parts | null} */
export function of_reading(control, meter, text, seq) {
  const { unit } = control;
  if (meter === null && unit.symbol === "") return [];
  const u = worth.standard(text, meter, unit);
  if (u === null || meter === null) return null;
  const source = control.meter && control.meter.correlated ? `${meter.id}/${meter.range}` : String(seq);
  return dec(u).digits === 0n ? [] : [[source, u]];
}

/** The parts of a result now; null where one that counts is not known, or the value changes without bound.
 * @param {Context} ctx @param {State} state @param {Scope} where @param {any} control @returns {Parts | null} */
export function of_result(ctx, state, where, control) {
  if (!control.spread) return null;
  const slopes = names.gradient(ctx, where, control.value);
  if (slopes instanceof Fault) return null;
  const known = new Map();
  for (const [name, slope] of slopes) {
    const parts = parts_of(state, name);
    if (parts === null && slope !== 0) return null;
    known.set(name, numbers(parts ?? []));
  }
  const found = spread.contributions(slopes, known);
  if (spread.standard(found) instanceof Fault) return null;
  const sizes = spread.contributions(sizes_of(slopes), new Map([...known].map(([name, parts]) => [name, sizes_of(parts)])));
  const counting = [...found].filter(([source, part]) => Math.abs(part) > LEAST * (sizes.get(source) ?? 0));
  return counting.map(([source, part]) => [source, round12(part)]);
}

/** @param {Map<string, number>} of @returns {Map<string, number>} */
function sizes_of(of) {
  return new Map([...of].map(([name, number]) => [name, Math.abs(number)]));
}

/** The parts of what a name means; "ion[3]" is the fourth reading of a column. @param {State} state @param {string} name @returns {Parts | null} */
function parts_of(state, name) {
  const cut = name.indexOf("[");
  if (cut >= 0) {
    const column = name.slice(0, cut);
    const kept = Object.hasOwn(state.spread, column) ? state.spread[column] : null;
    if (kept === null) return Object.hasOwn(state.series, column) ? null : [];
    return kept[Number(name.slice(cut + 1, -1))];
  }
  return Object.hasOwn(state.values, name) ? state.values[name].parts : [];
}

/** @param {Parts} parts @returns {import("./spread.js").Contributions} */
function numbers(parts) {
  return new Map(parts.map(([source, part]) => [source, to_float(dec(part))]));
}

/** What stands for the meter of a result: its own U (k = 2) in its unit; null where the sheet knows of none.
 * @param {any} control @param {Parts | null} parts @returns {any} */
export function meter(control, parts) {
  if (!control.spread) return null;
  const u = parts === null ? null : spread.standard(numbers(parts));
  const known = typeof u === "number" && Number.isFinite(2 * u);
  const text = known ? judge.to_shown(2 * u, { symbol: "", factor: control.unit.factor, offset: "0" }) : null;
  return { id: "", unit: control.unit.symbol, calibrated_to: null, u: text };
}

/** A result with its U, without the unit: "41.54 ± 0.83"; "" where it has no value, or no U.
 * @param {Context} ctx @param {Scope} where @param {any} control @param {any} own @returns {string} */
export function shown(ctx, where, control, own) {
  if (own === null || own.u === null || dec(own.u).digits === 0n) return "";
  const text = rows.shown(names.value(ctx, where, control.value), control.unit, null);
  return text === null ? "" : worth.shown(text, own.u, control.resolution);
}
