/**
 * What events that answer no step do to the state: one arm an event. Twin of fieldkit/run/arms.py.
 * @module
 */

import * as answers from "./answers.js";
import * as clock from "./clock.js";
import { Refused } from "./command.js";
import * as moves from "./moves.js";
import * as names from "./names.js";
import * as rows from "./rows.js";
import * as rules from "./rules.js";
import * as start from "./start.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./events.js").Event} Event */
/** @typedef {{passed: clock.Passed | null, stop: string}} More */

const { disagree } = moves;

/** List what a rule refuses: the tablet kept it, or something else made the event.
 * @param {State} state @param {number} seq @param {() => void} rule */
export function allowed(state, seq, rule) {
  try {
    rule();
  } catch (problem) {
    if (!(problem instanceof Refused)) throw problem;
    disagree(state, seq, problem.code, problem.says);
  }
}

/** Equal JSON values, whatever the order of their keys. @param {any} a @param {any} b @returns {boolean} */
function same(a, b) {
  if (typeof a !== "object" || typeof b !== "object" || a === null || b === null) return a === b;
  const keys = Object.keys(a);
  return keys.length === Object.keys(b).length && keys.every((key) => Object.hasOwn(b, key) && same(a[key], b[key]));
}

/** Where locks and earths are; the number of a lock may have been corrected since. @param {any} of @returns {string[][]} */
function on(of) {
  return [of.locks.map((/** @type {any} */ lock) => lock.point), of.earths.map((/** @type {any} */ earth) => earth.stick)];
}

/** What the row of an event that answers no step says.
 * @param {Context} ctx @param {Event} event @returns {{step?: any, row: Record<string, any>}} */
export function said_by(ctx, event) {
  const { body, kind } = event;
  if (["remarked", "pictured", "went-on"].includes(kind)) {
    const note = kind === "pictured" ? body.note : "";
    const text = kind === "remarked" ? body.text : "";
    const row = { note, text, who: body.authority || "", move: body.move, reason: body.reason ?? "" };
    return { step: ctx.steps[body.step] ?? null, row };
  }
  return { row: Object.hasOwn(SAYS, kind) ? SAYS[kind](body) : {} };
}

/** @type {Record<string, (body: any) => Record<string, any>>} */
const SAYS = {
  corrected: (body) => ({ text: body.text, reason: body.reason, note: body.field }),
  "safe-begun": (body) => ({ reason: body.why }),
  "safe-step-done": (body) => ({ text: body.item, note: body.done ? "" : "it was so already" }),
  "safe-ended": (body) => ({ text: body.remark }),
  "trip-recorded": (body) => ({ text: body.indicator, note: body.level, reason: body.done }),
  paused: (body) => ({ reason: body.reason }),
  resumed: (body) => ({ note: body.cause, text: body.wall_s }),
  "clock-changed": (body) => ({ text: body.wall_s, note: body.mono_s }),
  "person-changed": (body) => ({ who: body.to }),
  "storage-found": (body) => ({ text: String(body.lost), note: body.note }),
  ended: (body) => ({ outcome: body.outcome, reason: body.reason }),
  voided: (body) => ({ reason: body.reason }),
  reopened: (body) => ({ reason: body.reason, who: body.returned_by }),
  signed: (body) => ({ who: body.person, note: body.meaning }),
  "states-confirmed": (body) => ({ names: [...body.unbroken] }),
};

/** @param {Context} ctx @param {State} state @param {Event} event */
function states_declared(ctx, state, event) {
  const { seq, body } = event;
  if (state.phase !== "declare") {
    disagree(state, seq, "not-declaring", "The energy states were declared before.");
    return;
  }
  allowed(state, seq, () => start.agrees(ctx, state, names.scope(ctx, state), body));
  for (const [name, to] of Object.entries(body.states)) {
    if (!Object.hasOwn(state.sources, name)) continue;
    const age = Object.hasOwn(body.ages, name) ? body.ages[name] : "0";
    const back = Math.max(0, clock.millis(age) ?? 0);
    state.sources[name] = earlier({ state: to, ...moves.mark(state), seq, flag: "declared" }, back, back);
  }
  state.locks.push(...body.locks);
  rows.change(state, seq, { names: body.locks.map((/** @type {any} */ lock) => `${lock.lock} on ${lock.point}`) });
  state.phase = "going";
}

/** The mark moved back in time, by milliseconds. @param {any} source @param {number} least @param {number} greatest */
function earlier(source, least, greatest) {
  return {
    ...source,
    least: clock.seconds((clock.millis(source.least) ?? 0) - least),
    greatest: clock.seconds((clock.millis(source.greatest) ?? 0) - greatest),
  };
}

/** @param {Context} ctx @param {State} state @param {Event} event */
function went_on(ctx, state, event) {
  const { body, seq } = event;
  if (state.phase !== "going") disagree(state, seq, "not-going", `Event ${seq} goes on while nothing may.`);
  const { pending } = state;
  if ((pending ? pending.step : state.node) !== body.step) {
    disagree(state, seq, "not-here", `Event ${seq} goes on from '${body.step}', which is not the open step.`);
  }
  const move = ctx.moves[body.move];
  if (move && move.manner === "deviation") {
    if (!body.authority || state.recorders.includes(body.authority)) {
      disagree(state, seq, "authority", "A deviation is allowed by a supervisor who records nothing in this run.");
    } else state.unsigned = { seq, person: body.authority, meaning: "allowed" };
  }
  rows.change(state, seq, { manner: move ? move.manner : null, note: body.under });
  moves.take(ctx, state, body.move, names.scope(ctx, state), event, body.reason);
}

/** @param {Context} ctx @param {State} state @param {Event} event @param {More} more */
function corrected(ctx, state, event, more) {
  const { body, seq } = event;
  if (!state.log.some((/** @type {any} */ row) => row.seq === body.seq && answers.CORRECTABLE.includes(row.kind))) {
    disagree(state, seq, "nothing-corrected", `Event ${seq} corrects event ${body.seq}, which has no such text.`);
  }
  if (more.stop) moves.stop(state, seq, more.stop);
  else if (body.move !== null) moves.take(ctx, state, body.move, names.scope(ctx, state), event, body.reason);
}

/** @param {Context} ctx @param {State} state @param {Event} event */
function safe_step_done(ctx, state, event) {
  const { body, seq } = event;
  const item = ctx.sheet.make_safe.find((/** @type {any} */ one) => one.id === body.item);
  if (!item) disagree(state, seq, "unknown-item", `The make-safe list has no line '${body.item}'.`);
  else {
    rows.change(state, seq, { title: item.text });
    for (const [name, to] of Object.entries(item.sets)) {
      if (names.LIVE.includes(moves.source_state(state, name) ?? "")) moves.set_source(state, name, /** @type {string} */ (to), seq);
    }
  }
  state.safe[body.item] = seq;
  moves.stop(state, seq, "Made safe.");
}

/** Facts are cleared, proofs fall, and nothing opens until the states are confirmed.
 * @param {State} state @param {number} seq @param {string} cause */
function pause(state, seq, cause) {
  if (state.phase !== "going") return;
  Object.assign(state, { phase: "confirm", paused: { cause, seq }, facts: [] });
  state.clock = { ...state.clock, owed: "0.000" };
  moves.drop_proofs(state, seq);
}

/** @param {Context} ctx @param {State} state @param {Event} event */
function paused(ctx, state, event) {
  if (state.phase !== "going") disagree(state, event.seq, "not-going", "A pause begins while nothing goes on.");
  pause(state, event.seq, "pause");
}

/** @param {Context} ctx @param {State} state @param {Event} event @param {More} more */
function resumed(ctx, state, event, more) {
  const { passed } = more;
  if (passed === null) return;
  if (passed.out === null || passed.greatest > clock.PAUSE_MS) pause(state, event.seq, event.body.cause);
  if (state.phase === "confirm") state.clock = clock.owe(state.clock, passed.out);
}

/** @param {Context} ctx @param {State} state @param {Event} event */
function states_confirmed(ctx, state, event) {
  const { seq, body } = event;
  if (state.phase !== "confirm") {
    disagree(state, seq, "not-paused", "The energy states were confirmed without a pause.");
    return;
  }
  const owed = state.clock.owed === null ? null : clock.millis(state.clock.owed);
  const unbroken = new Set(body.unbroken);
  const changed = [];
  for (const [name, to] of Object.entries(body.states)) {
    const was = moves.source_state(state, name);
    if (was === null) disagree(state, seq, "unknown-source", `The sheet knows no source '${name}'.`);
    else if (was !== to) {
      changed.push(`${ctx.sources[name].title} was ${was} and is ${to}`);
      moves.set_source(state, name, to, seq, "found");
    }
  }
  for (const [name, source] of Object.entries(state.sources)) {
    if (source.seq !== seq) state.sources[name] = through(state, source, owed, unbroken.has(name));
  }
  for (const [name, done] of Object.entries(state.done)) {
    const depends = [...done.sets, ...(ctx.depends[name] ?? [])];
    state.done[name] = through(state, done, owed, depends.every((source) => unbroken.has(source)));
  }
  Object.assign(state, { phase: "going", paused: null });
  state.clock = { ...state.clock, owed: "0.000" };
  if (changed.length) moves.stop(state, seq, `Found otherwise after the pause: ${changed.join("; ")}.`);
}

/** A mark through a gap: what held through it is credited the gap; what did not begins anew, for least times.
 * @param {State} state @param {any} kept @param {number | null} owed @param {boolean} unbroken */
function through(state, kept, owed, unbroken) {
  const flagged = "flag" in kept;
  if (!unbroken) return { ...kept, least: state.clock.least, ...(flagged ? { flag: "restarted" } : {}) };
  if (owed) return { ...earlier(kept, owed, 0), ...(flagged ? { flag: "gap" } : {}) };
  return kept;
}

/** @param {Context} ctx @param {State} state @param {Event} event */
function person_changed(ctx, state, event) {
  const { to } = event.body;
  state.recorder = to;
  if (!state.recorders.includes(to)) state.recorders = [...state.recorders, to];
  moves.drop_proofs(state, event.seq);
}

/** @param {Context} ctx @param {State} state @param {Event} event */
function ended(ctx, state, event) {
  const { body, seq } = event;
  if (body.outcome === "done" && (state.node !== moves.END || state.phase !== "going")) {
    disagree(state, seq, "not-at-end", "The run says that it is done, and is not at its end.");
  }
  if (body.outcome === "done") allowed(state, seq, () => rules.end_states(ctx, state));
  if (body.outcome === "stopped") moves.stop(state, seq, body.reason);
  const states = Object.fromEntries(Object.entries(state.sources).map(([name, source]) => [name, source.state]));
  if (!same(body.states, states) || !same(on(body), on(state))) {
    disagree(state, seq, "end-differs", "The end names other states, locks or earths than the run has.");
  }
  Object.assign(state, { phase: "ended", ended: { outcome: body.outcome, seq } });
}

/** @param {Context} ctx @param {State} state @param {Event} event */
function reopened(ctx, state, event) {
  if (state.phase !== "ended") disagree(state, event.seq, "not-ended", "The run is taken up again before it ended.");
  const { reason, returned_by } = event.body;
  state.reopened = { seq: event.seq, reason, returned_by };
}

/** @param {Context} ctx @param {State} state @param {Event} event */
function signed(ctx, state, event) {
  const { body, seq } = event;
  state.signatures.push({ seq, person: body.person, meaning: body.meaning, covers: seq - 1 });
  if (body.meaning === "performed") state.reopened = null;
}

/** @type {Record<string, (ctx: Context, state: State, event: Event, more: More) => void>} */
export const ARMS = {
  "states-declared": states_declared,
  "went-on": went_on,
  corrected,
  "safe-begun": (ctx, state, event) => {
    state.safe_begun ??= event.seq;
  },
  "safe-step-done": safe_step_done,
  "safe-ended": (ctx, state, event) => {
    state.safe_ended = event.seq;
  },
  "trip-recorded": (ctx, state, event) => {
    if (event.body.kind === "trip") pause(state, event.seq, "trip");
  },
  paused,
  resumed,
  "states-confirmed": states_confirmed,
  "clock-changed": (ctx, state) => {
    state.clock = clock.owe({ ...state.clock, changed: true }, null);
  },
  "person-changed": person_changed,
  ended,
  voided: (ctx, state) => {
    state.phase = "voided";
  },
  reopened,
  signed,
};
