/**
 * How a formula's answer changes with each thing that it is made of: the same tree, differentiated as it is evaluated.
 *
 * Twin of fieldkit/formula/slopes.py, rule by rule; its docstring says what is taken where two branches meet. A gradient
 * is {value, of}: `of` gives derivatives in SI by name ("x") and by place in a column ("x[3]"), or is a Fault "domain"
 * where the value changes without bound. No DOM, no IO.
 */

import { Making, prepare as prepare_plain } from "./evaluate.js";
import { FUNCTIONS } from "./functions.js";
import * as nodes from "./nodes.js";
import * as rates from "./rates.js";
import { Fault, number } from "./values.js";

/** @typedef {rates.Slopes} Slopes */
/** @typedef {rates.Look} Look */
/** @typedef {{value: any, of: Slopes | Fault}} Gradient */
/** @typedef {{gradient: (names?: any, series?: any) => Gradient}} Prepared */

const NOTHING = Object.freeze({});
const STEEP = new Fault("domain", "The result changes without bound at this value, so it has no uncertainty.");
const COMPARED = ["lt", "le", "gt", "ge"];

/** Trees made ready, by the tree and the formulas. @type {WeakMap<object, WeakMap<object, Prepared>>} */
const KEPT = new WeakMap();

/**
 * The gradient of `tree`; what is made ready is kept, so tree and formulas must never be changed.
 * @param {any} tree @param {Record<string, any>} [names] @param {Record<string, number[]>} [series] @param {Record<string, any>} [formulas]
 * @returns {Gradient}
 */
export function gradient(tree, names = NOTHING, series = NOTHING, formulas = NOTHING) {
  if (!nodes.is_block(tree)) return { value: nodes.bad_tree(), of: nodes.bad_tree() };
  const aboard = nodes.is_block(formulas) ? formulas : NOTHING;
  let kept = KEPT.get(tree);
  if (kept === undefined) KEPT.set(tree, (kept = new WeakMap()));
  let ready = kept.get(aboard);
  if (ready === undefined) kept.set(aboard, (ready = prepare(tree, aboard)));
  return ready.gradient(names, series);
}

/**
 * `tree` made ready to be differentiated, with the formulas that it calls. Never throws, whatever the tree is.
 * @param {any} tree @param {Record<string, any>} [formulas] @returns {Prepared}
 */
export function prepare(tree, formulas = NOTHING) {
  const plain = prepare_plain(tree, formulas);
  const first = plain.value();
  if (first instanceof Fault && first.code === "too-deep") {
    // so whatever is walked below ends
    return { gradient: () => ({ value: first, of: first }) };
  }
  const look = new Slope(formulas).whole(tree);
  return {
    gradient(names = NOTHING, series = NOTHING) {
      try {
        const { v, slopes } = look([names, series], null);
        if (!(v instanceof Fault)) return { value: v, of: new Map(slopes) };
      } catch (error) {
        if (error !== rates.STEEP && error !== rates.LOST) throw error;
      }
      const value = plain.value(names, series);
      return { value, of: value instanceof Fault ? value : STEEP };
    },
  };
}

/**
 * Makes one tree ready, and once each the formulas that it calls; `plain` makes what is not differentiated. A part in
 * which nothing changes with what names mean is null, until the part above it needs it made ready.
 */
class Slope {
  /** @param {Record<string, any>} formulas */
  constructor(formulas) {
    this.formulas = formulas;
    this.plain = new Making(formulas);
    /** @type {Map<string, Look>} */
    this.bodies = new Map();
  }

  /** A plain part, ready to ask; it may give a Fault. @param {any} tree @returns {(e: any[]) => any} */
  ask(tree) {
    this.plain.size = 0; // the whole has been counted
    const run = this.plain.part(tree, 0)?.run ?? (() => nodes.bad_tree());
    if (this.plain.arguments !== null && this.plain.arguments.length > 4) return (e) => run(e, null, null, null);
    return (e) => run(e[0], e[1], e[2], e[3]);
  }

  /** @param {any} tree @returns {Look} */
  whole(tree) {
    return this.node(tree) ?? this.flat(tree);
  }

  /** @param {any} tree @returns {Look} */
  flat(tree) {
    const ask = this.ask(tree);
    return (e) => ({ v: ask(e), slopes: rates.NONE });
  }

  /** @param {any} tree @returns {Look | null} */
  node(tree) {
    if (!nodes.is_block(tree) || ["number", "text", "flag"].some((key) => nodes.has(tree, key))) return null;
    if (nodes.has(tree, "name")) return this.named(tree.name);
    if (nodes.has(tree, "table")) return this.table(tree.table);
    if (nodes.has(tree, "call") && Array.isArray(tree.of)) return this.call(tree.call, tree.of);
    return null;
  }

  /** @param {any} name @returns {Look | null} */
  named(name) {
    if (typeof name !== "string") return null;
    if (this.plain.arguments !== null) {
      const place = this.plain.arguments.lastIndexOf(name);
      return place === -1 ? null : (e, g) => ({ v: e[place], slopes: g === null ? rates.NONE : g[place] });
    }
    const [run, own] = [nodes.named(name).run, new Map([[name, 1]])];
    return (e) => {
      const v = run(e[0], e[1], null, null);
      return { v, slopes: typeof v === "number" ? own : rates.NONE };
    };
  }

  /** All of them, or null where nothing changes in any. @param {any[]} of @returns {Look[] | null} */
  parts(of) {
    const found = of.map((tree) => this.node(tree));
    return found.every((node) => node === null) ? null : found.map((node, k) => node ?? this.flat(of[k]));
  }

  /** @param {any} name @param {any[]} of @returns {Look | null} */
  call(name, of) {
    const entry = typeof name === "string" ? FUNCTIONS.get(name) : undefined;
    if (!entry) return this.library(name, of);
    if (of.length < entry.least || (entry.most !== null && of.length > entry.most)) return null;
    if (name === "if") return this.choice(of);
    if (name === "holds") return this.held(of);
    if (entry.column) return this.on_column(name, entry, of);
    const make = rates.MAKERS.get(name);
    const parts = make === undefined ? null : this.parts(of);
    return make === undefined || parts === null ? null : make(...parts.map(sure));
  }

  /** @param {any[]} of @returns {Look | null} */
  choice(of) {
    const parts = this.parts(of.slice(1));
    if (parts === null) return null;
    const [condition, meets] = [this.ask(of[0]), this.meets(of[0])];
    const [held, other] = parts;
    return (e, g) => {
      const flag = condition(e);
      if (typeof flag !== "boolean") throw rates.LOST;
      const found = flag ? held(e, g) : other(e, g);
      return meets !== null && meets(e) ? met(found, flag ? other : held, e, g) : found;
    };
  }

  /**
   * Whether the two sides of a comparison are equal, so that both branches of an `if` end here.
   * @param {any} condition @returns {((e: any[]) => boolean) | null}
   */
  meets(condition) {
    if (!nodes.is_block(condition) || !nodes.has(condition, "call") || !COMPARED.includes(condition.call)) return null;
    if (!Array.isArray(condition.of) || condition.of.length !== 2) return null;
    const [left, right] = condition.of.map((/** @type {any} */ tree) => this.ask(tree));
    return (e) => left(e) === right(e);
  }

  /** @param {any[]} of @returns {Look | null} */
  held(of) {
    const part = this.node(of[2]);
    if (part === null) return null;
    const condition = this.ask(of[0]);
    return (e, g) => {
      if (condition(e) !== true) throw rates.LOST;
      return part(e, g);
    };
  }

  /** A function of a column: its index is not differentiated. @param {string} name @param {import("./functions.js").Entry} entry @param {any[]} of @returns {Look | null} */
  on_column(name, entry, of) {
    const series = nodes.is_block(of[0]) && nodes.has(of[0], "series") ? of[0].series : null;
    const rule = rates.COLUMNS.get(name);
    if (typeof series !== "string" || this.plain.arguments !== null || entry.make === null || !rule) return null;
    const indexes = of.slice(1).map((part) => this.ask(part));
    const column = nodes.column(series);
    const run = entry.make(...of.map((_, k) => rates.place(k)));
    return (e) => {
      const given = [column(e[0], e[1], null, null), ...indexes.map((index) => index(e))];
      const v = rates.sure(run(given, null, null, null));
      return { v, slopes: new Map(rule(given[0], v, given.slice(1)).map(([k, d]) => [`${series}[${k}]`, d])) };
    };
  }

  /** @param {any} name @param {any[]} of @returns {Look | null} */
  library(name, of) {
    const formula = typeof name === "string" && nodes.has(this.formulas, name) ? this.formulas[name] : null;
    const wanted = nodes.aspect(formula, "arguments");
    if (!Array.isArray(wanted) || wanted.length !== of.length) return null;
    const names = wanted.map((argument) => nodes.aspect(argument, "name"));
    const parts = names.every((one) => typeof one === "string") ? this.parts(of) : null;
    if (parts === null) return null;
    const body = this.body(name, formula, names);
    const checks = wanted.map((argument) =>
      nodes.ranged(name, argument, { run: rates.given, fixed: false, height: 0, name: null }));
    return (e, g) => {
      const found = parts.map((part) => part(e, g));
      const given = found.map((one, k) => rates.sure(checks[k](one.v, null, null, null)));
      return body(given, found.map((one) => one.slopes));
    };
  }

  /** @param {string} name @param {any} formula @param {string[]} names @returns {Look} */
  body(name, formula, names) {
    const kept = this.bodies.get(name);
    if (kept !== undefined) return kept;
    const outer = this.plain.arguments;
    this.plain.arguments = names;
    const made = this.whole(nodes.aspect(formula, "tree"));
    this.plain.arguments = outer;
    this.bodies.set(name, made);
    return made;
  }

  /** @param {any} table @returns {Look | null} */
  table(table) {
    if (!nodes.is_block(table) || !Array.isArray(table.x) || !Array.isArray(table.y)) return null;
    const at = this.node(table.of);
    if (at === null) return null;
    const [inner, run, slope] = [sure(at), nodes.table(table, rates.given), slope_of(table)];
    return (e, g) => {
      const { v: x, slopes } = inner(e, g);
      const v = rates.sure(run(x, null, null, null));
      return { v, slopes: slopes.size ? rates.scaled(slope(x), slopes) : rates.NONE };
    };
  }
}

/** The part as a number. @param {Look} look @returns {Look} */
function sure(look) {
  return (e, g) => {
    const found = look(e, g);
    if (typeof found.v !== "number") throw rates.LOST;
    return found;
  };
}

/** Where two branches meet: the steeper slopes, if the branch not taken gives the same value. @param {rates.Found} found @param {Look} left @param {any[]} e @param {Slopes[] | null} g @returns {rates.Found} */
function met(found, left, e, g) {
  try {
    const { v, slopes } = left(e, g);
    return v === found.v ? { v, slopes: rates.steeper(found.slopes, slopes) } : found;
  } catch (error) {
    if (error === rates.LOST) return found;
    throw error;
  }
}

/** The slope of a table at a place in it, the steeper one at a node; a damaged table is never asked. @param {any} table @returns {(at: number) => number} */
function slope_of(table) {
  const [xs, ys] = [table.x, table.y].map((column) =>
    column.map((/** @type {any} */ t) => (typeof t === "string" ? number(t) : null)).filter((/** @type {any} */ v) => typeof v === "number"));
  if (xs.length !== ys.length || xs.some((/** @type {number} */ x, /** @type {number} */ k) => k > 0 && x <= xs[k - 1])) return () => 0;
  return (at) => {
    let found = 0;
    for (let k = 0; k + 1 < xs.length; k++) {
      if (xs[k] > at || at > xs[k + 1]) continue;
      const slope = (ys[k + 1] - ys[k]) / (xs[k + 1] - xs[k]);
      if (Math.abs(slope) > Math.abs(found)) found = slope;
    }
    return found;
  };
}
