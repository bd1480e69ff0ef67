/**
 * What the names in a sheet's formulas mean while a run goes on, and which gates that opens.
 * Twin of fieldkit/run/names.py, which says what it means; held by tests/vectors/runs and a seeded walk.
 * @module
 */

import * as clock from "./clock.js";
import { evaluate } from "./evaluate.js";
import { gradient as gradient_of } from "./slopes.js";
import { Dec, Fault, add, dec, mul, to_float, typed } from "./values.js";

/** @typedef {Record<string, any>} State */
/** @typedef {{sheet: any, steps: Record<string, any>, moves: Record<string, any>, leaving: Record<string, any[]>, sources: Record<string, any>, mentioned: Set<string>, earthed: Set<string>, depends: Record<string, Set<string>>, missing: Record<string, Fault>}} Context */
/** @typedef {{names: Record<string, any>, series: Record<string, number[]>}} Scope */
/** @typedef {{says: string, left: number | null}} Reason */

/** States in which a source cannot hurt where hands are. */
export const DEAD = Object.freeze(["proved", "earthed"]);
/** States of a source that is not isolated and not off. */
export const LIVE = Object.freeze(["on", "standby", "cut-off", "unknown"]);
/** Sources that follow others and are never locked, as registers name them. */
/** @type {Readonly<Record<string, string>>} */
export const FOLLOWS = Object.freeze({ stored_charge: "beam_supply", x_rays: "beam_supply", heat: "heater" });

/** @type {WeakMap<object, Context>} */
const KEPT = new WeakMap();

/** A bare map: no name of a sheet can meet an inherited one. @returns {Record<string, any>} */
export const bare = () => Object.create(null);

/** @param {any} thing @returns {thing is Record<string, any>} */
const is_object = (thing) => typeof thing === "object" && thing !== null && !Array.isArray(thing);

/** The sheet ready for the run; remembered by identity. @param {any} sheet @returns {Context} */
export function context(sheet) {
  if (sheet.sheet && sheet.leaving) return sheet;
  let made = KEPT.get(sheet);
  if (!made) KEPT.set(sheet, (made = make_context(sheet)));
  return made;
}

/** @param {any} sheet @returns {Context} */
function make_context(sheet) {
  const [steps, moves, leaving, sources, depends] = [bare(), bare(), bare(), bare(), bare()];
  const earthed = new Set();
  for (const step of sheet.steps) {
    steps[step.id] = step;
    leaving[step.id] = [];
    const control = step.control;
    if (control.control === "earth") earthed.add(control.source);
    if (control.control === "wait" && control.depends && control.clock.startsWith("since:")) {
      (depends[control.clock.slice(6)] ??= new Set()).add(control.depends);
    }
  }
  for (const move of sheet.moves) {
    moves[move.id] = move;
    (leaving[move.origin] ??= []).push(move);
  }
  for (const source of sheet.sources) sources[source.name] = source;
  const found = mentioned([sheet.steps, sheet.moves, sheet.start]);
  return { sheet, steps, moves, leaving, sources, mentioned: found, earthed, depends, missing: make_missing(sheet.steps) };
}

/** @param {any[]} steps @returns {Record<string, Fault>} */
function make_missing(steps) {
  const found = bare();
  for (const step of steps) {
    const said = `“${step.title}”`;
    const kind = step.control.control;
    if (kind === "number" || kind === "result") found[step.id] = new Fault("missing", `${said} has no value yet.`);
    if (kind === "choice") found[`choice:${step.id}`] = new Fault("missing", `${said} has no answer yet.`);
    for (const head of ["since", "oldest-since"]) found[`${head}:${step.id}`] = new Fault("missing", `${said} was not done yet.`);
  }
  return found;
}

/** Every name in every tree of a part of the sheet. @param {any} part @param {Set<string>} [found] @returns {Set<string>} */
export function mentioned(part, found = new Set()) {
  if (Array.isArray(part)) for (const one of part) mentioned(one, found);
  else if (is_object(part)) {
    const keys = Object.keys(part);
    if (keys.length === 1 && keys[0] === "name" && typeof part.name === "string") found.add(part.name);
    for (const key of keys) if (typeof part[key] === "object") mentioned(part[key], found);
  }
  return found;
}

/** Names and series in a state; `at` is now, or null for the moment of the last event.
 * @param {Context} ctx @param {State} state @param {clock.At | null} [at] @returns {Scope} */
export function scope(ctx, state, at = null) {
  const total = state.clock;
  const [least, greatest] =
    at !== null ? clock.now(total, at) : total ? [clock.millis(total.least) ?? 0, clock.millis(total.greatest) ?? 0] : [0, 0];
  const fixed = givens(ctx, state.started);
  const names = Object.assign(bare(), ctx.missing, fixed.names);
  const series = Object.assign(bare(), fixed.series);
  for (const name of ctx.mentioned) {
    const cut = name.indexOf(":");
    if (cut < 0 || cut === name.length - 1) continue;
    const found = asked(ctx, state, name.slice(0, cut), name.slice(cut + 1));
    if (found !== null) names[name] = found;
  }
  for (const [name, source] of Object.entries(state.sources)) {
    names[`state:${name}`] = stands(ctx, state, name);
    names[`age:${name}`] = age(least, source.least);
    names[`oldest:${name}`] = age(greatest, source.greatest);
  }
  for (const [name, done] of Object.entries(state.done)) {
    names[`since:${name}`] = age(least, done.least);
    names[`oldest-since:${name}`] = age(greatest, done.greatest);
  }
  for (const [name, chosen] of Object.entries(state.choices)) names[`choice:${name}`] = chosen;
  for (const [name, kept] of Object.entries(state.values)) if (kept.si !== null) names[name] = float(kept.si);
  for (const [name, column] of Object.entries(state.series)) series[name] = column.map(float);
  names.earths = state.earths.length;
  return { names, series };
}

/** @param {string} text */
function float(text) {
  return to_float(dec(text));
}

/** @param {number} total @param {string} mark */
function age(total, mark) {
  return (total - (clock.millis(mark) ?? 0)) / 1000;
}

/** @type {WeakMap<Context, {started: any, where: Scope}>} */
const GIVENS = new WeakMap();

/** Names and series of the givens; they never change in a run, so the last run's are kept.
 * @param {Context} ctx @param {any} started @returns {Scope} */
function givens(ctx, started) {
  const last = GIVENS.get(ctx);
  if (last && last.started === started) return last.where;
  const names = bare();
  const series = bare();
  const found = started ? started.givens : {};
  for (const given of ctx.sheet.givens) {
    const kept = Object.hasOwn(found, given.name) ? found[given.name] : null;
    if (kept === null || kept.texts.length === 0) continue;
    if (given.kind === "text") {
      names[given.name] = kept.texts[0];
      continue;
    }
    /** @type {any[]} */
    const numbers = kept.texts.map((/** @type {string} */ text) => number(text, given.unit)).filter((/** @type {any} */ n) => n !== null);
    if (given.kind === "levels") series[given.name] = numbers;
    else if (numbers.length) names[given.name] = numbers[0];
  }
  GIVENS.set(ctx, { started, where: { names, series } });
  return { names, series };
}

/** The SI value of a given as the register wrote it; null where it is no number.
 * @param {string} text @param {any} unit @returns {number | null} */
export function number(text, unit) {
  const found = typed(text);
  if (!(found instanceof Dec)) return null;
  const scale = unit || { factor: "1", offset: "0" };
  return to_float(add(mul(found, dec(scale.factor)), dec(scale.offset)));
}

/** @param {Context} ctx @param {State} state @param {string} head @param {string} rest @returns {any} */
function asked(ctx, state, head, rest) {
  if (head === "fact") return state.facts.includes(rest);
  if (head === "count") return count(ctx, state, rest);
  if (head === "in") {
    /** @type {string[][]} */
    const places = Object.values(state.hands);
    if (rest === "anywhere") return places.reduce((sum, people) => sum + people.length, 0);
    return Object.hasOwn(state.hands, rest) ? state.hands[rest].length : 0;
  }
  if (head === "lock") return state.locks.some((/** @type {any} */ lock) => lock.point === rest);
  if (head === "safe") return safe(ctx, state, rest);
  return null;
}

/** A counter's value now. @param {Context} ctx @param {State} state @param {string} name @returns {number} */
export function count(ctx, state, name) {
  const low = Object.hasOwn(ctx.sheet.counters, name) ? ctx.sheet.counters[name][0] : 0;
  return Object.hasOwn(state.counters, name) ? state.counters[name] : low;
}

/** Every isolable source that reaches the place is proved dead, and earthed where this sheet earths it.
 * @param {Context} ctx @param {State} state @param {string} place */
export function safe(ctx, state, place) {
  const places = state.started ? state.started.places : {};
  /** @type {string[]} */
  let reaching = Object.hasOwn(places, place) ? places[place] : null;
  if (reaching === null) {
    const known = Object.keys(ctx.sources).filter((name) => ctx.sources[name].isolable);
    reaching = [...known, .../** @type {string[][]} */ (Object.values(places)).flat()];
  }
  return reaching.every((name) => harmless(ctx, state, name));
}

/** The source cannot hurt hands that it reaches. @param {Context} ctx @param {State} state @param {string} name */
function harmless(ctx, state, name) {
  const followed = Object.hasOwn(FOLLOWS, name) ? FOLLOWS[name] : null;
  if (followed !== null && (name === "heat" || !ctx.sources[followed])) return true;
  if (name === "x_rays") return stands(ctx, state, name) === "off";
  const asked_for = followed ?? name;
  const held = Object.hasOwn(state.sources, asked_for) ? state.sources[asked_for] : null;
  return held !== null && (ctx.earthed.has(asked_for) ? ["earthed"] : DEAD).includes(held.state);
}

/** The state of a source; of what follows another, as far as that one tells it: X-rays are on while the beam supply is,
 * charge is stored from then until the beam supply is proved dead. @param {Context} ctx @param {State} state @param {string} name */
export function stands(ctx, state, name) {
  if (!Object.hasOwn(FOLLOWS, name) || ctx.sources[name]?.isolable) return state.sources[name].state;
  const beam = Object.hasOwn(state.sources, "beam_supply") ? state.sources.beam_supply.state : "unknown";
  if (name === "heat" || beam === "on") return name === "heat" ? "unknown" : "on";
  if (name === "x_rays") return LIVE.includes(beam) ? "unknown" : "off";
  return DEAD.includes(beam) ? "off" : "unknown";
}

/** The value of a tree: number, boolean, text, or a Fault. @param {Context} ctx @param {Scope} where @param {any} tree @returns {any} */
export function value(ctx, where, tree) {
  return evaluate(tree, where.names, where.series, ctx.sheet.formulas);
}

/** How the value of a tree of the sheet changes, in SI, with each name and each place of a column that it uses.
 * @param {Context} ctx @param {Scope} where @param {any} tree @returns {import("./slopes.js").Slopes | Fault} */
export function gradient(ctx, where, tree) {
  return gradient_of(tree, where.names, where.series, ctx.sheet.formulas).of;
}

/** Why a gate is closed, one reason for every condition that does not hold.
 * @param {Context} ctx @param {Scope} where @param {any[]} gate @param {string | null} [skip] @returns {Reason[]} */
export function reasons(ctx, where, gate, skip = null) {
  const found = [];
  for (const condition of gate) {
    if (skip !== null && speaks_of(condition.tree, skip)) continue;
    if (value(ctx, where, condition.tree) === true) continue;
    found.push({ says: `Opens when ${condition.says}.`, left: left(ctx, where, condition) });
  }
  return found;
}

/** @param {any} tree @param {string} step */
function speaks_of(tree, step) {
  const found = with_series(tree, mentioned(tree));
  return own(step).some((name) => found.has(name));
}

/** The names that a step's own answer gives. @param {string} step */
export function own(step) {
  return [step, `choice:${step}`, `since:${step}`, `oldest-since:${step}`, `count:again:${step}`];
}

/** @param {any} part @param {Set<string>} found @returns {Set<string>} */
function with_series(part, found) {
  if (Array.isArray(part)) for (const one of part) with_series(one, found);
  else if (is_object(part)) {
    if (typeof part.series === "string") found.add(part.series);
    for (const one of Object.values(part)) if (typeof one === "object") with_series(one, found);
  }
  return found;
}

/** Seconds until the condition's clock has counted enough; null where it has not started, or has no clock.
 * @param {Context} ctx @param {Scope} where @param {any} condition @returns {number | null} */
export function left(ctx, where, condition) {
  if (condition.clock === null || condition.least === null) return null;
  const counted = where.names[condition.clock];
  const least = value(ctx, where, condition.least);
  if (typeof counted !== "number" || typeof least !== "number") return null;
  return Math.max(0, least - counted);
}
