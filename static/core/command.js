/**
 * One command and what it is decided from. Twin of fieldkit/run/command.py.
 * @module
 */

import { read_body } from "./events.js";

/** @typedef {import("./names.js").Context} Context */
/** @typedef {import("./names.js").State} State */

/** Not allowed now: a stable code and a sentence for the person. */
export class Refused extends Error {
  /** @param {string} code @param {string} says */
  constructor(code, says) {
    super(says);
    this.code = code;
    this.says = says;
  }
}

/** A command with what it is decided from. */
export class Given {
  /** @param {Context} ctx @param {State} state @param {string} kind @param {Record<string, any>} asked
   * @param {import("./clock.js").At} now @param {string} by @param {Record<string, any>} facts */
  constructor(ctx, state, kind, asked, now, by, facts) {
    this.ctx = ctx;
    this.state = state;
    this.kind = kind;
    this.asked = asked;
    this.now = now;
    this.by = by;
    this.facts = facts;
  }

  /** A text of the command without space around it; empty where there is none. @param {string} key @returns {string} */
  text(key) {
    const found = this.asked[key];
    return typeof found === "string" ? found.trim() : "";
  }

  /** @param {string} key @param {string} code @param {string} says */
  need(key, code, says) {
    const found = this.text(key);
    if (!found) throw new Refused(code, says);
    return found;
  }
}

/** The body with its defaults. Throws Refused bad-command. @param {string} kind @param {any} body @returns {any} */
export function checked(kind, body) {
  const found = read_body(kind, body);
  if ("refused" in found) throw new Refused("bad-command", `The command ${kind} is damaged.`);
  return found.body;
}
