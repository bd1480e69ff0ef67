/**
 * The rules for people, locks and readings that a command must keep: one function an answer.
 * Twin of fieldkit/run/rules.py.
 * @module
 */

import * as answers from "./answers.js";
import { Refused } from "./command.js";
import * as names from "./names.js";
import * as ranges from "./ranges.js";
import * as readings from "./readings.js";
import { Refusal, compare, dec, typed } from "./values.js";

/** @typedef {import("./command.js").Given} Given */
/** @typedef {import("./names.js").State} State */

/** The three checks before the lock of somebody else is taken off. */
export const CHECKS = Object.freeze(["not on site", "tried to reach", "told before return"]);

/** @param {State} state @param {string} person @returns {string} */
export function name_of(state, person) {
  const found = answers.person(state, person);
  return found ? found.name : person;
}

/** The person, as this run knows them. @param {State} state @param {string} person */
export function known(state, person) {
  if (answers.person(state, person) === null) throw new Refused("unknown-person", "This run knows no such person.");
  return person;
}

/** The text is a number, and the meter can show it. @param {string} text @param {any} meter @param {string} unit */
export function number(text, meter, unit) {
  const found = typed(text);
  if (found instanceof Refusal) throw new Refused(found.code, found.sentence);
  if (meter === null || meter.unit !== unit) return;
  for (const [side, sign, word] of /** @type {[string, number, string][]} */ ([["low", 1, "from"], ["high", -1, "up to"]])) {
    if (meter[side] !== null && compare(found, dec(meter[side])) * sign < 0) {
      const [on, what] = meter.range ? [` on its ${meter.range} range`, "range"] : ["", "meter"];
      const says = `${meter.id} reads ${word} ${meter[side]} ${unit}${on}. Read it again, or name the ${what} that was used.`;
      throw new Refused("outside-range", says);
    }
  }
}

/** Refuses a range that the instrument has not, or that reads in another unit while others read in the step's.
 * @param {State} state @param {any} control @param {string | null} used @param {string} name */
export function in_range(state, control, used, name) {
  const one = readings.aboard(state, used);
  if (one === null) return;
  const unit = control.unit.symbol;
  const fitting = readings.usable(one, unit).map((found) => found.name);
  const found = readings.range_of(one, name);
  const told = `Name one of: ${fitting.join(", ")}.`;
  if (found === null) {
    throw new Refused("unknown-range", `${used} ${name ? `has no ${name} range` : "has more than one range"}. ${told}`);
  }
  if (!fitting.includes(found.name)) {
    const says = `The ${found.name} range of ${used} reads in ${found.unit || "plain numbers"}, the step in ${unit || "plain numbers"}.`;
    throw new Refused("wrong-range", `${says} ${told}`);
  }
}

/** Refuses an overdue meter where the step takes none. @param {any} control @param {any} meter @param {string} wall */
export function in_date(control, meter, wall) {
  const says = ranges.overdue(readings.asked_of(control), meter, wall);
  if (says) throw new Refused("overdue", says);
}

/** What a field of a row says now; null where it has no such field. @param {any} row @param {string} field */
export function row_text(row, field) {
  if (row.kind === "proved") {
    const found = row.points.find((/** @type {any} */ point) => point.field === field);
    return found ? found.text : null;
  }
  return field === (row.kind === "locked" ? "lock" : "text") ? row.text : null;
}

/** A fail is accepted by a supervisor who records nothing in this run. @param {Given} given */
export function deviation(given) {
  given.need("reason", "reason-needed", "Say why the reading is accepted.");
  given.need("under", "under-needed", "Say under whose authority: a letter, a rule of the station.");
  const who = given.need("authority", "authority-needed", "A supervisor allows this, with their own passphrase.");
  known(given.state, who);
  const name = name_of(given.state, who);
  if (!answers.has_role(given.state, who, "supervisor")) throw new Refused("not-supervisor", `${name} is no supervisor.`);
  if (given.state.recorders.includes(who)) {
    throw new Refused("recorder-allows", `${name} records in this run, and cannot allow its deviations.`);
  }
}

/** Refuses to let somebody record who is unknown, or who allowed a deviation of this run. @param {State} state @param {string} who */
export function records(state, who) {
  known(state, who);
  if (state.signatures.some((/** @type {any} */ one) => one.person === who && one.meaning === "allowed")) {
    throw new Refused("allowed-before", `${name_of(state, who)} allowed a deviation in this run, and cannot record in it.`);
  }
}

/** Refuses the release of a hold point by its recorder, or by somebody who does not work at transmitters.
 * @param {State} state @param {any} control @param {string} who */
export function releases(state, control, who) {
  known(state, who);
  const name = name_of(state, who);
  if (who === state.recorder) throw new Refused("same-person", `${name} records. Another person releases this hold point.`);
  if (control.by === "supervisor" && !answers.has_role(state, who, "supervisor")) {
    throw new Refused("not-supervisor", `${name} is no supervisor.`);
  }
  if (!["technician", "supervisor"].some((role) => answers.has_role(state, who, role))) {
    throw new Refused("no-role", `${name} is neither technician nor supervisor.`);
  }
}

/** Refuses a proof that was not made with the tester that the step names: a panel meter never proves.
 * @param {State} state @param {any} control @param {string} used */
export function tester(state, control, used) {
  const meant = readings.meter_of(state, control.tester);
  if (meant !== null && used !== meant) {
    throw new Refused("other-tester", `This proof is made with ${meant}, proved before and after; no other meter proves.`);
  }
}

/** At the end everyone is out, and every source is as the procedure leaves it.
 * @param {import("./names.js").Context} ctx @param {State} state */
export function end_states(ctx, state) {
  const inside = Object.values(state.hands).flat();
  if (inside.length) throw new Refused("people-in", `Not counted out yet: ${inside.join(", ")}.`);
  for (const [name, allowed] of Object.entries(ctx.sheet.ends)) {
    const now = Object.hasOwn(state.sources, name) ? state.sources[name].state : null;
    if (allowed.includes(now)) continue;
    const title = ctx.sources[name] ? ctx.sources[name].title : name;
    throw new Refused("end-state", `At the end ${title} is ${allowed.join(" or ")}; it is ${now}.`);
  }
}

/** The instrument that was used, on its range: those named, else what the register means and what is proposed.
 * @param {Given} given @param {any} step @returns {any} */
function meter_used(given, step) {
  const { control } = step;
  const asked = readings.asked_of(control);
  const named = given.text("instrument") || readings.meter_of(given.state, asked);
  if (readings.aboard(given.state, named) === null) {
    if (!named && !asked) return null;
    const wanted = named || (asked || {}).role || "";
    throw new Refused("no-instrument", `This run carries no instrument ${wanted}. Name the one that was used.`);
  }
  const chosen = given.text("range");
  if (chosen) in_range(given.state, control, named, chosen);
  const where = names.scope(given.ctx, given.state, given.now);
  return ranges.in_use(given.ctx, given.state, where, step, { instrument: named, range: chosen });
}

/** @param {any} meter @returns {string} */
function range_name(meter) {
  return (meter && meter.range) || "";
}

/** @param {any} list @param {string} key @param {string} value @returns {Map<any, any>} */
function pairs(list, key, value) {
  const found = new Map();
  if (Array.isArray(list)) {
    for (const one of list) {
      if (typeof one === "object" && one !== null && !Array.isArray(one)) found.set(one[key], one[value]);
    }
  }
  return found;
}

/** Somebody else's lock: the three checks, each with how it was made, a second person, and a supervisor of the two.
 * @param {State} state @param {any} lock @param {string} who @param {any} asked @param {string | null} second */
export function exception(state, lock, who, asked, second) {
  const made = pairs(asked, "name", "how");
  const lacking = CHECKS.filter((name) => !String(made.get(name) || "").trim());
  const holder = lock.holder_name || lock.holder;
  if (lacking.length) {
    const says = `Lock ${lock.lock} is held by ${holder}, who takes it off. Otherwise three checks: ${lacking.join(", ")}.`;
    throw new Refused("not-holder", says);
  }
  if (!second) throw new Refused("second-needed", "A second person is needed to take off this lock.");
  known(state, who);
  known(state, second);
  if (second === who || second === lock.holder) {
    throw new Refused("second-needed", "The second person is neither the holder nor who takes the lock off.");
  }
  if (![who, second].some((one) => answers.has_role(state, one, "supervisor"))) {
    throw new Refused("supervisor-needed", `A supervisor takes part when the lock of ${holder} is taken off.`);
  }
  return { checks: CHECKS.map((name) => ({ name, how: made.get(name) })), second };
}

/** Each gives the event's body but for step and move. @type {Record<string, (given: Given, step: any) => any>} */
export const ANSWERS = {
  acknowledged: (given) => {
    const heard = Array.isArray(given.asked.heard) ? given.asked.heard : [];
    const missing = given.state.started.present.filter((/** @type {string} */ p) => !heard.includes(p));
    if (missing.length) {
      const told = missing.map((/** @type {string} */ p) => name_of(given.state, p)).join(", ");
      throw new Refused("not-heard", `Read it aloud to everyone present. Not named: ${told}.`);
    }
    return { heard };
  },
  confirmed: () => ({}),
  read: (given, step) => {
    const unit = step.control.unit.symbol;
    if ((given.asked.unit ?? unit) !== unit) throw new Refused("unit", `This step is read in ${unit || "plain numbers"}.`);
    const meter = meter_used(given, step);
    in_date(step.control, meter, given.now.wall);
    const { text } = given.asked;
    number(typeof text === "string" ? text : "", meter, unit);
    return { text, unit, instrument: meter ? meter.id : null, range: range_name(meter) };
  },
  proved: (given, step) => {
    const { control } = step;
    const meter = meter_used(given, step);
    tester(given.state, control, meter ? meter.id : "");
    in_date(control, meter, given.now.wall);
    const written = pairs(given.asked.points, "name", "text");
    const { before = null, after = null } = given.asked;
    for (const [field, title] of readings.proof_fields(control)) {
      const text = field === "before" ? before : field === "after" ? after : written.get(field.slice(7));
      if (typeof text !== "string" || !text) throw new Refused("point-missing", `Nothing is written for: ${title}.`);
      number(text, meter, control.unit.symbol);
    }
    const points = control.points.map((/** @type {any} */ p) => ({ name: p.name, text: written.get(p.name) }));
    return { instrument: meter ? meter.id : "", range: range_name(meter), before, after, points };
  },
  locked: (given, step) => {
    const { state } = given;
    const lock = given.need("lock", "nothing-typed", "Write the number of the lock.");
    if (state.locks.some((/** @type {any} */ one) => one.lock === lock)) {
      throw new Refused("lock-in-use", `Lock ${lock} is on the board already. Read its number again.`);
    }
    const holder = known(state, given.text("holder") || state.recorder);
    return { point: step.control.point, lock, tag: given.text("tag"), holder };
  },
  unlocked: (given, step) => {
    const { state } = given;
    const { point } = step.control;
    const on = state.locks.filter((/** @type {any} */ one) => one.point === point);
    const named = given.text("lock");
    const lock = named ? on.find((/** @type {any} */ one) => one.lock === named) : on.length === 1 ? on[0] : undefined;
    if (!lock) {
      const numbers = on.map((/** @type {any} */ one) => one.lock).join(", ");
      throw new Refused("no-such-lock", on.length ? `On ${point}: ${numbers}. Say which lock comes off.` : `No lock is on ${point}.`);
    }
    const who = known(state, given.text("who") || state.recorder);
    const body = { point, lock: lock.lock, who };
    if (who === lock.holder) return body;
    return { ...body, ...exception(state, lock, who, given.asked.checks, given.text("second")) };
  },
  earthed: (given, step) => {
    const { stick, point } = step.control;
    if (given.state.earths.some((/** @type {any} */ one) => one.stick === stick)) {
      throw new Refused("stick-on", `Stick ${stick} is on already. Lift it where it is first.`);
    }
    return { stick, point };
  },
  lifted: (given, step) => {
    const { stick, point } = step.control;
    if (!given.state.earths.some((/** @type {any} */ one) => one.stick === stick)) {
      throw new Refused("stick-not-on", `Stick ${stick} is not on the board. Count the sticks.`);
    }
    return { stick, point };
  },
  chosen: (given, step) => {
    const { value } = given.asked;
    if (!step.control.options.some((/** @type {any} */ one) => one.value === value)) {
      throw new Refused("unknown-option", "Choose one of the options.");
    }
    return { value };
  },
  released: (given, step) => {
    const { state } = given;
    const { control } = step;
    const who = given.need("who", "second-needed", "Another person releases this, with their own passphrase.");
    releases(state, control, who);
    return { who, statement: control.statement };
  },
  pictured: (given) => {
    const { step, move, ...rest } = given.asked;
    return rest;
  },
  remarked: (given, step) => {
    const text = given.text("text");
    if (step.control.required && !text) throw new Refused("nothing-typed", "A remark is asked for here. Write it.");
    return { text };
  },
  "worked-out": (given, step) => {
    const where = names.scope(given.ctx, given.state, given.now);
    return { value: readings.result_text(given.ctx, where, step.control)[0] };
  },
  waited: () => ({}),
  "people-counted": (given, step) => {
    const { place, way } = step.control;
    const asked = Array.isArray(given.asked.names) ? given.asked.names : [];
    const named = asked.filter((n) => typeof n === "string" && n.trim()).map((n) => n.trim());
    if (way === "in" && named.length === 0) {
      throw new Refused("nobody-named", `Name everyone who puts hands in at the ${place}.`);
    }
    /** @type {string[]} */
    const inside = Object.hasOwn(given.state.hands, place) ? given.state.hands[place] : [];
    const left = way === "out" ? inside.filter((n) => !named.includes(n)) : [];
    if (left.length) {
      throw new Refused("people-left", `Not counted out of the ${place}: ${left.join(", ")}. Search before you go on.`);
    }
    return { place, way, names: named };
  },
};
