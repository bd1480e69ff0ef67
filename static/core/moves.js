/**
 * Taking a move: what it does to the working copy of a state. Twin of fieldkit/run/moves.py.
 * Only state.js and answers.js call what changes the copy.
 * @module
 */

import * as names from "./names.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./names.js").Scope} Scope */

export const END = "@end";
export const SAFE = "@safe";

/** List what does not agree with the sheet or the chain.
 * @param {State} state @param {number} seq @param {string} code @param {string} says */
export function disagree(state, seq, code, says) {
  state.disagree.push({ seq, code, says });
}

/** @param {State} state */
export function mark(state) {
  return { least: state.clock.least, greatest: state.clock.greatest };
}

/** The state of a source, or null. @param {State} state @param {string} name @returns {string | null} */
export function source_state(state, name) {
  return Object.hasOwn(state.sources, name) ? state.sources[name].state : null;
}

/** @param {State} state @param {string} name @param {string} to @param {number} seq @param {string} [flag] */
export function set_source(state, name, to, seq, flag = "") {
  if (source_state(state, name) === to) return;
  state.sources[name] = { state: to, ...mark(state), seq, flag };
}

/** Proved dead is locked again. @param {State} state @param {number} seq @param {string | null} [only] */
export function drop_proofs(state, seq, only = null) {
  for (const name of Object.keys(state.sources)) {
    if (state.sources[name].state === "proved" && (only === null || only === name)) set_source(state, name, "locked", seq);
  }
}

/** The run is stopped: make safe and end remain. @param {State} state @param {number} seq @param {string} why */
export function stop(state, seq, why) {
  if (state.stop === null) state.stop = { seq, why };
  if (["going", "confirm", "declare"].includes(state.phase)) {
    state.phase = "stopped";
    state.node = SAFE;
    state.pending = null;
  }
}

/** The moves that leave a step with an outcome; after a choice only those of the chosen value.
 * @param {Context} ctx @param {State} state @param {string} origin @param {string} outcome @returns {any[]} */
export function leads(ctx, state, origin, outcome) {
  const chosen = Object.hasOwn(state.choices, origin) ? state.choices[origin] : null;
  return (ctx.leaving[origin] ?? []).filter(
    (move) => move.on === outcome && (move.on !== "option" || move.choice === null || move.choice === chosen),
  );
}

/** A way round a step that cannot be done, taken without an answer. @param {any} move */
export function is_around(move) {
  if (move.manner !== "plain" || !["done", "pass"].includes(move.on) || !move.label || move.gate.length === 0) return false;
  const found = names.mentioned(move.gate);
  return move.gate[0].tree.call === "not" && !names.own(move.origin).some((name) => found.has(name));
}

/** Take a recorded move, listing what does not agree.
 * @param {Context} ctx @param {State} state @param {string} move_id @param {Scope} where @param {any} event @param {string} [reason] */
export function take(ctx, state, move_id, where, event, reason = "") {
  const { seq } = event;
  const move = ctx.moves[move_id];
  if (!move) {
    disagree(state, seq, "unknown-move", `The sheet has no move '${move_id}'.`);
    return;
  }
  const { pending } = state;
  const here = pending ? pending.step : state.node;
  if (move.origin !== here) disagree(state, seq, "wrong-move", `Move '${move_id}' does not leave the step '${here}'.`);
  check_outcome(ctx, state, move, pending, seq);
  const closed = names.reasons(ctx, where, move.gate);
  if (closed.length) disagree(state, seq, "not-open", `Move '${move_id}' was not open. ${closed[0].says}`);
  apply(ctx, state, move, event);
  on_row(state, pending ? pending.seq : seq, move, reason);
  state.pending = null;
  if (move.to === SAFE || move.manner === "stop") stop(state, seq, reason || "The procedure asks to make safe.");
  else state.node = move.to;
}

/** @param {Context} ctx @param {State} state @param {any} move @param {any} pending @param {number} seq */
function check_outcome(ctx, state, move, pending, seq) {
  if (!pending || move.manner === "stop" || leads(ctx, state, pending.step, pending.outcome).includes(move)) return;
  const corrected = state.log.some(
    (/** @type {any} */ row) => row.seq === pending.seq && row.old.some((/** @type {any} */ one) => one.seq > seq),
  );
  if (corrected && pending.outcome === "pass" && ["again", "deviation"].includes(move.manner)) return;
  disagree(state, seq, "outcome", `Move '${move.id}' does not follow the outcome '${pending.outcome}'.`);
}

/** @param {Context} ctx @param {State} state @param {any} move @param {any} event */
function apply(ctx, state, move, event) {
  const { effects, origin: step } = move;
  for (const [name, to] of Object.entries(effects.sets)) set_source(state, name, /** @type {string} */ (to), event.seq);
  const facts = new Set([...state.facts, ...effects.shows]);
  state.facts = [...facts].filter((fact) => !effects.clears.includes(fact)).sort();
  for (const one of effects.counts) state.counters[one.counter] = counted(ctx, state, one);
  for (const [place, way] of Object.entries(effects.hands)) hands(state, place, /** @type {string} */ (way), event.by);
  if (move.manner === "again") {
    for (const columns of [state.series, state.spread]) columns[step] = (Object.hasOwn(columns, step) ? columns[step] : []).slice(0, -1);
  }
  state.done[step] = {
    seq: event.seq,
    ...mark(state),
    wall: event.at.wall,
    count: (Object.hasOwn(state.done, step) ? state.done[step].count : 0) + 1,
    sets: Object.keys(effects.sets).sort(),
  };
}

/** What a counter is after a move counted on it, inside its bounds.
 * @param {Context} ctx @param {State} state @param {any} one @returns {number} */
export function counted(ctx, state, one) {
  const [low, high] = Object.hasOwn(ctx.sheet.counters, one.counter) ? ctx.sheet.counters[one.counter] : [0, null];
  let to = one.to !== null ? one.to : names.count(ctx, state, one.counter) + (one.by ?? 0);
  if (high !== null) to = Math.min(to, high);
  return Math.max(to, low);
}

/** @param {State} state @param {string} place @param {string} way @param {string} by */
function hands(state, place, way, by) {
  if (way === "out") delete state.hands[place];
  else if (!Object.hasOwn(state.hands, place) || state.hands[place].length === 0) state.hands[place] = [by];
}

/** @param {State} state @param {number} seq @param {any} move @param {string} reason */
function on_row(state, seq, move, reason) {
  for (let i = state.log.length - 1; i >= 0; i -= 1) {
    const row = state.log[i];
    if (row.seq === seq) {
      const extra = reason && !row.reason ? { reason } : {};
      state.log[i] = { ...row, move: move.id, manner: move.manner, ...extra };
      return;
    }
    if (row.seq < seq) return;
  }
}
