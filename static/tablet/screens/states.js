/**
 * The energy states: declared as found at the start, against the sheet and the lock board; and, after a pause or a gap, each
 * source confirmed again: as before without a break, or otherwise. Nothing opens before.
 */
import { field, h, picks, put } from "../dom.js";
import { acting } from "../acting.js";
import { work } from "../step_page.js";
import { STATE_WORDS, lasting, list, minute, personName, sentence, sourceTitle } from "../words.js";

/** States that a person may say of a source. @param {any} source */
const sayable = (source) => (source.isolable === false ? ["off", "on", "unknown"]
  : source.name === "bias" ? ["off", "on", "cut-off", "locked", "unknown"] : source.name === "heater" ? ["off", "on", "standby", "locked", "unknown"] : ["off", "on", "locked", "proved", "earthed", "unknown"]);
const SHORT = { on: "On", off: "Off", standby: "Standby", "cut-off": "At cut-off", locked: "Locked", proved: "Locked, proved dead", earthed: "Proved dead and earthed", unknown: "Not known" };

/** The locks and earths that the board shows on this cabinet. @param {any} state */
export function boardList(state) {
  const locks = state.locks ?? [], earths = state.earths ?? [];
  if (!locks.length && !earths.length) return h("p", { class: "plainly" }, "The board shows no lock and no earth on this cabinet.");
  return h("ul", { class: "facts" },
    locks.map((/** @type {any} */ l) => h("li", {}, h("span", { class: "k" }, `Lock ${l.lock} on ${l.point}`), h("span", { class: "v" }, `${l.sources.join(", ").replaceAll("_", " ")}; held by ${l.holder_name || personName(state, l.holder)}, run ${l.run}, since ${l.since.slice(0, 10)} ${minute(l.since)}`))),
    earths.map((/** @type {any} */ e) => h("li", {}, h("span", { class: "k" }, `Earthing stick ${e.stick}`), h("span", { class: "v" }, `on ${e.point}, ${e.source.replaceAll("_", " ")}; run ${e.run}, since ${e.since.slice(0, 10)} ${minute(e.since)}`))));
}

/** @param {string} title @param {string} kind */
const head = (title, kind) => [h("div", { class: "what" }, h("span", {}, h("b", {}, kind)), h("span", {}, "nothing opens before")), h("h1", { tabindex: "-1" }, title)];

/** The states as found. @param {any} ctx */
export function declarePage(ctx) {
  const { sheet } = ctx;
  const rows = sheet.sources.filter((/** @type {any} */ s) => s.isolable !== false || sheet.start[s.name]).map((/** @type {any} */ source) => {
    const expected = sheet.start[source.name], wanted = expected ? [expected.state, ...(expected.accepts ?? [])] : [];
    const found = [...new Set([...wanted, ...sayable(source)])];
    const minutes = field({ label: `For how many minutes has it been so? (${sourceTitle(sheet, source.name)})`, attributes: { inputmode: "numeric" } });
    const more = h("div", { class: "more", hidden: true }, minutes.node);
    const pick = picks({ legend: `${source.title}, as found`, quiet: true, options: found.map((s) => ({ value: s, label: /** @type {any} */ (SHORT)[s] })), onchange: () => { changed(); act(); } });
    const node = h("li", { "data-source": source.name }, h("div", { class: "name" }, source.title, h("span", { "data-expected": true }, wanted.length ? `expected: ${list(wanted.map((s) => /** @type {any} */ (STATE_WORDS)[s]))}${expected.least ? ", for a while" : ""}` : "")), pick.node, more);
    function changed() {
      const state = pick.values()[0];
      more.hidden = !(expected?.least && state === expected.state);
      node.classList.toggle("differs", Boolean(state && wanted.length && !wanted.includes(state)));
      ctx.keep({ [source.name]: state });
    }
    return { source, node, pick, minutes, timed: () => !more.hidden };
  });
  const board = picks({ legend: "The lock board", many: true, quiet: true, options: [{ value: "seen", label: "I have looked at the board and at the cabinet: this is what is on it" }], onchange: () => act() });
  const refused = h("p", { class: "refused", "data-refused": true });
  const foot = acting(ctx, { side: false, run: () => void record() });
  const { node } = work([head("Energy states as found", "Before the first step"), h("p", { class: "say" }, "Look at the plant, not at the list. What is otherwise than expected is recorded as it is."), h("ul", { class: "states" }, rows.map((/** @type {any} */ r) => r.node))],
    [h("h2", { class: "part" }, "Locks and earths on the board"), boardList(ctx.state), h("div", { class: "fields" }, board.node), refused, foot.node]);

  async function record() {
    const states = Object.fromEntries(rows.map((/** @type {any} */ r) => [r.source.name, r.pick.values()[0]]));
    const ages = /** @type {Record<string, string>} */ ({});
    for (const r of rows) {
      if (!r.timed()) continue;
      const text = r.minutes.input.value.trim().replace(",", ".");
      if (!/^\d+(\.\d+)?$/.test(text)) { r.minutes.wrong("Write the minutes as a number, like 20. Less if you are not sure."); return; }
      ages[r.source.name] = String(Math.floor(Number(text) * 60));
    }
    const answer = await ctx.send({ do: "states-declared", states, ages, board_seen: board.values().length > 0 });
    put(refused, answer.refused?.says ?? "");
    if (!answer.refused) ctx.shut();
  }
  function act() {
    const open = rows.filter((/** @type {any} */ r) => !r.pick.values().length).length;
    foot.show({ label: open ? `${open} source${open === 1 ? "" : "s"} still to say` : board.values().length ? "Record the states as found" : "Look at the board first", ready: !open && board.values().length > 0 });
  }
  act();
  return { node, update: () => undefined, refuse: (/** @type {string} */ says) => put(refused, says) };
}

/** The resume check. @param {any} ctx */
export function confirmPage(ctx) {
  const { sheet, state } = ctx, cause = state.paused?.cause ?? "pause";
  const gap = [...(state.log ?? [])].reverse().find((/** @type {any} */ r) => r.kind === "resumed" || r.kind === "paused" || r.kind === "trip-recorded");
  const rows = sheet.sources.filter((/** @type {any} */ s) => s.isolable !== false || sheet.start[s.name]).map((/** @type {any} */ source) => {
    const before = state.sources[source.name]?.state ?? "unknown";
    const other = picks({ legend: `${source.title}, as it is now`, options: sayable(source).filter((s) => s !== before).map((s) => ({ value: s, label: /** @type {any} */ (SHORT)[s] })), onchange: () => act() });
    const more = h("div", { class: "more", hidden: true }, other.node);
    const pick = picks({ legend: `${source.title} after the gap`, quiet: true, onchange: () => { more.hidden = pick.values()[0] !== "other"; node.classList.toggle("differs", !more.hidden); act(); },
      options: [{ value: "unbroken", label: "As before, without a break" }, { value: "broken", label: "As before, not sure that it held" }, { value: "other", label: "Otherwise" }] });
    const node = h("li", { "data-source": source.name }, h("div", { class: "name" }, source.title, h("span", {}, `before: ${/** @type {any} */ (STATE_WORDS)[before] ?? before}`)), pick.node, more);
    return { source, before, node, said: () => (pick.values()[0] === "other" ? other.values()[0] : pick.values()[0] && before), unbroken: () => pick.values()[0] === "unbroken", differs: () => pick.values()[0] === "other" };
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
