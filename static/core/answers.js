/**
 * What an answer to a step does to the state: one arm a control. Twin of fieldkit/run/answers.py.
 * @module
 */

import * as clock from "./clock.js";
import * as judge from "./judge.js";
import * as moves from "./moves.js";
import * as names from "./names.js";
import * as readings from "./readings.js";
import * as results from "./results.js";
import * as rows from "./rows.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */
/** @typedef {import("./names.js").Scope} Scope */
/** @typedef {[string, Record<string, any>]} Said */

const { disagree } = moves;

/** Kind of the event -> control that it answers. @type {Record<string, string>} */
export const CONTROLS = {
  acknowledged: "caution",
  confirmed: "confirm",
  read: "number",
  proved: "prove",
  locked: "lock",
  unlocked: "unlock",
  earthed: "earth",
  lifted: "lift",
  chosen: "choice",
  released: "hold",
  pictured: "picture",
  remarked: "remark",
  "worked-out": "result",
  waited: "wait",
  "people-counted": "people",
};
/** Kinds whose texts can be corrected. */
export const CORRECTABLE = Object.freeze(["read", "proved", "locked", "remarked"]);
/** Outcomes whose gates are read with the answer in: the value just read, the option just chosen. */
export const WITH_ANSWER = Object.freeze(["pass", "fail", "option"]);

/** A picture or a remark can also stand beside a step; all other answers answer.
 * @param {Context} ctx @param {State} state @param {any} event */
export function is_answer(ctx, state, event) {
  if (!["pictured", "remarked"].includes(event.kind) || event.body.move !== null) return true;
  const step = ctx.steps[event.body.step];
  const here = step && state.phase === "going" && state.node === step.id && !state.pending;
  return Boolean(here) && step.control.control === CONTROLS[event.kind];
}

/** Record an answer with its row, and take its move.
 * @param {Context} ctx @param {State} state @param {any} event @param {any[]} corrections */
export function answer(ctx, state, event, corrections) {
  const { seq } = event;
  const step = ctx.steps[event.body.step] ?? null;
  if (step === null || step.control.control !== CONTROLS[event.kind]) {
    disagree(state, seq, "wrong-answer", `Event ${seq} (${event.kind}) answers no such step of the sheet.`);
    rows.add(ctx, state, event, step);
    return;
  }
  const going = state.phase === "going";
  if (!going) disagree(state, seq, "not-going", `Event ${seq} answers a step while nothing is open.`);
  else if (state.pending || state.node !== step.id) {
    disagree(state, seq, "not-here", `Event ${seq} answers the step '${step.id}', which is not the open one.`);
    state.node = step.id;
    state.pending = null;
  }
  const [body, old] = corrected(event.body, corrections);
  const before = names.scope(ctx, state);
  const [outcome, said] = ARMS[step.control.control](ctx, state, before, { ...event, body, step });
  rows.add(ctx, state, event, step, { ...said, outcome, old: [...(said.old ?? []), ...old] });
  if (!going) return;
  state.pending = { step: step.id, seq, outcome, verdict: said.verdict ?? null };
  if (body.move !== null) {
    const where = WITH_ANSWER.includes(outcome) ? names.scope(ctx, state) : before;
    moves.take(ctx, state, body.move, where, event);
  } else if (event.kind === "unlocked" && lock_on(state, body.point)) state.pending = null;
}

/** A body with its corrections applied, and every text that stood there before.
 * @param {any} body @param {any[]} corrections @returns {[any, any[]]} */
export function corrected(body, corrections) {
  const old = [];
  for (const one of corrections) {
    const { field, text, reason } = one.body;
    const before = field_text(body, field);
    if (before === null) continue;
    body = with_field(body, field, text);
    old.push({ field, text: before, seq: one.seq, reason });
  }
  return [body, old];
}

/** The text of a correctable field; null where the event has no such field.
 * @param {any} body @param {string} field @returns {string | null} */
export function field_text(body, field) {
  if (field.startsWith("points.")) {
    const found = (body.points ?? []).find((/** @type {any} */ p) => p.name === field.slice(7));
    return found ? found.text : null;
  }
  const text = ["text", "before", "after", "lock"].includes(field) ? body[field] : null;
  return typeof text === "string" ? text : null;
}

/** @param {any} body @param {string} field @param {string} text */
function with_field(body, field, text) {
  if (!field.startsWith("points.")) return { ...body, [field]: text };
  const name = field.slice(7);
  return { ...body, points: body.points.map((/** @type {any} */ p) => (p.name === name ? { ...p, text } : p)) };
}

/** @param {State} state @param {string} name @returns {any} */
export function person(state, name) {
  return state.started ? state.started.people.find((/** @type {any} */ one) => one.id === name) ?? null : null;
}

/** @param {State} state @param {string} name @param {string} role */
export function has_role(state, name, role) {
  const found = person(state, name);
  return found !== null && found.roles.includes(role);
}

/** @param {State} state @param {string} point */
export function lock_on(state, point) {
  return state.locks.some((/** @type {any} */ lock) => lock.point === point);
}

/** @param {any} control @param {string} text @param {any} limits @param {any} meter @param {boolean} protects @param {any} event */
function judged(control, text, limits, meter, protects, event) {
  const day = clock.day(event.at.wall);
  return judge.judge(text, control.unit.symbol, limits, readings.resolution_of(control, meter), meter, protects, day);
}

/** @param {any} verdict */
function of_verdict(verdict) {
  const { verdict: word, margin, u, near, untypical, overdue, words } = verdict;
  return { verdict: word, margin, u, near, untypical, overdue, words };
}

/** @param {State} state @param {string} step @param {string} text @param {string} unit @param {string | null} si @param {number} seq
 * @param {results.Parts | null} [parts] */
function keep(state, step, text, unit, si, seq, parts = null) {
  state.values[step] = { text, unit, si, seq, parts };
  if (si === null) return;
  state.series[step] = [...(Object.hasOwn(state.series, step) ? state.series[step] : []), si];
  state.spread[step] = [...(Object.hasOwn(state.spread, step) ? state.spread[step] : []), parts];
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function number(ctx, state, where, event) {
  const { body, seq, step } = event;
  const { control } = step;
  const meter = readings.instrument(state, body.instrument, body.range);
  const limits = readings.bounds(ctx, where, control, meter);
  if (body.unit !== control.unit.symbol) {
    disagree(state, seq, "unit", `Event ${seq} is in '${body.unit}', the step in '${control.unit.symbol}'.`);
  }
  const verdict = judged(control, body.text, limits, meter, control.protects, event);
  if (verdict.refused) {
    disagree(state, seq, "no-number", `Event ${seq} holds no number: ${verdict.refused.says}`);
    const { text, unit, instrument } = body;
    return ["fail", { text, unit, verdict: "not judged", instrument, range: range_name(body, meter) }];
  }
  const parts = results.of_reading(control, meter, readings.plain(body.text), seq);
  keep(state, step.id, body.text, control.unit.symbol, readings.si_text(body.text, control.unit), seq, parts);
  const used = { instrument: body.instrument, range: range_name(body, meter) };
  return [verdict.outcome, { text: body.text, unit: body.unit, limits, ...used, ...of_verdict(verdict) }];
}

/** The name of the range that was used; the only one of an instrument need not be named. @param {any} body @param {any} meter @returns {string} */
function range_name(body, meter) {
  return body.range || (meter && meter.range) || "";
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function result(ctx, state, where, event) {
  const { body, seq, step } = event;
  const { control } = step;
  const [si, text, fault] = readings.result_text(ctx, where, control);
  /** @type {any[]} */
  let old = [];
  if (si !== body.value) {
    const changed = state.log.findLast((/** @type {any} */ row) => row.old.some((/** @type {any} */ one) => one.seq > seq));
    if (changed === undefined) {
      disagree(state, seq, "value", `Event ${seq} holds '${body.value || "no value"}', the sheet gives '${si || fault}'.`);
    } else {
      const last = Math.max(...changed.old.map((/** @type {any} */ one) => one.seq));
      old = [{ field: "value", text: body.value, seq: last, reason: "worked out again after the correction" }];
    }
  }
  const parts = results.of_result(ctx, state, where, control);
  const own = results.meter(control, parts);
  const limits = readings.bounds(ctx, where, control, own);
  const unit = control.unit.symbol;
  if (fault) {
    keep(state, step.id, "", unit, null, seq);
    return ["fail", { unit, verdict: "not judged", words: `No value: ${fault}`, value: "", limits, old }];
  }
  const verdict = judged(control, text, limits, own, control.protects, event);
  const shown = results.shown(ctx, where, control, own);
  keep(state, step.id, text, unit, si, seq, parts);
  return [verdict.outcome, { text, unit, value: si, shown, limits, old, ...of_verdict(verdict) }];
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function prove(ctx, state, where, event) {
  const { body, seq, step } = event;
  const { control } = step;
  const meter = readings.instrument(state, body.instrument, body.range);
  const named = body.points.map((/** @type {any} */ p) => p.name);
  for (const point of control.points) {
    if (!named.includes(point.name)) disagree(state, seq, "point-missing", `Event ${seq} leaves out the point '${point.name}'.`);
  }
  const points = [];
  for (const [field, title, own] of readings.proof_fields(control)) {
    const text = field_text(body, field) || "";
    const limits = readings.bounds(ctx, where, control, meter, own);
    const verdict = judged(control, text, limits, meter, true, event);
    if (verdict.refused) {
      disagree(state, seq, "no-number", `Event ${seq} holds no number at ${title}: ${verdict.refused.says}`);
      points.push({ field, title, text, limits, verdict: "not judged", words: "" });
      continue;
    }
    const { verdict: word, margin, u, words } = verdict;
    points.push({ field, title, text, limits, verdict: word, margin, u, words });
  }
  const worst = judge.VERDICTS[Math.max(...points.map((p) => judge.VERDICTS.indexOf(p.verdict)))];
  const said = {
    verdict: worst,
    unit: control.unit.symbol,
    instrument: body.instrument,
    range: range_name(body, meter),
    overdue: judge.overdue(meter, event.at.wall),
    points,
  };
  return [worst === "pass" ? "pass" : "fail", said];
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function lock(ctx, state, where, event) {
  const { body, step } = event;
  const holder = person(state, body.holder);
  state.locks.push({
    point: body.point,
    sources: [...step.control.sources],
    lock: body.lock,
    tag: body.tag,
    holder: body.holder,
    holder_name: holder ? holder.name : "",
    run: state.run,
    since: event.at.wall,
  });
  return ["done", { text: body.lock, note: body.tag, who: body.holder }];
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function unlock(ctx, state, where, event) {
  const { body, seq } = event;
  const at = state.locks.filter((/** @type {any} */ one) => one.point === body.point);
  const found = at.find((/** @type {any} */ one) => one.lock === body.lock) ?? at[0] ?? null;
  if (found === null) disagree(state, seq, "no-such-lock", `Event ${seq} takes a lock off ${body.point}, where none is on.`);
  else state.locks.splice(state.locks.indexOf(found), 1);
  if (body.move !== null && lock_on(state, body.point)) {
    disagree(state, seq, "locks-left", `Event ${seq} goes on while another lock is on ${body.point}.`);
  }
  state.unsigned = { seq, person: body.who, meaning: "unlocked" };
  const checks = body.checks.map((/** @type {any} */ one) => one.name);
  return ["done", { text: body.lock, who: body.who, names: checks, note: body.second }];
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function earth(ctx, state, where, event) {
  const { body, seq, step } = event;
  if (state.earths.some((/** @type {any} */ one) => one.stick === body.stick)) {
    disagree(state, seq, "stick-on", `Stick ${body.stick} is on already.`);
  }
  const { stick, point } = body;
  state.earths.push({ stick, point, source: step.control.source, run: state.run, since: event.at.wall });
  return ["done", { text: stick, note: point }];
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function lift(ctx, state, where, event) {
  const { body, seq } = event;
  const found = state.earths.findIndex((/** @type {any} */ one) => one.stick === body.stick);
  if (found < 0) disagree(state, seq, "no-such-earth", `Stick ${body.stick} is lifted, and was not on.`);
  else {
    const [gone] = state.earths.splice(found, 1);
    moves.drop_proofs(state, seq, gone.source);
  }
  return ["done", { text: body.stick, note: body.point }];
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function choice(ctx, state, where, event) {
  const { value } = event.body;
  const option = event.step.control.options.find((/** @type {any} */ one) => one.value === value);
  if (!option) disagree(state, event.seq, "unknown-option", `The step has no option '${value}'.`);
  state.choices[event.step.id] = value;
  return ["option", { text: value, note: option ? option.label : "" }];
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function hold(ctx, state, where, event) {
  const { body, seq } = event;
  state.unsigned = { seq, person: body.who, meaning: "released" };
  return ["done", { who: body.who, note: body.statement }];
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function wait(ctx, state, where, event) {
  const elapsed = readings.waited(ctx, where, event.step.control);
  if (elapsed === null || elapsed.left > 0) {
    disagree(state, event.seq, "too-early", `Event ${event.seq} ends a wait before its time.`);
  }
  return ["done", { elapsed: elapsed === null ? null : elapsed.texts }];
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function people(ctx, state, where, event) {
  const { place, way, names: named } = event.body;
  /** @type {string[]} */
  const inside = Object.hasOwn(state.hands, place) ? state.hands[place] : [];
  if (way === "in") state.hands[place] = [...inside, ...named.filter((/** @type {string} */ n) => !inside.includes(n))];
  else {
    const left = inside.filter((n) => !named.includes(n));
    if (left.length) disagree(state, event.seq, "people-left", `Not counted out of the ${place}: ${left.join(", ")}.`);
    state.hands[place] = left;
  }
  return ["done", { names: [...named], note: `${way}: ${place}` }];
}

/** @param {Context} ctx @param {State} state @param {Scope} where @param {any} event @returns {Said} */
function caution(ctx, state, where, event) {
  const heard = [...event.body.heard];
  const present = state.started ? state.started.present : [];
  const missing = present.filter((/** @type {string} */ p) => !heard.includes(p));
  if (missing.length) disagree(state, event.seq, "not-heard", `The caution was not heard by ${missing.join(", ")}.`);
  return ["done", { names: heard }];
}

/** @type {Record<string, (ctx: Context, state: State, where: Scope, event: any) => Said>} */
const ARMS = {
  caution,
  confirm: () => ["done", {}],
  number,
  prove,
  lock,
  unlock,
  earth,
  lift,
  choice,
  hold,
  picture: (ctx, state, where, event) => ["done", { value: event.body.sha256, note: event.body.note }],
  remark: (ctx, state, where, event) => ["done", { text: event.body.text }],
  result,
  wait,
  people,
};
