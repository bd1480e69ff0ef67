/**
 * What each row of the strip did to the energy sources: pure functions over the sheet and the events, for drawing only.
 * What a source is now is the fold's word (state.sources); the last row ends there.
 */

/** Making safe never takes a lock off: "off" leaves a source that is shut so. */
const SHUT = ["locked", "proved", "earthed"];
/** Events that put *proved* back to *locked*. */
const LOSES_PROOF = ["paused", "trip-recorded", "resumed"];

/** @param {any} event @returns {{seq: number, kind: string, body: any}} */
const flat = (event) => (event.head ? { seq: event.head.seq, kind: event.head.kind, body: event.body } : event);

/** @param {any} sheet @param {{kind: string, body: any}} event @param {Record<string, string>} states @returns {Record<string, string>} */
function after(sheet, event, states) {
  const { kind, body } = event;
  if (kind === "states-declared" || kind === "states-confirmed") return { ...states, ...body.states };
  if (LOSES_PROOF.includes(kind)) return Object.fromEntries(Object.entries(states).map(([k, v]) => [k, v === "proved" ? "locked" : v]));
  if (kind === "safe-step-done") {
    const item = sheet.make_safe.find((/** @type {any} */ s) => s.id === body.item);
    const live = item ? Object.entries(item.sets).filter(([source]) => !SHUT.includes(states[source])) : [];
    return settle(states, Object.fromEntries(live));
  }
  const move = body?.move && sheet.moves.find((/** @type {any} */ m) => m.id === body.move);
  return move ? settle(states, move.effects?.sets ?? {}) : states;
}

/** @param {Record<string, string>} states @param {Record<string, string>} sets */
function settle(states, sets) {
  const next = { ...states };
  for (const [source, state] of Object.entries(sets)) next[source] = state;
  return next;
}

/**
 * seq -> states before and after the event with that number.
 * @param {any} sheet @param {any[]} events @param {Record<string, {state: string}>} now
 * @returns {Map<number, {before: Record<string, string>, after: Record<string, string>}>}
 */
export function walk(sheet, events, now) {
  const rows = new Map();
  let states = Object.fromEntries(sheet.sources.map((/** @type {any} */ s) => [s.name, "unknown"]));
  for (const raw of events) {
    const event = flat(raw), next = after(sheet, event, states);
    rows.set(event.seq, { before: event.kind === "states-declared" ? next : states, after: next });
    states = next;
  }
  const last = [...rows.keys()].at(-1);
  if (last !== undefined && now) {
    const row = rows.get(last);
    rows.set(last, { before: row.before, after: { ...row.after, ...current(now) } });
  }
  return rows;
}

/** source -> state of the fold's sources. @param {Record<string, any>} sources @returns {Record<string, string>} */
export const current = (sources) => Object.fromEntries(Object.entries(sources ?? {}).map(([k, v]) => [k, typeof v === "string" ? v : v.state]));

/** The plain move that most likely leaves a step. @param {any} sheet @param {string} step @param {string | undefined} to */
export function likelyMove(sheet, step, to) {
  const plain = sheet.moves.filter((/** @type {any} */ m) => m.origin === step && m.manner === "plain" && m.on !== "fail");
  return plain.find((/** @type {any} */ m) => m.to === to) ?? plain[0] ?? null;
}

/**
 * The coming steps with what each will set, in order.
 * @param {any} sheet @param {string[]} path @param {Record<string, string>} states after the open step
 * @returns {{step: any, before: Record<string, string>, after: Record<string, string>, sets: Record<string, string>}[]}
 */
export function coming(sheet, path, states) {
  const rows = [];
  let before = states;
  for (const [k, id] of path.entries()) {
    const step = sheet.steps.find((/** @type {any} */ s) => s.id === id);
    if (!step) continue;
    const sets = likelyMove(sheet, id, path[k + 1])?.effects?.sets ?? {};
    const changed = Object.fromEntries(Object.entries(sets).filter(([s, v]) => before[s] !== v));
    const next = { ...before, ...sets };
    rows.push({ step, before, after: next, sets: changed });
    before = next;
  }
  return rows;
}
