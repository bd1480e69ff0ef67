/**
 * What may be done now, and why not what may not. Twin of fieldkit/run/progress.py; DEVELOPERS.md spells the answer.
 * @module
 */

import * as ahead from "./ahead.js";
import * as clock from "./clock.js";
import * as judge from "./judge.js";
import * as moves from "./moves.js";
import * as names from "./names.js";
import * as ranges from "./ranges.js";
import * as readings from "./readings.js";
import * as results from "./results.js";
import * as rows from "./rows.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./names.js").Scope} Scope */
/** @typedef {import("./names.js").Reason} Reason */

/** @type {Record<string, string>} */
export const LABELS = { plain: "Go on", again: "Take it again", deviation: "Accept as a deviation", stop: "Stop and make safe" };

/** Where the run stands at the moment `now`; `using` asks for another instrument or range than is proposed.
 * @param {any} sheet @param {State} state @param {clock.At} now @param {ranges.Using} [using] */
export function progress(sheet, state, now, using = null) {
  const ctx = names.context(sheet);
  const where = names.scope(ctx, state, now);
  const step = ctx.steps[state.node] ?? null;
  const reasons = closed(ctx, state, where);
  const ways = offered(ctx, state, where);
  const path = ahead.ahead(ctx, state, where);
  const meter = ranges.in_use(ctx, state, where, step, using);
  const own = is(step, "result") ? results.meter(step.control, results.of_result(ctx, state, where, step.control)) : null;
  const limits = is(step, "number", "result") ? readings.bounds(ctx, where, step.control, meter ?? own) : null;
  const asked = points(ctx, where, step, meter);
  return {
    node: state.node,
    step,
    open: reasons.length === 0,
    reasons,
    moves: ways,
    next: next(ways),
    limits,
    points: asked,
    instrument: meter,
    ...ranges.offers(state, step, meter),
    plate: plate(ctx, where, step, meter),
    value: is(step, "result") ? readings.result_text(ctx, where, step.control)[1] || null : null,
    spread: own,
    shown: step ? results.shown(ctx, where, step.control, own) : "",
    level: step && step.level ? rows.level_text(ctx, where, step) : "",
    judgeable: judgeable(ctx, where, step, meter, [limits, ...asked.map((one) => one.limits)], now),
    waits: ahead.waits(ctx, where, state, path),
    live: Object.keys(state.sources).filter((name) => names.LIVE.includes(names.stands(ctx, state, name))),
    next_change: ahead.next_change(state, ctx, path),
    may: may(state, reasons.length === 0, ways),
    path: path.slice(1).map(([step_id]) => step_id),
  };
}

/** Why the step where the run stands may not be answered now; empty where it may.
 * @param {Context} ctx @param {State} state @param {Scope} where @returns {Reason[]} */
export function closed(ctx, state, where) {
  const { phase, node } = state;
  if (phase !== "going") return [{ says: PHASES[phase], left: null }];
  const step = ctx.steps[node];
  if (!step) return [{ says: "The last step is done. End the run and sign it.", left: null }];
  if (state.pending) return [{ says: "It is answered. Choose how to go on.", left: null }];
  const gates = ahead.forward(ctx, node).map((move) => names.reasons(ctx, where, move.gate, node));
  const shut = gates.length > 0 && gates.every((gate) => gate.length);
  const found = shut ? gates.reduce((a, b) => (b.length < a.length ? b : a)) : [];
  const timed = found.some((one) => one.left !== null);
  return timed ? found : [...wait_reasons(ctx, where, step), ...found];
}

/** Reasons as one text, with the time that is left. @param {Reason[]} reasons */
export function told(reasons) {
  return reasons
    .map(({ says, left }) => (left ? `${says.replace(/\.$/, "")}; ${clock.spoken(clock.ceil_ms(left))} left.` : says))
    .join(" ");
}

/** @type {Record<string, string>} */
const PHASES = {
  new: "The run has not been started.",
  declare: "Confirm the energy states first.",
  confirm: "The work was interrupted. Confirm the energy states first.",
  stopped: "The run is stopped. Make safe and end it.",
  ended: "The run has ended.",
  voided: "The run was voided.",
};

/** @param {Context} ctx @param {Scope} where @param {any} step @returns {Reason[]} */
function wait_reasons(ctx, where, step) {
  if (step.control.control !== "wait") return [];
  const elapsed = readings.waited(ctx, where, step.control);
  if (elapsed === null) return [{ says: "The time has not begun to count.", left: null }];
  if (elapsed.left > 0) return [{ says: "The time is not over.", left: elapsed.left }];
  return [];
}

/** Every move that leaves the step, with what keeps it closed: after an answer only those of its outcome.
 * @param {Context} ctx @param {State} state @param {Scope} where */
export function offered(ctx, state, where) {
  if (state.phase !== "going") return [];
  const { pending, node } = state;
  const leaving = pending ? moves.leads(ctx, state, node, pending.outcome) : ctx.leaving[node] ?? [];
  return leaving.map((move) => {
    const reasons = names.reasons(ctx, where, move.gate, pending ? null : node);
    const around = moves.is_around(move);
    return {
      move: move.id,
      to: move.to,
      on: move.on,
      choice: move.choice,
      manner: move.manner,
      label: label(ctx, state, move),
      button: around || pending !== null,
      open: reasons.length === 0,
      reasons,
      around,
      tries: tries(ctx, state, move),
    };
  });
}

/** The words on a move's button; `{level}` is the rung that it leads to.
 * @param {Context} ctx @param {State} state @param {any} move @returns {string} */
export function label(ctx, state, move) {
  const text = move.label || LABELS[move.manner];
  const to = ctx.steps[move.to];
  if (!text.includes("{level}") || !to || to.level === null) return text;
  const after = { ...state, counters: { ...state.counters } };
  for (const count of move.effects.counts) after.counters[count.counter] = moves.counted(ctx, after, count);
  return rows.with_level(text, rows.level_text(ctx, names.scope(ctx, after), to));
}

/** How often a capped retake was taken and still may be; null where nothing caps it.
 * @param {Context} ctx @param {State} state @param {any} move @returns {{used: number, left: number} | null} */
export function tries(ctx, state, move) {
  for (const count of move.effects.counts) {
    const bound = Object.hasOwn(ctx.sheet.counters, count.counter) ? ctx.sheet.counters[count.counter] : null;
    if (count.by === 1 && bound !== null && move.manner === "again") {
      const used = names.count(ctx, state, count.counter) - bound[0];
      return { used, left: Math.max(0, bound[1] - bound[0] - used) };
    }
  }
  return null;
}

/** @param {any[]} ways @returns {string | null} */
function next(ways) {
  const plain = ways.filter((way) => way.manner === "plain" && way.on !== "fail" && way.open && !way.around);
  return plain.length === 1 ? plain[0].to : null;
}

/** @param {any} step @param {...string} controls */
function is(step, ...controls) {
  return step !== null && controls.includes(step.control.control);
}

/** What a proof asks for, in order, each with its limits.
 * @param {Context} ctx @param {Scope} where @param {any} step @param {any} meter */
function points(ctx, where, step, meter) {
  if (!is(step, "prove")) return [];
  return readings.proof_fields(step.control).map(([field, title, own]) => ({
    field,
    title,
    limits: readings.bounds(ctx, where, step.control, meter, own),
  }));
}

/** @param {Context} ctx @param {Scope} where @param {any} step @param {any} meter @returns {string | null} */
function plate(ctx, where, step, meter) {
  const control = step ? step.control : {};
  if (!control.plate) return null;
  return rows.shown(names.value(ctx, where, control.plate), control.unit, readings.resolution_of(control, meter));
}

/** Whether a reading could be judged now, and what keeps it from being so; known before anyone takes it.
 * @param {Context} ctx @param {Scope} where @param {any} step @param {any} meter @param {any[]} limits @param {clock.At} now */
function judgeable(ctx, where, step, meter, limits, now) {
  if (!is(step, "number", "prove", "result")) return { ok: true, why: "", overdue: false, refused: false, says: [] };
  const asked = readings.asked_of(step.control);
  const out_of_date = judge.overdue(meter, now.wall);
  const refused = ranges.overdue(asked, meter, now.wall);
  const says = refused ? [refused] : [];
  if (out_of_date && !refused) says.push(`The calibration of ${meter.id} ran out on ${meter.calibrated_to}. The record will say so.`);
  let why = "";
  if (asked && meter === null) why = `This run carries no instrument for ${asked.role || asked.instrument}.`;
  else if (is(step, "result")) why = readings.result_text(ctx, where, step.control)[2];
  const known = limits.filter((one) => one);
  const found = known.map((one) => one.fault || one.coarse).find((said) => said) ?? "";
  const short = known.map((one) => one.reach).find((said) => said) ?? "";
  if (why) says.push(why);
  else if (found) says.push(`${is(step, "result") ? "The result" : "A reading"} cannot be judged: ${found.replace(/\.$/, "")}.`);
  else if (short) says.push(`No reading on this range can pass: ${short}.`);
  why ||= found || short || refused;
  return { ok: !why, why, overdue: out_of_date, refused: Boolean(refused), says };
}

/** @type {Record<string, string[]>} */
const MAY = {
  new: [],
  declare: ["make-safe", "declare", "trip", "remark", "picture", "end", "void"],
  going: ["make-safe", "correct", "trip", "pause", "remark", "picture", "change-person", "end", "void"],
  confirm: ["make-safe", "confirm", "correct", "trip", "remark", "picture", "end", "void"],
  stopped: ["make-safe", "correct", "trip", "remark", "picture", "change-person", "end", "void"],
  voided: [],
};

/** The things that may be done now, as words for buttons. @param {State} state @param {boolean} is_open @param {any[]} ways */
export function may(state, is_open, ways) {
  const { phase } = state;
  if (phase === "ended") return unsigned_end(state) ? ["sign", "correct", "remark", "picture", "void"] : ["void"];
  const found = [...MAY[phase]];
  if (phase === "going" && is_open) found.push("answer");
  if (phase === "going" && ways.some((way) => way.open && way.button)) found.push("go-on");
  return found;
}

/** The run has ended, and whoever performed it has not signed since, or it was returned and taken up again.
 * @param {State} state */
export function unsigned_end(state) {
  if (state.ended === null) return false;
  const last = state.ended.seq;
  const done = state.signatures.some((/** @type {any} */ s) => s.meaning === "performed" && s.seq > last);
  return state.reopened !== null || !done;
}
