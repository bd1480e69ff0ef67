/**
 * The start of a run, the energy states declared at it, and those confirmed after a pause.
 * Twin of fieldkit/run/start.py.
 * @module
 */

import * as clock from "./clock.js";
import { Refused, checked } from "./command.js";
import * as names from "./names.js";
import { Refusal, compare, dec, typed } from "./values.js";

/** @typedef {import("./command.js").Given} Given */

/** States that a lock on the board goes with. */
const ISOLATED = Object.freeze(["locked", "proved", "earthed"]);

/** The body of the first event. @param {Given} given */
export function started(given) {
  const body = checked(given.kind, given.asked);
  if (given.facts.confirmed !== true) {
    const says = "counts only when a second person has entered it again and it has a photograph.";
    throw new Refused("nameplate-not-confirmed", `The nameplate of ${body.tube} ${says}`);
  }
  begins(given.ctx, body, given.by, given.now.wall);
  return body;
}

/** Refuses a start that the sheet does not allow: its crew, its givens, its instruments, the runs before it.
 * @param {names.Context} ctx @param {any} body @param {string} by @param {string} wall */
export function begins(ctx, body, by, wall) {
  const { sheet } = ctx;
  if (body.procedure !== sheet.procedure || body.edition !== sheet.edition) {
    throw new Refused("other-sheet", `This is ${sheet.procedure}, edition ${sheet.edition}. Open the run from its own sheet.`);
  }
  crew(sheet, body, by);
  for (const one of sheet.givens) {
    check_given(one, Object.hasOwn(body.givens, one.name) ? body.givens[one.name] : null);
  }
  meters(ctx, body);
  for (const one of sheet.after) after(one, body, wall);
}

/** @param {any} sheet @param {any} body @param {string} by */
function crew(sheet, body, by) {
  const known = new Set(body.people.map((/** @type {any} */ person) => person.id));
  const present = [...new Set(body.present)];
  if (present.some((p) => !known.has(p)) || !present.includes(by)) {
    throw new Refused("unknown-person", "Everyone present is named, and whoever records is among them.");
  }
  if (present.length < sheet.crew) {
    const alone = sheet.alone ? ` ${sheet.alone}` : "";
    throw new Refused("alone", `This procedure needs ${sheet.crew} people, and ${present.length} is named.${alone}`);
  }
}

/** @param {any} asked @param {any} found */
function check_given(asked, found) {
  const { name } = asked;
  if (found === null || found.texts.length === 0 || !found.texts.every((/** @type {string} */ t) => t.trim())) {
    throw new Refused("given-missing", `The register has no ${name}. Enter it there first.`);
  }
  if (asked.kind === "text") return;
  const symbol = asked.unit ? asked.unit.symbol : "";
  if (found.unit !== symbol) {
    const said = `${name} is in ${found.unit || "no unit"} in the register; this sheet needs ${symbol || "no unit"}.`;
    throw new Refused("given-unit", said);
  }
  for (const text of found.texts) {
    const number = typed(text);
    if (number instanceof Refusal) {
      throw new Refused("given-no-number", `${name} says '${text}' in the register. ${number.sentence}`);
    }
    if (asked.between === null) continue;
    const [low, high] = asked.between;
    if (compare(number, dec(low)) < 0 || compare(number, dec(high)) > 0) {
      const span = `${low} to ${high} ${symbol}`.trim();
      throw new Refused("given-range", `${name} is ${text} ${symbol} in the register; ${span} is plausible. Look at the nameplate.`);
    }
  }
}

/** Every meter that a step asks for is aboard. @param {names.Context} ctx @param {any} body */
function meters(ctx, body) {
  const aboard = new Set(body.instruments.map((/** @type {any} */ one) => one.id));
  for (const step of ctx.sheet.steps) {
    const meter = step.control.meter ?? step.control.tester ?? null;
    if (!meter) continue;
    const name = meter.instrument || (Object.hasOwn(body.meters, meter.role) ? body.meters[meter.role] : null);
    if (aboard.has(name)) continue;
    const asked = meter.instrument || meter.role;
    throw new Refused("no-instrument", `Step ${step.number} reads ${asked}, and the register has no such instrument.`);
  }
}

/** @param {any} asked @param {any} body @param {string} wall */
function after(asked, body, wall) {
  const now = clock.wall_ms(wall);
  for (const run of body.earlier) {
    if (run.procedure !== asked.procedure || run.outcome !== "done") continue;
    const ended = clock.wall_ms(run.ended);
    const within = asked.within === null ? null : clock.millis(asked.within) ?? 0;
    if (within === null || (now !== null && ended !== null && now - ended <= within)) return;
  }
  throw new Refused("needs-before", `Before this: ${asked.says}.`);
}

/** The energy states as found: against the sheet, and against the lock board. @param {Given} given */
export function declared(given) {
  const body = checked(given.kind, { ages: {}, ...given.asked, locks: found_locks(given) });
  agrees(given.ctx, given.state, names.scope(given.ctx, given.state, given.now), body);
  return body;
}

/** Refuses declared states that differ from the sheet or from the lock board.
 * @param {names.Context} ctx @param {names.State} state @param {names.Scope} where @param {any} body */
export function agrees(ctx, state, where, body) {
  if (!body.board_seen) throw new Refused("board-not-seen", "Look at the lock board first.");
  complete(ctx, body.states);
  for (const name of Object.keys(body.states)) {
    expected(ctx, where, name, body);
    board(ctx, state, name, body);
  }
}

/** Locks that are on the cabinet and not on the board, as named now: point, sources, lock, holder. @param {Given} given */
function found_locks(given) {
  const asked = Array.isArray(given.asked.locks) ? given.asked.locks : [];
  const { people } = given.state.started;
  /** @type {any[]} */
  const found = [];
  for (const one of asked) {
    if (typeof one !== "object" || one === null || Array.isArray(one)) {
      throw new Refused("bad-command", "A lock is named by its point, sources, number and holder.");
    }
    const { point, sources, lock, tag, holder, holder_name } = one;
    const person = people.find((/** @type {any} */ p) => p.id === holder);
    const known = person ? person.name : holder_name;
    if (![point, lock].every((text) => typeof text === "string" && text.trim()) || !known) {
      throw new Refused("lock-unnamed", "Name the point, the number and the holder of every lock that is on.");
    }
    if ([...given.state.locks, ...found].some((other) => other.lock === lock)) {
      throw new Refused("lock-in-use", `Lock ${lock} is on the board already. Read its number again.`);
    }
    const whose = { holder: holder || "", holder_name: known, run: given.state.run, since: given.now.wall };
    found.push({ point, sources: sources ?? null, lock, tag: tag || "", ...whose });
  }
  return found;
}

/** @param {names.Context} ctx @param {Record<string, string>} states */
function complete(ctx, states) {
  for (const name of Object.keys(states)) {
    if (!ctx.sources[name]) throw new Refused("unknown-source", `The sheet knows no source '${name}'.`);
  }
  for (const [name, source] of Object.entries(ctx.sources)) {
    if ((source.isolable || Object.hasOwn(ctx.sheet.start, name)) && !Object.hasOwn(states, name)) {
      throw new Refused("states-missing", `Say how ${source.title} is.`);
    }
  }
}

/** @param {names.Context} ctx @param {names.Scope} where @param {string} name @param {any} body */
function expected(ctx, where, name, body) {
  const asked = Object.hasOwn(ctx.sheet.start, name) ? ctx.sheet.start[name] : null;
  if (asked === null) return;
  const { title } = ctx.sources[name];
  const allowed = [asked.state, ...asked.accepts];
  if (!allowed.includes(body.states[name])) {
    const begins = `this procedure begins with it ${allowed.join(" or ")}`;
    throw new Refused("state-differs", `${title} is ${body.states[name]}; ${begins}. Nothing opens until it is so.`);
  }
  if (asked.least === null || body.states[name] !== asked.state) return;
  const least = names.value(ctx, where, asked.least);
  const age = clock.millis(Object.hasOwn(body.ages, name) ? body.ages[name] : "0");
  if (age === null || typeof least !== "number" || age / 1000 < least) {
    const need = typeof least === "number" ? clock.spoken(clock.ceil_ms(least)) : "longer";
    throw new Refused("age-too-short", `${title} must have been ${asked.state} for ${need}.`);
  }
}

/** The lock board, with the locks that were found, and what is declared say the same; no proof is older than the run.
 * @param {names.Context} ctx @param {names.State} run @param {string} name @param {any} body */
function board(ctx, run, name, body) {
  const { title } = ctx.sources[name];
  const state = body.states[name];
  if (state === "proved") {
    throw new Refused("proof-expired", `${title} is locked at best: a proof counts only in the run that made it.`);
  }
  const locks = [...run.locks, ...body.locks].filter((/** @type {any} */ lock) => lock.sources.includes(name));
  const earths = run.earths.filter((/** @type {any} */ earth) => earth.source === name);
  if (locks.length && !ISOLATED.includes(state)) {
    const told = locks.map(
      (/** @type {any} */ one) => `lock ${one.lock} on ${one.point}, held by ${one.holder_name || one.holder}`,
    );
    throw new Refused("locked-on-board", `${title} is declared ${state}, and the board shows ${told.join("; ")}.`);
  }
  if (!locks.length && ISOLATED.includes(state)) {
    const says = `${title} is declared ${state}, and the board shows no lock for it. Name the lock and its holder.`;
    throw new Refused("no-lock-on-board", says);
  }
  if (earths.length && state !== "earthed") {
    const sticks = earths.map((/** @type {any} */ one) => one.stick).join(", ");
    throw new Refused("earth-on-board", `${title} is declared ${state}, and the board shows stick ${sticks} on it.`);
  }
  if (!earths.length && state === "earthed") {
    throw new Refused("no-earth-on-board", `${title} is declared earthed, and the board shows no stick on it.`);
  }
}

/** The energy states after a pause. A state that differs is recorded, and stops the run. @param {Given} given */
export function confirmed(given) {
  const body = checked(given.kind, { unbroken: [], ...given.asked });
  goes_on(given.ctx, given.state, body);
  return body;
}

/** Refuses confirmed states that leave a source out, keep a proof through the pause, or claim what did not hold.
 * @param {names.Context} ctx @param {names.State} state @param {any} body */
export function goes_on(ctx, state, body) {
  complete(ctx, body.states);
  for (const [name, to] of Object.entries(body.states)) {
    if (to === "proved" && state.sources[name].state === "locked") {
      const { title } = ctx.sources[name];
      throw new Refused("proof-expired", `The proof that ${title} is dead ended with the pause. It is locked; prove it again.`);
    }
  }
  for (const name of body.unbroken) {
    const kept = Object.hasOwn(state.sources, name) ? state.sources[name] : null;
    if (kept === null || body.states[name] !== kept.state) {
      throw new Refused("not-unbroken", `${name} did not hold through the pause as it was.`);
    }
  }
}
