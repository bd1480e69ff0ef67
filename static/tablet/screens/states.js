/**
 * The energy states: declared as found at the start, against the sheet and the lock board; and, after a pause or a gap, each
 * source confirmed again: as before without a break, or otherwise. Nothing opens before.
 */
import { field, h, picks, put } from "../dom.js";
import { acting } from "../acting.js";
import { foundLocks } from "./found_locks.js";
import { work } from "../step_page.js";
import { STATE_WORDS, day, lasting, list, minute, personName, sentence, sourceTitle } from "../words.js";

/** States that a person may say of a source. @param {any} source */
const sayable = (source) => (source.isolable === false ? ["off", "on", "unknown"]
  : source.name === "bias" ? ["off", "on", "cut-off", "locked", "unknown"] : source.name === "heater" ? ["off", "on", "standby", "locked", "unknown"] : ["off", "on", "locked", "proved", "earthed", "unknown"]);
const SHORT = { on: "On", off: "Off", standby: "Standby", "cut-off": "At cut-off", locked: "Locked", proved: "Locked, proved dead", earthed: "Proved dead and earthed", unknown: "Not known" };

/** The locks and earths that the board shows on this cabinet. @param {any} ctx */
export function boardList({ state, sheet }) {
  const locks = state.locks ?? [], earths = state.earths ?? [], since = (/** @type {string} */ wall) => `since ${day(wall)} ${minute(wall)}`;
  if (!locks.length && !earths.length) return h("p", { class: "plainly" }, "The board shows no lock and no earth on this cabinet.");
  return h("ul", { class: "facts" },
    locks.map((/** @type {any} */ l) => h("li", {}, h("span", { class: "k" }, `Lock ${l.lock} on ${l.point}`), h("span", { class: "v" }, `${list(l.sources.map((/** @type {string} */ s) => sourceTitle(sheet, s)))}; held by ${l.holder_name || personName(state, l.holder)}, run ${l.run}, ${since(l.since)}`))),
    earths.map((/** @type {any} */ e) => h("li", {}, h("span", { class: "k" }, `Earthing stick ${e.stick}`), h("span", { class: "v" }, `on ${e.point}, ${sourceTitle(sheet, e.source)}; run ${e.run}, ${since(e.since)}`))));
}

/** A source with its few likely states, and "otherwise" for the rest. @param {{source: any, under: string, first: {value: string, label: string}[], rest: string[], legend: string, onchange: () => void}} spec */
function sourceRow(spec) {
  const other = picks({ legend: `${sentence(spec.source.title)}, as it is now`, options: spec.rest.map((s) => ({ value: s, label: /** @type {any} */ (SHORT)[s] })), onchange: () => spec.onchange() });
  const more = h("div", { class: "more", hidden: true }, other.node);
  const pick = picks({ legend: spec.legend, quiet: true, options: [...spec.first, ...(spec.rest.length ? [{ value: "otherwise", label: "Other" }] : [])], onchange: () => { const differs = pick.values()[0] === "otherwise"; more.hidden = !differs; node.classList.toggle("differs", differs); spec.onchange(); } });
  const node = h("li", { "data-source": spec.source.name }, h("div", { class: "name" }, sentence(spec.source.title), h("span", {}, spec.under)), pick.node, more);
  return { node, chosen: () => pick.values()[0], otherwise: () => pick.values()[0] === "otherwise", state: () => (pick.values()[0] === "otherwise" ? other.values()[0] : pick.values()[0]) };
}

/** @param {string} title @param {string} kind */
const head = (title, kind) => [h("div", { class: "what" }, h("span", {}, h("b", {}, kind)), h("span", {}, "nothing opens before")), h("h1", { tabindex: "-1" }, title)];

/** The states as found. @param {any} ctx */
export function declarePage(ctx) {
  const { sheet } = ctx;
  const rows = sheet.sources.filter((/** @type {any} */ s) => s.isolable !== false || sheet.start[s.name]).map((/** @type {any} */ source) => {
    const expected = sheet.start[source.name], wanted = expected ? [expected.state, ...(expected.accepts ?? [])] : ["off", "on"];
    const minutes = field({ label: `For how many minutes has it been so? (${sourceTitle(sheet, source.name)})`, attributes: { inputmode: "numeric" } });
    const age = h("div", { class: "more", hidden: true }, minutes.node);
    const row = sourceRow({ source, under: expected ? `expected: ${wanted.map((s) => /** @type {any} */ (STATE_WORDS)[s]).join(" or ")}${expected.least ? ", for a while" : ""}` : "nothing is expected of it", legend: `${source.title}, as found`,
      first: wanted.map((s) => ({ value: s, label: /** @type {any} */ (SHORT)[s] })), rest: sayable(source).filter((s) => !wanted.includes(s)), onchange: () => { age.hidden = !(expected?.least && row.state() === expected.state); act(); } });
    row.node.append(age);
    return { source, row, node: row.node, minutes, timed: () => !age.hidden };
  });
  const found = foundLocks(ctx, () => act());
  const board = picks({ legend: "The lock board", many: true, quiet: true, options: [{ value: "seen", label: "I have looked at the board and at the cabinet: these are all the locks and earths" }], onchange: () => act() });
  const refused = h("p", { class: "refused", "data-refused": true });
  const foot = acting(ctx, { side: false, run: () => void record() });
  const { node } = work([head("Energy states as found", "Before the first step"), h("p", { class: "say" }, "Look at the plant, not at the list. What is otherwise than expected is recorded as it is."), h("ul", { class: "states" }, rows.map((/** @type {any} */ r) => r.node))],
    [h("h2", { class: "part" }, "Locks and earths on the board"), boardList(ctx), found.node, h("div", { class: "fields" }, board.node), refused, foot.node]);

  async function record() {
    const states = Object.fromEntries(rows.map((/** @type {any} */ r) => [r.source.name, r.row.state()]));
    const ages = /** @type {Record<string, string>} */ ({});
    for (const r of rows) {
      if (!r.timed()) continue;
      const text = r.minutes.input.value.trim().replace(",", ".");
      r.minutes.wrong("");
      if (!/^\d+(\.\d+)?$/.test(text)) { r.minutes.wrong("Write the minutes as a number, like 20. Less if you are not sure."); return; }
      ages[r.source.name] = String(Math.floor(Number(text) * 60));
    }
    const answer = await ctx.send({ do: "states-declared", states, ages, board_seen: board.values().length > 0, locks: found.locks() });
    put(refused, sentence(answer.refused?.says ?? ""));
    if (!answer.refused) ctx.shut();
  }
  function act() {
    const open = rows.filter((/** @type {any} */ r) => !r.row.state()).length;
    if (!open && !found.complete()) { foot.show({ label: "Name the lock that was found", ready: false }); return; }
    foot.show({ label: open ? `${open} source${open === 1 ? "" : "s"} still to say` : board.values().length ? "Record the states as found" : "Look at the board first", ready: !open && board.values().length > 0 });
  }
  act();
  return { node, update: () => undefined, refuse: (/** @type {string} */ says) => put(refused, says) };
}

/** The resume check. @param {any} ctx */
export function confirmPage(ctx) {
  const { sheet, state } = ctx, cause = state.paused?.cause ?? "pause";
  // The row of the log has no body; how long the gap lasted stands in the event.
  const last = [...(ctx.run.events ?? [])].reverse().map((/** @type {any} */ e) => e.head ? { kind: e.head.kind, ...e.body } : { kind: e.kind, ...e.body }).find((e) => ["resumed", "paused", "trip-recorded"].includes(e.kind)), gap = last?.kind === "resumed" ? last : null;
  const rows = sheet.sources.filter((/** @type {any} */ s) => s.isolable !== false || sheet.start[s.name]).map((/** @type {any} */ source) => {
    const before = state.sources[source.name]?.state ?? "unknown";
    const row = sourceRow({ source, under: `before: ${/** @type {any} */ (STATE_WORDS)[before] ?? before}`, legend: `${source.title} after the gap`, rest: sayable(source).filter((s) => s !== before), onchange: () => act(),
      first: [{ value: "unbroken", label: "Held all along" }, { value: "broken", label: "May have broken" }] });
    return { source, before, node: row.node, said: () => (row.otherwise() ? row.state() : row.chosen() && before), unbroken: () => row.chosen() === "unbroken", differs: () => row.otherwise() };
  });
  const refused = h("p", { class: "refused", "data-refused": true }), foot = acting(ctx, { side: false, run: () => void record() });
  const why = { pause: "The run was paused.", reload: "The tablet was reloaded or the browser ended.", sleep: "The tablet slept.", trip: "A trip or something odd was recorded." };
  const { node } = work([head("Is everything as it was?", "After a gap"), h("p", { class: "say" }, /** @type {any} */ (why)[cause] ?? "There was a gap.", gap?.wall_s ? ` It lasted ${lasting(gap.wall_s, false)} by the clock.` : "", " Look at each source. Facts shown before are void; what was proved dead counts as locked only."), h("ul", { class: "states" }, rows.map((/** @type {any} */ r) => r.node))],
    [h("p", { class: "plainly", "data-differs": true }), refused, foot.node]);

  async function record() {
    const states = Object.fromEntries(rows.map((/** @type {any} */ r) => [r.source.name, r.said()]));
    const answer = await ctx.send({ do: "states-confirmed", states, unbroken: rows.filter((/** @type {any} */ r) => r.unbroken()).map((/** @type {any} */ r) => r.source.name) });
    put(refused, answer.refused?.says ?? "");
    if (!answer.refused) ctx.shut();
  }
  function act() {
    const open = rows.filter((/** @type {any} */ r) => !r.said()), differs = rows.filter((/** @type {any} */ r) => r.differs());
    put(/** @type {Element} */ (node.querySelector("[data-differs]")), differs.length ? h("b", {}, `${sentence(list(differs.map((/** @type {any} */ r) => sourceTitle(sheet, r.source.name))))} ${differs.length === 1 ? "is" : "are"} otherwise than before. Recording this stops the run: make safe and end remain.`) : "");
    foot.show({ label: open.length ? `${open.length} source${open.length === 1 ? "" : "s"} still to say` : differs.length ? "Record it: this stops the run" : "Record the states and go on", ready: !open.length });
  }
  act();
  return { node, refuse: (/** @type {string} */ says) => put(refused, says) };
}
