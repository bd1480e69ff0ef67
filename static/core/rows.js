/**
 * Rows of the log: one for every event, with the same keys whatever happened. Twin of fieldkit/run/rows.py.
 * @module
 */

import * as judge from "./judge.js";
import * as names from "./names.js";
import { dec, decimals, to_text } from "./values.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./names.js").Scope} Scope */

/** Append the row of an event; `said` fills the keys that differ from an empty row.
 * @param {Context} ctx @param {State} state @param {any} event @param {any} [step] @param {Record<string, any>} [said] */
export function add(ctx, state, event, step = null, said = {}) {
  const level = step && step.level ? level_text(ctx, names.scope(ctx, state), step) : "";
  /** @type {Record<string, any>} */
  const row = {
    seq: event.seq,
    wall: event.at.wall,
    by: event.by,
    kind: event.kind,
    step: step ? step.id : "",
    number: step ? step.number : "",
    title: step ? with_level(step.title, level) : "",
    level,
    text: "",
    unit: "",
    verdict: null,
    outcome: null,
    limits: null,
    margin: null,
    u: null,
    near: false,
    untypical: false,
    instrument: null,
    range: "",
    overdue: false,
    value: null,
    shown: "",
    words: "",
    points: [],
    elapsed: null,
    move: null,
    manner: null,
    reason: "",
    who: "",
    names: [],
    old: [],
    note: "",
  };
  for (const [key, value] of Object.entries(said)) if (value !== null && value !== undefined) row[key] = value;
  state.log.push(row);
}

/** The last row again, with more said about it; only where it is the row of `seq`.
 * @param {State} state @param {number} seq @param {Record<string, any>} said */
export function change(state, seq, said) {
  const last = state.log.length - 1;
  if (state.log[last].seq === seq) state.log[last] = { ...state.log[last], ...said };
}

/** The rung that a step is at: "26 kV"; empty where it has no value.
 * @param {Context} ctx @param {Scope} where @param {any} step @returns {string} */
export function level_text(ctx, where, step) {
  const si = names.value(ctx, where, step.level.value);
  return typeof si === "number" ? `${judge.to_shown(si, step.level.unit)} ${step.level.unit.symbol}`.trim() : "";
}

/** Text of the sheet in which `{level}` stands for the rung. @param {string} text @param {string} level */
export function with_level(text, level) {
  return text.replaceAll("{level}", () => level);
}

/** An SI value in the unit with the decimals of a resolution; null where it is no number.
 * @param {any} si @param {any} unit @param {string | null} resolution @returns {string | null} */
export function shown(si, unit, resolution) {
  if (typeof si !== "number") return null;
  const text = judge.to_shown(si, unit);
  return resolution === null ? text : to_text(dec(text), decimals(resolution));
}
