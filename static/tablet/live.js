/** Live now, locked, next change: what the rails show, in words, beside their heads. */
import { h } from "./dom.js";
import { LIVE, SHUT, changeOf, countdown, list, minute, sourceTitle } from "./words.js";
import { current } from "./timeline.js";

/** @param {any} sheet @param {any} state @param {any} progress */
function liveWords(sheet, state, progress) {
  const now = current(state.sources);
  const waiting = new Set((progress?.waits ?? []).filter((/** @type {any} */ w) => Number(w.left) > 0).map((/** @type {any} */ w) => w.source));
  // What follows the beam supply: X-rays, and its charge until it is proved dead. Where it is locked, its own word says so.
  const live = progress?.live ?? [];
  const follows = (/** @type {any} */ s) => s.name !== "heat" && live.includes(s.name) && !SHUT.includes(now.beam_supply);
  const counts = (/** @type {any} */ s) => (s.isolable === false ? follows(s) : LIVE.includes(now[s.name]) || now[s.name] === "unknown");
  return sheet.sources.filter(counts).map((/** @type {any} */ s) => {
    // A step that asks for the next level is not there yet.
    const level = progress?.level && progress.step?.control.control !== "confirm" && s.name === "beam_supply" && now[s.name] === "on" ? ` at ${progress.level}` : "";
    const manner = s.isolable === false ? (now.beam_supply === "on" ? "" : s.name === "stored_charge" ? " (not proved gone)" : " (not known)") : now[s.name] === "unknown" ? " (not known)" : now[s.name] === "standby" ? " (standby volts)" : now[s.name] === "cut-off" ? " (at cut-off)" : waiting.has(s.name) && s.name === "heater" ? " (warming)" : "";
    return `${sourceTitle(sheet, s.name)}${level}${manner}`;
  });
}

/** Sources that are shut, those in one condition together. @param {any} sheet @param {any} state */
function shutWords(sheet, state) {
  const at = new Map((state.log ?? []).map((/** @type {any} */ row) => [row.seq, row.wall])), groups = /** @type {Map<string, string[]>} */ (new Map());
  for (const s of sheet.sources.filter((/** @type {any} */ s) => SHUT.includes(state.sources?.[s.name]?.state))) {
    const found = state.sources[s.name], when = at.get(found.seq);
    const how = found.state === "locked" ? "not proved dead" : `${found.state === "proved" ? "proved dead" : "proved dead and earthed"}${when ? ` ${minute(when)}` : ""}`;
    groups.set(how, [...(groups.get(how) ?? []), sourceTitle(sheet, s.name)]);
  }
  return [...groups].map(([how, titles]) => ({ title: list(titles), how, sure: how !== "not proved dead" }));
}

/** Why no change is told: the run is over, a choice decides, or none is foreseen. @param {any} sheet @param {any} state @param {any} progress */
function noneWords(sheet, state, progress) {
  if (["ended", "voided"].includes(state.phase)) return "none: the run has ended";
  const steps = [state.node, ...(progress?.path ?? [])].map((id) => sheet.steps.find((/** @type {any} */ s) => s.id === id));
  const choice = steps.find((s) => s?.control.control === "choice" && !(s.id in (state.choices ?? {})));
  return choice ? `depends on the choice at step ${choice.number}` : "none foreseen";
}

/** A rung changes no state and yet the energy: said before the next change of a state. @param {any} sheet @param {any} progress @param {any} next */
function rungWords(sheet, progress, next) {
  const ids = [progress.node, ...(progress.path ?? [])], before = ids.slice(0, Math.max(0, ids.indexOf(next.step)));
  const rung = before.map((id) => sheet.steps.find((/** @type {any} */ s) => s.id === id)).find((s) => s?.level && s.control.control === "confirm");
  const source = rung && sheet.moves.filter((/** @type {any} */ m) => m.origin === rung.id).flatMap((/** @type {any} */ m) => Object.keys(m.effects?.sets ?? {}))[0];
  if (!source) return "";
  return rung.id === progress.node ? `${sourceTitle(sheet, source)} to ${progress.level}, at this step; ` : `${sourceTitle(sheet, source)} may change level, at step ${rung.number}; `;
}

/** @param {any} sheet @param {any} state @param {any} progress */
export function nextWords(sheet, state, progress) {
  const next = progress?.next_change;
  if (!next) return noneWords(sheet, state, progress);
  const sets = Array.isArray(next.sources) ? Object.fromEntries(next.sources.map((/** @type {any} */ s) => (typeof s === "string" ? [s, null] : [s.name, s.state]))) : next.sources;
  const move = sheet.moves.filter((/** @type {any} */ m) => m.origin === next.step).map((/** @type {any} */ m) => m.effects?.sets ?? {}).find((/** @type {any} */ s) => Object.keys(sets).some((k) => k in s)) ?? {};
  const words = Object.keys(sets).map((s) => changeOf(sheet, s, state.sources?.[s]?.state, sets[s] ?? move[s]));
  const wait = (progress.waits ?? []).filter((/** @type {any} */ w) => w.step === next.step).map((/** @type {any} */ w) => Number(w.left)).filter((/** @type {number} */ n) => n > 0);
  const where = next.step === progress.node ? "at this step" : `at step ${next.number}`;
  return `${rungWords(sheet, progress, next)}${list(words)}, ${where}${wait.length ? `, in ${countdown(Math.max(...wait))} at the earliest` : ""}`;
}

/** The words as a list of terms. @param {any} sheet @param {any} state @param {any} progress @returns {HTMLElement} */
export function liveList(sheet, state, progress) {
  const live = liveWords(sheet, state, progress), shut = shutWords(sheet, state);
  return h("dl", {},
    h("dt", {}, state.phase === "confirm" ? "Live before" : "Live now"), h("dd", {}, state.phase === "declare" ? "not known: nothing has been confirmed yet" : live.length ? live.join(", ") : "nothing"),
    shut.length ? [h("dt", {}, "Locked"), h("dd", {}, shut.map((/** @type {any} */ s, /** @type {number} */ k) => [k ? "; " : "", `${s.title}, `, s.sure ? s.how : h("b", {}, s.how)]))] : null,
    h("dt", {}, "Next change"), h("dd", {}, ["declare", "confirm"].includes(state.phase) ? "none before each source is confirmed" : nextWords(sheet, state, progress)));
}
