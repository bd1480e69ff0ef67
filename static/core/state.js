/**
 * The fold: what a run is, from its sheet and its events. Twin of fieldkit/run/state.py, which says what it means.
 *
 *   fold(sheet, events)                       the state
 *   begin(sheet), apply(run, event)           one event at a time; agrees with fold
 *   make(sheet, run, chain, sha256)           the state before the first event
 *
 * Events are those that events.read gives. To add an event: an arm here, one in its twin.
 * @module
 */

import * as answers from "./answers.js";
import * as arms from "./arms.js";
import * as clock from "./clock.js";
import * as moves from "./moves.js";
import * as names from "./names.js";
import * as recheck from "./recheck.js";
import * as rows from "./rows.js";
import * as start from "./start.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./events.js").Event} Event */
/** @typedef {{ctx: Context, state: State, events: Event[], corrections: Record<number, Event[]>, stops: Record<number, string>}} Run */

const { disagree } = moves;

/** The state before the first event. @param {any} sheet @param {string} [run] @param {string} [chain] @param {string} [sha256] @returns {State} */
export function make(sheet, run = "", chain = "", sha256 = "") {
  const ctx = names.context(sheet);
  return {
    phase: "new",
    node: ctx.sheet.first,
    run,
    chain,
    seq: -1,
    head: sha256,
    sheet: sha256,
    started: null,
    recorder: "",
    recorders: [],
    clock: null,
    sources: {},
    values: {},
    series: {},
    spread: {},
    choices: {},
    facts: [],
    counters: {},
    hands: {},
    locks: [],
    earths: [],
    done: {},
    pending: null,
    stop: null,
    safe: {},
    safe_begun: null,
    safe_ended: null,
    paused: null,
    unsigned: null,
    disagree: [],
    log: [],
    ended: null,
    reopened: null,
    signatures: [],
  };
}

/** The state after all of `happened`, in order. @param {any} sheet @param {Iterable<Event>} happened @returns {State} */
export function fold(sheet, happened) {
  let run = begin(sheet);
  for (const event of happened) run = apply(run, event);
  return run.state;
}

/** A run without events. @param {any} sheet @returns {Run} */
export function begin(sheet) {
  const ctx = names.context(sheet);
  return { ctx, state: make(ctx), events: [], corrections: {}, stops: {} };
}

/** The run one event later. `run` itself stays as it is. @param {Run} run @param {Event} event @returns {Run} */
export function apply(run, event) {
  let { state, corrections, stops } = run;
  if (event.kind === "corrected") {
    const seq = event.body.seq;
    corrections = { ...corrections, [seq]: [...(corrections[seq] ?? []), event] };
    state = again(run, corrections);
    const why = stopped_by(run.state, state);
    if (why) stops = { ...stops, [event.seq]: why };
  }
  state = step(run.ctx, state, event, corrections, stops);
  return { ctx: run.ctx, state, events: [...run.events, event], corrections, stops };
}

/** The state one event later, where that event corrects nothing and is corrected by nothing: for a trial.
 * @param {any} sheet @param {State} state @param {Event} event @returns {State} */
export function one(sheet, state, event) {
  return step(names.context(sheet), state, event, {}, {});
}

/** @param {Run} run @param {Record<number, Event[]>} corrections @returns {State} */
function again(run, corrections) {
  let state = make(run.ctx);
  for (const event of run.events) state = step(run.ctx, state, event, corrections, run.stops);
  const listed = new Set(state.disagree.map(key));
  const lost = run.state.disagree.filter((/** @type {any} */ d) => d.code === "value" && !listed.has(key(d)));
  return { ...state, disagree: [...state.disagree, ...lost].sort((a, b) => a.seq - b.seq) };
}

/** @param {{seq: number, code: string}} found */
function key(found) {
  return `${found.seq} ${found.code}`;
}

/** @param {State} before @param {State} after @returns {string} */
function stopped_by(before, after) {
  const known = new Set(before.disagree.map(key));
  const found = after.disagree.find((/** @type {any} */ one) => !known.has(key(one)));
  return found ? `The correction changes what came after it. ${found.says}` : "";
}

/** @param {State} state @returns {State} */
function copy(state) {
  /** @type {State} */
  const made = {};
  for (const [name, v] of Object.entries(state)) made[name] = Array.isArray(v) ? [...v] : typeof v === "object" && v ? { ...v } : v;
  made.started = state.started;
  return made;
}

const AFTER_END = Object.freeze([
  "signed", "reopened", "corrected", "remarked", "pictured", "storage-found", "voided", "clock-changed", "resumed",
]);

/** @param {Context} ctx @param {State} before @param {Event} event @param {Record<number, Event[]>} corrections
 * @param {Record<number, string>} stops @returns {State} */
function step(ctx, before, event, corrections, stops) {
  const state = copy(before);
  const { seq, kind } = event;
  chain(state, event);
  const passed = state.clock ? clock.passed(state.clock, event.at) : null;
  state.clock = state.clock ? clock.advance(state.clock, event.at) : clock.begin(event.at);
  if (passed && passed.ahead && kind !== "resumed" && kind !== "clock-changed") state.clock = { ...state.clock, changed: true };
  signature_due(state, event);
  if (kind === "run-started") {
    run_started(ctx, state, event);
    return state;
  }
  if (state.started === null) disagree(state, seq, "not-started", `Event ${seq} (${kind}) stands before the run was started.`);
  else if ((state.phase === "ended" || state.phase === "voided") && !AFTER_END.includes(kind)) {
    disagree(state, seq, "after-end", `Event ${seq} (${kind}) stands after the end of the run.`);
  }
  if (state.started !== null) recheck.event(ctx, state, event, passed);
  if (Object.hasOwn(answers.CONTROLS, kind) && answers.is_answer(ctx, state, event)) {
    answers.answer(ctx, state, event, corrections[seq] ?? []);
  } else {
    const said = arms.said_by(ctx, event);
    rows.add(ctx, state, event, said.step ?? null, said.row);
    if (Object.hasOwn(arms.ARMS, kind)) arms.ARMS[kind](ctx, state, event, { passed, stop: stops[seq] ?? "" });
  }
  return state;
}

/** @param {State} state @param {Event} event */
function chain(state, event) {
  const { seq } = event;
  if (seq !== state.seq + 1) disagree(state, seq, "sequence", `Event ${seq} follows event ${state.seq}.`);
  if (state.started !== null) {
    if (event.prev !== state.head) disagree(state, seq, "chain", `Event ${seq} does not carry the hash of the event before it.`);
    if (event.run !== state.run || event.chain !== state.chain) {
      disagree(state, seq, "other-run", `Event ${seq} belongs to another run or chain.`);
    }
  }
  state.seq = seq;
  state.head = event.sha256;
}

/** @param {State} state @param {Event} event */
function signature_due(state, event) {
  const due = state.unsigned;
  state.unsigned = null;
  const { person = "", meaning = "" } = event.kind === "signed" ? event.body : {};
  if (due && (person !== due.person || meaning !== due.meaning)) {
    disagree(state, due.seq, "not-signed", `Event ${due.seq} is not followed by the signature of ${due.person}.`);
  }
}

/** @param {Context} ctx @param {State} state @param {Event} event */
function run_started(ctx, state, event) {
  const { body, seq } = event;
  if (state.started !== null) {
    disagree(state, seq, "started-twice", "The run was started before.");
    return;
  }
  if (event.prev !== body.sheet) {
    disagree(state, seq, "other-sheet", "The run's first event follows another sheet than it names.");
  }
  Object.assign(state, { phase: "declare", run: event.run, chain: event.chain, sheet: body.sheet, started: body });
  Object.assign(state, { recorder: event.by, recorders: [event.by], locks: [...body.locks], earths: [...body.earths] });
  for (const name of Object.keys(ctx.sources)) state.sources[name] = { state: "unknown", ...moves.mark(state), seq, flag: "" };
  rows.add(ctx, state, event, null, { who: event.by, names: [...body.present] });
  arms.allowed(state, seq, () => start.begins(ctx, body, event.by, event.at.wall));
}

