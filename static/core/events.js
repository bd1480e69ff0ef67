/**
 * Events on the tablet: reading one from its text, and the envelope of the next.
 * Twin of fieldkit/run/events.py; BODIES spells its models (a sweep test compares them, and the samples in
 * tests/vectors/events/ must be read by both). To add an event: one line in BODIES, one arm in state.js.
 *
 * A field is: "text", "count", "flag", "map" (text to text), "texts", "lists" (name to texts), a word among "a|b",
 * a nested object, or [one of these] for a list. Wrapped in {value, or} it may be left out and is then `or`;
 * {value, or: null} may also be null.
 * @module
 */

/** @typedef {{seq: number, kind: string, by: string, at: import("./clock.js").At, run: string, chain: string, prev: string, sha256: string, body: any}} Event */
/** @typedef {{refused: {code: string, says: string}}} Refused */

export const VERSION = 1;

/** @param {any} value @param {any} or */
const maybe = (value, or) => ({ value, or });
const STATE = "off|on|standby|cut-off|locked|proved|earthed|unknown";
const STATES = { each: STATE };
const NOTE = maybe("text", "");
const MOVE = maybe("text", null);
const GIVEN = { texts: "texts", unit: NOTE, source: "text" };
const PERSON = { id: "text", name: "text", roles: "texts" };
const RANGE = {
  name: "text", unit: "text", low: maybe("text", null), high: maybe("text", null), resolution: "text",
  percent: maybe("text", "0"), digits: maybe("text", "0"), percent_of_range: maybe("text", "0"),
};
/** Under this key a rule says how an older form of its object is read as this one. */
const OLDER = Symbol("older form");
const FLAT = ["unit", "low", "high", "resolution", "percent", "digits"];
const INSTRUMENT = {
  id: "text", reads: "text", certificate: NOTE, calibrated_on: maybe("text", null), interval_months: maybe("count", null),
  calibrated_to: maybe("text", null), temperature: maybe({ low: "text", high: "text" }, null), ranges: [RANGE],
  [OLDER]: with_ranges,
};
const LOCK = {
  point: "text", sources: "texts", lock: "text", tag: NOTE, holder: "text", holder_name: NOTE, run: "text", since: "text",
};
const EARTH = { stick: "text", point: "text", source: "text", run: "text", since: "text" };
const EARLIER = { procedure: "text", run: "text", ended: "text", outcome: "text" };
const TABLET = { device: "text", name: "text", installed: "flag", persisted: "flag", probe: "text", agent: NOTE };
const CHECK = { name: "not on site|tried to reach|told before return", how: "text" };

/** @type {Record<string, Record<string, any>>} */
export const BODIES = {
  "run-started": {
    sheet: "text", procedure: "text", edition: "count", site: "text", site_name: "text", cabinet: "text", tube: "text",
    givens: { each: GIVEN }, meters: "map", instruments: [INSTRUMENT], places: "lists", people: [PERSON], present: "texts",
    locks: maybe([LOCK], []), earths: maybe([EARTH], []), earlier: maybe([EARLIER], []), tablet: TABLET, kit: "text",
    rehearsal: maybe("flag", false),
  },
  "states-declared": { states: STATES, ages: maybe("map", {}), board_seen: "flag", locks: maybe([LOCK], []) },
  acknowledged: { step: "text", move: MOVE, heard: "texts" },
  confirmed: { step: "text", move: MOVE },
  read: { step: "text", move: MOVE, text: "text", unit: "text", instrument: maybe("text", null), range: NOTE },
  proved: {
    step: "text", move: MOVE, instrument: "text", before: "text", points: [{ name: "text", text: "text" }], after: "text",
    range: NOTE,
  },
  locked: { step: "text", move: MOVE, point: "text", lock: "text", tag: "text", holder: "text" },
  unlocked: {
    step: "text", move: MOVE, point: "text", lock: "text", who: "text", checks: maybe([CHECK], []), second: maybe("text", null),
  },
  earthed: { step: "text", move: MOVE, stick: "text", point: "text" },
  lifted: { step: "text", move: MOVE, stick: "text", point: "text" },
  chosen: { step: "text", move: MOVE, value: "text" },
  released: { step: "text", move: MOVE, who: "text", statement: "text" },
  pictured: {
    step: "text", move: MOVE, sha256: "text", media: "image/jpeg", width: "count", height: "count", size: "count", note: NOTE,
  },
  remarked: { step: "text", move: MOVE, text: "text" },
  "worked-out": { step: "text", move: MOVE, value: "text" },
  waited: { step: "text", move: MOVE },
  "people-counted": { step: "text", move: MOVE, place: "text", way: "in|out", names: "texts" },
  "went-on": { step: "text", move: "text", reason: NOTE, authority: maybe("text", null), under: NOTE },
  corrected: { seq: "count", field: "text", text: "text", reason: "text", move: MOVE },
  "safe-begun": { why: NOTE },
  "safe-step-done": { item: "text", done: maybe("flag", true) },
  "safe-ended": { remark: NOTE },
  "trip-recorded": { indicator: "text", level: NOTE, done: "text", kind: "trip|odd" },
  paused: { reason: NOTE },
  resumed: { cause: "pause|reload|sleep|trip", wall_s: "text", mono_s: maybe("text", null) },
  "states-confirmed": { states: STATES, unbroken: "texts" },
  "clock-changed": { wall_s: "text", mono_s: "text" },
  "person-changed": { to: "text" },
  "storage-found": { lost: "count", restored: "count", note: NOTE },
  ended: { outcome: "done|stopped", reason: NOTE, states: STATES, locks: [LOCK], earths: [EARTH] },
  voided: { reason: "text" },
  reopened: { reason: "text", returned_by: "text" },
  signed: { person: "text", meaning: "performed|witnessed|released|allowed|unlocked|handed over", jws: "text" },
};

const HEAD = {
  v: "count", run: "text", chain: "text", seq: "count", prev: "text", kind: "text", by: "text",
  at: { wall: "text", mono: "text", boot: "text" }, app: "text",
};

/** (kind, version) as "kind 1" -> the body of the next version; stored texts are never touched.
 * @type {Record<string, (body: any) => any>} */
export const UPCASTS = {};

class Damage extends Error {}

/** An instrument written with one unit, resolution and accuracy of its own has a single unnamed range.
 * @param {Record<string, any>} data @returns {Record<string, any>} */
function with_ranges(data) {
  if (Object.hasOwn(data, "ranges") || !Object.hasOwn(data, "unit")) return data;
  const of = (/** @type {boolean} */ flat) => Object.fromEntries(Object.entries(data).filter(([key]) => FLAT.includes(key) === flat));
  return { ...of(false), ranges: [{ name: "", ...of(true) }] };
}

/** @param {any} data @returns {data is Record<string, any>} */
const is_object = (data) => typeof data === "object" && data !== null && !Array.isArray(data);

/** @param {any} rule @param {any} data @param {string} where @returns {any} */
function read_value(rule, data, where) {
  if (Array.isArray(rule)) {
    if (!Array.isArray(data)) throw new Damage(`${where} is no list`);
    return data.map((one, i) => read_value(rule[0], one, `${where}.${i}`));
  }
  if (typeof rule === "object") {
    if (!is_object(data)) throw new Damage(`${where} is no object`);
    if ("each" in rule) return Object.fromEntries(Object.entries(data).map(([k, v]) => [k, read_value(rule.each, v, `${where}.${k}`)]));
    return read_object(rule, data, where);
  }
  const lists = rule === "lists" ? { each: "texts" } : rule === "map" ? { each: "text" } : rule === "texts" ? ["text"] : null;
  if (lists) return read_value(lists, data, where);
  if (rule === "flag" ? typeof data === "boolean" : rule === "count" ? Number.isSafeInteger(data) : typeof data === "string") {
    if (rule === "text" || rule === "flag" || rule === "count" || rule.split("|").includes(data)) return data;
    throw new Damage(`${where} is none of ${rule}`);
  }
  throw new Damage(`${where} is no ${rule}`);
}

/** @param {Record<string | symbol, any>} rules @param {Record<string, any>} given @param {string} where */
function read_object(rules, given, where) {
  const data = rules[OLDER] ? rules[OLDER](given) : given;
  for (const key of Object.keys(data)) if (!Object.hasOwn(rules, key)) throw new Damage(`${where}.${key} is not known`);
  /** @type {Record<string, any>} */
  const out = {};
  for (const [key, rule] of Object.entries(rules)) {
    const optional = is_object(rule) && "or" in rule;
    if (!Object.hasOwn(data, key)) {
      if (!optional) throw new Damage(`${where}.${key} is missing`);
      out[key] = structuredClone(rule.or);
    } else if (optional && rule.or === null && data[key] === null) out[key] = null;
    else out[key] = read_value(optional ? rule.value : rule, data[key], `${where}.${key}`);
  }
  return out;
}

/** The event in `text`, as plain values with the defaults written out. The caller keeps the text either way.
 * @param {string} text @param {string} sha256 @returns {Event | Refused} */
export function read(text, sha256) {
  /** @type {any} */
  let head;
  try {
    const data = JSON.parse(text);
    if (!is_object(data)) throw new Damage("it is no object");
    const { body, ...rest } = data;
    if (!is_object(body)) throw new Damage("body is no object");
    head = { ...read_object(HEAD, rest, "event"), body };
  } catch (problem) {
    if (problem instanceof Damage || problem instanceof SyntaxError) {
      return { refused: { code: "damaged-event", says: `This is not an event: ${problem.message}.` } };
    }
    throw problem;
  }
  let { body, v } = head;
  while (v < VERSION && UPCASTS[`${head.kind} ${v}`]) body = UPCASTS[`${head.kind} ${v++}`](body);
  if (v !== VERSION || !Object.hasOwn(BODIES, head.kind)) {
    return { refused: { code: "unknown-version", says: `Event ${head.seq} is '${head.kind}' version ${head.v}, which is not known here. Update fieldkit.` } };
  }
  try {
    body = read_object(BODIES[head.kind], body, "body");
  } catch (problem) {
    if (!(problem instanceof Damage)) throw problem;
    return { refused: { code: "damaged-event", says: `Event ${head.seq} (${head.kind}) is damaged: ${problem.message}.` } };
  }
  const { seq, kind, by, at, run, chain, prev } = head;
  return { seq, kind, by, at, run, chain, prev, sha256, body };
}

/** A body as its kind has it, with defaults; or what is wrong with it.
 * @param {string} kind @param {any} body @returns {{body: any} | {refused: string}} */
export function read_body(kind, body) {
  try {
    return { body: read_object(BODIES[kind], body, "body") };
  } catch (problem) {
    if (problem instanceof Damage) return { refused: problem.message };
    throw problem;
  }
}

/** The envelope of the event that follows `state`, ready for `to_text`; the caller hashes and stores that text.
 * @param {{run: string, chain: string, seq: number, head: string}} state @param {string} kind @param {any} body
 * @param {string} by @param {import("./clock.js").At} at @param {string} app */
export function next_event(state, kind, body, by, at, app) {
  return {
    v: VERSION, run: state.run, chain: state.chain, seq: state.seq + 1, prev: state.head, kind, by,
    at: { wall: at.wall, mono: at.mono, boot: at.boot }, app, body,
  };
}

/** One event as compact JSON in the order of its keys. @param {any} envelope */
export function to_text(envelope) {
  return JSON.stringify(envelope);
}
