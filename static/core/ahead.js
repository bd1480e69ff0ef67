/**
 * What probably comes: the steps ahead, the waits that count now, the next change of a source.
 * Twin of fieldkit/run/ahead.py.
 * @module
 */

import * as moves from "./moves.js";
import * as names from "./names.js";
import * as readings from "./readings.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./names.js").Scope} Scope */
/** @typedef {[string, any][]} Path */

/** The moves that an answer of the step is for: not those that a fail offers, and no way round.
 * @param {Context} ctx @param {string} node */
export function forward(ctx, node) {
  return (ctx.leaving[node] ?? []).filter((m) => m.on !== "fail" && m.manner === "plain" && !moves.is_around(m));
}

/** The steps that probably come, the open one first, each with the move that probably leaves it.
 * @param {Context} ctx @param {State} state @param {Scope} where @returns {Path} */
export function ahead(ctx, state, where) {
  /** @type {Path} */
  const path = [];
  const seen = new Set();
  let { node } = state;
  while (node in ctx.steps && !seen.has(node)) {
    seen.add(node);
    const pending = state.pending && state.pending.step === node ? state.pending : null;
    const leaving = pending ? moves.leads(ctx, state, node, pending.outcome) : forward(ctx, node);
    const plain = leaving.filter((m) => m.manner === "plain" && !seen.has(m.to) && m.to !== moves.SAFE);
    const likely = plain.filter((m) => !m.gate.some((/** @type {any} */ c) => decided_against(ctx, state, where, c)));
    // an answer that is given opens some ways and shuts the others
    const open_now = plain.filter((m) => pending && !names.reasons(ctx, where, m.gate).length);
    const move = open_now[0] ?? likely[0] ?? plain[0] ?? null;
    path.push([node, move]);
    // what a fail leaves closed is no round: nothing is foreseen past it
    if (move === null ? pending : move.to === moves.END) break;
    node = move ? move.to : out_of_the_round(ctx, path, seen);
  }
  return path;
}

/** Where the way goes on after the last rung: every step that could follow was passed, so a ladder comes round. It is left by
 * the last way that the sheet did not label, as a label offers something else than going on. "" without one.
 * @param {Context} ctx @param {Path} path @param {Set<string>} seen */
function out_of_the_round(ctx, path, seen) {
  for (const [step_id] of [...path].reverse()) {
    const way = forward(ctx, step_id).find((m) => !m.label && m.to in ctx.steps && !seen.has(m.to));
    if (way) return way.to;
  }
  return "";
}

/** The condition speaks only of answered choices and of givens, and does not hold: it never will in this run.
 * @param {Context} ctx @param {State} state @param {Scope} where @param {any} condition */
function decided_against(ctx, state, where, condition) {
  const found = [...names.mentioned(condition.tree)];
  const given = (/** @type {string} */ name) => ctx.sheet.givens.some((/** @type {any} */ one) => one.name === name);
  const chosen = (/** @type {string} */ name) => name.startsWith("choice:") && Object.hasOwn(state.choices, name.slice(7));
  const known = found.every((name) => given(name) || chosen(name));
  return found.length > 0 && known && names.value(ctx, where, condition.tree) !== true;
}

/** Waits that count now and gate the open step or one that comes.
 * @param {Context} ctx @param {Scope} where @param {State} state @param {Path} path */
export function waits(ctx, where, state, path) {
  const found = [];
  const known = new Set();
  for (const [step_id, move] of path) {
    const step = ctx.steps[step_id];
    const { control } = step;
    const own = step.control.control === "wait";
    const asked = own ? [{ clock: control.clock, least: control.least, says: step.title }] : [];
    if (move) asked.push(...move.gate.filter((/** @type {any} */ c) => c.clock && c.least));
    const untimed = move ? move.gate.filter((/** @type {any} */ c) => !c.clock) : [];
    if (step_id !== state.node && names.reasons(ctx, where, untimed, step_id).length) continue;
    for (const one of asked) {
      const elapsed = readings.waited(ctx, where, one);
      if (elapsed === null || (elapsed.left <= 0 && !(own && step_id === state.node))) continue;
      const key = `${one.clock} ${elapsed.texts.needed}`;
      if (known.has(key)) continue;
      known.add(key);
      const cut = one.clock.indexOf(":");
      const [head, rest] = [one.clock.slice(0, cut), one.clock.slice(cut + 1)];
      found.push({
        step: step_id,
        number: step.number,
        source: head === "age" ? rest : null,
        since: head === "since" ? rest : null,
        says: one.says,
        left: elapsed.left,
        least: elapsed.texts.needed,
        elapsed: elapsed.texts.least,
        greatest: elapsed.texts.greatest,
      });
    }
  }
  return found;
}

/** The next step that probably changes a source, and what it changes.
 * @param {State} state @param {Context} ctx @param {Path} path */
export function next_change(state, ctx, path) {
  for (const [step_id, move] of path) {
    const sets = Object.entries(move ? move.effects.sets : {});
    const changed = sets.filter(([name, to]) => moves.source_state(state, name) !== to);
    if (changed.length) return { sources: Object.fromEntries(changed), step: step_id, number: ctx.steps[step_id].number };
  }
  return null;
}
