/**
 * What an event must keep to whoever made it: the fold asks again what decide asked of the command.
 * Twin of fieldkit/run/recheck.py, which says what it means. To add a rule: an arm in RULES.
 * @module
 */

import * as answers from "./answers.js";
import * as clock from "./clock.js";
import { Refused } from "./command.js";
import * as moves from "./moves.js";
import * as readings from "./readings.js";
import * as rules from "./rules.js";
import * as start from "./start.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./events.js").Event} Event */
/** @typedef {[string, string][]} Found code and sentence of each thing found */

/** What whoever records does. */
const WORK = Object.freeze([
  ...Object.keys(answers.CONTROLS), "went-on", "corrected", "states-declared", "states-confirmed", "ended",
]);

/** List what does not keep to the rules; `passed` is what the clock says since the event before.
 * @param {Context} ctx @param {State} state @param {Event} one @param {clock.Passed | null} passed */
export function event(ctx, state, one, passed) {
  const { seq, kind, body } = one;
  /** @type {Found} */
  const found = [];
  if (WORK.includes(kind) && one.by !== state.recorder) {
    found.push(["not-recorder", `Event ${seq} is by ${one.by}, and ${state.recorder} records.`]);
  }
  if (state.phase === "going" && (kind === "went-on" || takes(one)) && passed !== null && clock.away(passed)) {
    found.push(["not-resumed", `Event ${seq} follows a gap that was not told. Take the run up again first.`]);
  }
  const rule = Object.hasOwn(RULES, kind) ? RULES[kind] : null;
  if (Object.hasOwn(answers.CONTROLS, kind)) {
    const step = ctx.steps[body.step || ""];
    if (rule && step && step.control.control === answers.CONTROLS[kind]) found.push(...rule(ctx, state, one, step.control));
    found.push(...by_itself(ctx, one));
  } else if (rule) found.push(...rule(ctx, state, one, {}));
  for (const [code, says] of found) moves.disagree(state, seq, code, says);
}

/** An answer; a picture or a remark only where it takes a move. @param {Event} one */
function takes(one) {
  const beside = ["pictured", "remarked"].includes(one.kind) && one.body.move === null;
  return Object.hasOwn(answers.CONTROLS, one.kind) && !beside;
}

/** An answer takes a plain move and no way round. @param {Context} ctx @param {Event} one @returns {Found} */
function by_itself(ctx, one) {
  const move = ctx.moves[one.body.move || ""];
  if (!move || (move.manner === "plain" && !moves.is_around(move))) return [];
  return [["wrong-move", `Event ${one.seq} takes the move '${move.id}', which only a person's choice takes.`]];
}

/** @param {() => any} rule @returns {Found} */
function refused(rule) {
  try {
    rule();
  } catch (problem) {
    if (!(problem instanceof Refused)) throw problem;
    return [[problem.code, problem.says]];
  }
  return [];
}

/** @param {Event} one @param {any} control @param {string[]} keys @returns {Found} */
function differs(one, control, ...keys) {
  return keys
    .filter((key) => one.body[key] !== control[key])
    .map((key) => [`other-${key}`, `Event ${one.seq} says '${one.body[key]}' where the step says '${control[key]}'.`]);
}

/** What the instrument and its range must be, whichever answer they gave.
 * @param {State} state @param {Event} one @param {any} control @param {any} meter @returns {Found} */
function metered(state, one, control, meter) {
  return [
    ...refused(() => rules.in_range(state, control, one.body.instrument, one.body.range)),
    ...refused(() => rules.in_date(control, meter, one.at.wall)),
  ];
}

/** @type {Record<string, (ctx: Context, state: State, one: Event, control: any) => Found>} */
const RULES = {
  read: (ctx, state, one, control) => {
    const { body, seq } = one;
    const meter = readings.instrument(state, body.instrument, body.range);
    /** @type {Found} */
    const found = [];
    if (meter === null && (body.instrument || control.meter)) {
      found.push(["no-instrument", `Event ${seq} names no instrument that this run carries.`]);
    }
    found.push(...metered(state, one, control, meter));
    const beyond = refused(() => rules.number(body.text, meter, body.unit)).filter(([code]) => code === "outside-range");
    return [...found, ...beyond];
  },
  proved: (ctx, state, one, control) => {
    const { instrument, range } = one.body;
    const found = refused(() => rules.tester(state, control, instrument));
    return [...found, ...metered(state, one, control, readings.instrument(state, instrument, range))];
  },
  locked: (ctx, state, one, control) => {
    const found = differs(one, control, "point");
    if (!one.body.lock.trim()) found.push(["nothing-typed", `Event ${one.seq} gives no number of the lock.`]);
    return [...found, ...refused(() => rules.known(state, one.body.holder))];
  },
  unlocked: (ctx, state, one, control) => {
    const { body } = one;
    const found = differs(one, control, "point");
    const at = state.locks.filter((/** @type {any} */ lock) => lock.point === body.point);
    const lock = at.find((/** @type {any} */ held) => held.lock === body.lock) ?? at[0] ?? null;
    if (lock === null || lock.holder === body.who) return found;
    return [...found, ...refused(() => rules.exception(state, lock, body.who, body.checks, body.second))];
  },
  earthed: (ctx, state, one, control) => differs(one, control, "stick", "point"),
  lifted: (ctx, state, one, control) => differs(one, control, "stick", "point"),
  released: (ctx, state, one, control) => [
    ...differs(one, control, "statement"),
    ...refused(() => rules.releases(state, control, one.body.who)),
  ],
  "people-counted": (ctx, state, one, control) => differs(one, control, "place", "way"),
  "went-on": (ctx, state, one) => {
    const { body, seq } = one;
    const move = ctx.moves[body.move] ?? null;
    /** @type {Found} */
    const found = [];
    if (move === null) return found;
    if (state.pending === null && state.phase === "going" && !moves.is_around(move)) {
      found.push(["not-answered", `Event ${seq} goes on from '${body.step}', which was not answered.`]);
    }
    if (["again", "deviation"].includes(move.manner) && !body.reason.trim()) {
      found.push(["reason-needed", `Event ${seq} gives no reason.`]);
    }
    if (move.manner !== "deviation") return found;
    if (!body.under.trim()) {
      found.push(["under-needed", `Event ${seq} does not say under whose authority the reading is accepted.`]);
    }
    if (body.authority && !answers.has_role(state, body.authority, "supervisor")) {
      found.push(["not-supervisor", `${rules.name_of(state, body.authority)} is no supervisor.`]);
    }
    return found;
  },
  corrected: (ctx, state, one) => {
    const { body, seq } = one;
    if (body.move === null || state.phase !== "going") return [];
    /** @type {Found} */
    const found = [];
    if (state.pending === null || state.pending.seq !== body.seq) {
      found.push(["not-answered", `Event ${seq} goes on from a step that did not wait for it.`]);
    }
    return [...found, ...by_itself(ctx, one)];
  },
  "person-changed": (ctx, state, one) => refused(() => rules.records(state, one.body.to)),
  "states-confirmed": (ctx, state, one) =>
    state.phase === "confirm" ? refused(() => start.goes_on(ctx, state, one.body)) : [],
};
