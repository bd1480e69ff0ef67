/**
 * What a command becomes: events, or a refusal in words. Twin of fieldkit/run/decide.py.
 *
 *   decide(sheet, state, command, now)  ->  {events: [{kind, body}, ...]} | {refused: {code, says}}
 * @module
 */

import * as answers from "./answers.js";
import * as clock from "./clock.js";
import { Given, Refused, checked } from "./command.js";
import * as judge from "./judge.js";
import * as moves from "./moves.js";
import * as names from "./names.js";
import * as progress from "./progress.js";
import * as readings from "./readings.js";
import * as rules from "./rules.js";
import * as start from "./start.js";
import { one as fold_one } from "./state.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {{events: {kind: string, body: any}[]} | {refused: {code: string, says: string}}} Decision */

const ALWAYS = ["remarked", "pictured", "storage-found", "clock-changed", "resumed", "voided"];
const SAFE = ["safe-begun", "safe-step-done", "safe-ended", "trip-recorded", "ended"];
/** What each phase lets through, and how it refuses the rest. @type {Record<string, [string[], string, string]>} */
export const PHASES = {
  new: [["run-started"], "not-started", "The run has not been started."],
  declare: [[...ALWAYS, ...SAFE, "states-declared"], "declare-first", "Confirm the energy states first."],
  going: [
    [...ALWAYS, ...SAFE, ...Object.keys(answers.CONTROLS), "went-on", "corrected", "paused", "person-changed"],
    "not-now",
    "This does not belong here while the work goes on.",
  ],
  confirm: [
    [...ALWAYS, ...SAFE, "states-confirmed", "corrected"],
    "confirm-first",
    "The work was interrupted. Confirm the energy states first.",
  ],
  stopped: [[...ALWAYS, ...SAFE, "corrected", "person-changed"], "run-stopped", "The run is stopped. Make safe and end it."],
  ended: [[...ALWAYS, "corrected", "reopened"], "run-ended", "The run has ended."],
  voided: [[], "run-voided", "The run was voided."],
};

/** Events for a command, or its refusal.
 * @param {any} sheet @param {State} state @param {Record<string, any>} command @param {clock.At} now @returns {Decision} */
export function decide(sheet, state, command, now) {
  const ctx = names.context(sheet);
  try {
    return { events: decided(ctx, state, command, now) };
  } catch (problem) {
    if (problem instanceof Refused) return { refused: { code: problem.code, says: problem.says } };
    throw problem;
  }
}

/** @param {Context} ctx @param {State} state @param {Record<string, any>} command @param {clock.At} now */
function decided(ctx, state, command, now) {
  const { do: kind, by, facts, ...asked } = command;
  if (typeof kind !== "string" || !Object.hasOwn(HANDLERS, kind)) {
    throw new Refused("unknown-command", "There is no such command.");
  }
  const [allowed, code, says] = PHASES[state.phase];
  if (!allowed.includes(kind)) throw new Refused(code, says);
  const given = new Given(ctx, state, kind, asked, now, by || state.recorder, facts || {});
  const body = checked(kind, HANDLERS[kind](given));
  holds(given, body);
  return [{ kind, body }];
}

/** The state after the event that the command would become. @param {Given} given @param {any} body @returns {State} */
export function trial(given, body) {
  const { ctx, state, kind, by, now } = given;
  return fold_one(ctx, state, {
    seq: state.seq + 1,
    kind,
    by,
    at: { wall: now.wall, mono: now.mono, boot: now.boot },
    run: state.run,
    chain: state.chain,
    prev: kind === "run-started" ? body.sheet : state.head,
    sha256: "",
    body,
  });
}

/** Last check: the fold finds nothing to list. @param {Given} given @param {any} body */
function holds(given, body) {
  if (given.kind === "corrected") return;
  for (const found of trial(given, body).disagree.slice(given.state.disagree.length)) {
    if (found.code !== "not-signed") throw new Refused(found.code, found.says);
  }
}

/** An answer to the open step, with its move where it takes one by itself. @param {Given} given */
function answer(given) {
  const { ctx, state, asked, kind } = given;
  const next_to = beside(given);
  if (next_to !== null) return next_to;
  const step = ctx.steps[state.node];
  if (!step) throw new Refused("no-step", "The last step is done. End the run and sign it.");
  if ("step" in asked && asked.step !== step.id) throw new Refused("not-here", `The open step is ${step.number}, ${step.title}.`);
  if (state.pending) throw new Refused("answered", "The step is answered. Choose how to go on.");
  if (step.control.control !== answers.CONTROLS[kind]) {
    throw new Refused("wrong-answer", `Step ${step.number} is not answered so.`);
  }
  const closed = progress.closed(ctx, state, names.scope(ctx, state, given.now));
  if (closed.length) throw new Refused("not-open", progress.told(closed));
  const body = { ...rules.ANSWERS[kind](given, step), step: step.id, move: null };
  return { ...body, move: move_of(given, checked(kind, body)) };
}

/** A picture or a remark that answers no step; null where it answers the open one. @param {Given} given */
function beside(given) {
  const { ctx, state, kind } = given;
  if (!["pictured", "remarked"].includes(kind)) return null;
  const step = ctx.steps[state.node];
  if (state.phase === "going" && step && !state.pending && step.control.control === answers.CONTROLS[kind]) return null;
  if (state.phase === "ended" && !progress.unsigned_end(state)) {
    throw new Refused("run-signed", "The run is signed. It can be added to when it was returned and taken up again.");
  }
  if (kind === "remarked") given.need("text", "nothing-typed", "Write the remark.");
  return { ...given.asked, step: given.asked.step || state.node, move: null };
}

/** The move that an answer takes by itself, or that the command picked among the open ones.
 * @param {Given} given @param {any} body @returns {string | null} */
function move_of(given, body) {
  const { ctx } = given;
  const after = trial(given, body);
  const { pending } = after;
  if (pending === null || pending.outcome === "fail") return null;
  const with_answer = answers.WITH_ANSWER.includes(pending.outcome);
  const where = with_answer ? names.scope(ctx, after) : names.scope(ctx, given.state, given.now);
  const leaving = moves.leads(ctx, after, pending.step, pending.outcome).filter((m) => m.manner === "plain" && !moves.is_around(m));
  const free = leaving.filter((m) => names.reasons(ctx, where, m.gate).length === 0);
  const picked = given.asked.move ?? null;
  if (picked !== null) {
    if (!free.some((m) => m.id === picked)) throw new Refused("not-open", "That way on is not open.");
    return picked;
  }
  return free.length === 1 ? free[0].id : null;
}

/** @param {Given} given */
function went_on(given) {
  const { ctx, state, asked } = given;
  const { pending } = state;
  const move = ctx.moves[String(asked.move)] ?? null;
  const here = pending ? pending.step : state.node;
  const leaving = pending ? moves.leads(ctx, state, here, pending.outcome) : ctx.leaving[here] ?? [];
  if (move === null || !leaving.includes(move)) throw new Refused("wrong-move", "That is no way on from here.");
  if (!pending && !moves.is_around(move)) throw new Refused("not-answered", "Answer the step first.");
  const closed = names.reasons(ctx, names.scope(ctx, state, given.now), move.gate);
  if (closed.length) {
    throw new Refused(move.manner === "again" ? "no-more-tries" : "not-open", progress.told(closed));
  }
  if (move.manner === "again") given.need("reason", "reason-needed", "Say why it is taken again.");
  if (move.manner === "deviation") rules.deviation(given);
  return { ...asked, step: here };
}

/** @param {Given} given */
function corrected(given) {
  const { state, asked } = given;
  if (state.phase === "ended" && !progress.unsigned_end(state)) {
    throw new Refused("run-signed", "The run is signed. It can be corrected when it was returned and taken up again.");
  }
  const row = state.log.find((/** @type {any} */ one) => one.seq === asked.seq);
  if (!row || !answers.CORRECTABLE.includes(row.kind)) {
    throw new Refused("nothing-corrected", "There is no text to correct in that row.");
  }
  const now = rules.row_text(row, String(asked.field));
  if (now === null) throw new Refused("no-such-field", "That row has no such text.");
  const text = given.need("text", "nothing-typed", "Write the right text.");
  given.need("reason", "reason-needed", "Say what was wrong.");
  if (text === now) throw new Refused("nothing-changed", "It says so already.");
  if (["read", "proved"].includes(row.kind)) rules.number(text, readings.instrument(state, row.instrument, row.range), row.unit);
  return { ...asked, text, move: corrected_move(given, row, text) };
}

/** The move of an answer that waited for the person's choice, and passes now that its text is corrected.
 * @param {Given} given @param {any} row @param {string} text @returns {string | null} */
function corrected_move(given, row, text) {
  const { ctx, state } = given;
  const { pending } = state;
  if (!pending || pending.seq !== row.seq || row.kind !== "read" || state.phase !== "going") return null;
  const step = ctx.steps[row.step];
  const { control } = step;
  const meter = readings.instrument(state, row.instrument, row.range);
  const resolution = readings.resolution_of(control, meter);
  const verdict = judge.judge(text, row.unit, row.limits, resolution, meter, control.protects);
  if (verdict.outcome !== "pass") return null;
  const si = readings.si_text(text, control.unit);
  const column = Object.hasOwn(state.series, step.id) ? state.series[step.id] : [];
  const after = {
    ...state,
    values: { ...state.values, [step.id]: { ...state.values[step.id], si } },
    series: { ...state.series, [step.id]: [...column.slice(0, -1), si] },
  };
  const where = names.scope(ctx, after, given.now);
  const leaving = moves.leads(ctx, after, step.id, "pass").filter((m) => m.manner === "plain" && !moves.is_around(m));
  const free = leaving.filter((m) => names.reasons(ctx, where, m.gate).length === 0);
  return free.length === 1 ? free[0].id : null;
}

/** What each clock says has passed since the last event. @param {Given} given @returns {[string, string | null]} */
function gap(given) {
  const then = given.state.clock;
  const { now } = given;
  const [a, b] = [clock.wall_ms(then ? then.wall : null), clock.wall_ms(now.wall)];
  const wall = a !== null && b !== null ? clock.seconds(b - a) : "0.000";
  if (!then || then.boot !== now.boot) return [wall, null];
  const [c, d] = [clock.mono_ms(then.mono), clock.mono_ms(now.mono)];
  return [wall, c !== null && d !== null ? clock.seconds(d - c) : null];
}

/** @param {Given} given */
function ended(given) {
  const { ctx, state } = given;
  const outcome = given.asked.outcome ?? "done";
  if (outcome === "done") {
    if (state.phase !== "going" || state.node !== moves.END) {
      throw new Refused("not-at-end", "Steps are left. End the run as stopped, with a reason, or go on.");
    }
    rules.end_states(ctx, state);
  } else given.need("reason", "reason-needed", "Say why the run stops here.");
  const states = Object.fromEntries(Object.entries(state.sources).map(([name, source]) => [name, source.state]));
  return { outcome, reason: given.text("reason"), states, locks: state.locks, earths: state.earths };
}

/** @param {Given} given */
const as_asked = (given) => given.asked;

/** @type {Record<string, (given: Given) => any>} */
const HANDLERS = {
  "run-started": start.started,
  "states-declared": start.declared,
  ...Object.fromEntries(Object.keys(answers.CONTROLS).map((kind) => [kind, answer])),
  "went-on": went_on,
  corrected,
  "safe-begun": as_asked,
  "safe-step-done": (given) => {
    if (!given.ctx.sheet.make_safe.some((/** @type {any} */ one) => one.id === given.asked.item)) {
      throw new Refused("unknown-item", "The make-safe list has no such line.");
    }
    return given.asked;
  },
  "safe-ended": as_asked,
  "trip-recorded": (given) => {
    given.need("indicator", "nothing-typed", "Say which indicator showed it.");
    given.need("done", "nothing-typed", "Say what was done.");
    return { kind: "trip", ...given.asked };
  },
  paused: as_asked,
  resumed: (given) => {
    const [wall, mono] = gap(given);
    return { wall_s: wall, mono_s: mono, ...given.asked };
  },
  "states-confirmed": start.confirmed,
  "clock-changed": (given) => {
    const [wall, mono] = gap(given);
    return { wall_s: wall, mono_s: mono || "0.000", ...given.asked };
  },
  "person-changed": (given) => {
    const to = given.text("to");
    rules.records(given.state, to);
    if (to === given.state.recorder) throw new Refused("same-person", "This person records already.");
    return given.asked;
  },
  "storage-found": as_asked,
  ended,
  voided: (given) => {
    given.need("reason", "reason-needed", "Say why the run is void.");
    return given.asked;
  },
  reopened: (given) => {
    given.need("reason", "reason-needed", "Say what the supervisor asked for.");
    given.need("returned_by", "nothing-typed", "Name who returned it.");
    if (given.state.reopened !== null) throw new Refused("reopened", "It was taken up already.");
    return given.asked;
  },
};
