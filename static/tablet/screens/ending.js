/** The pages at the end of a run: stopped, all steps done, ended and to be signed, returned and taken up again, read only. */
import { field, h, put } from "../dom.js";
import { passphrase } from "../passphrase.js";
import { lanesOf } from "../rails.js";
import { work } from "../step_page.js";
import { boardList } from "./states.js";
import { STATE_WORDS, day, list, minute, personName, sentence } from "../words.js";

/** @param {string} kind @param {string} title @param {string} [note] */
const head = (kind, title, note = "") => [h("div", { class: "what" }, h("span", {}, h("b", {}, kind)), h("span", {}, note)), h("h1", { tabindex: "-1" }, title)];

/** How the readings of the run stand, in a sentence. @param {any} state */
export function countWords(state) {
  const judged = (state.log ?? []).filter((/** @type {any} */ r) => r.verdict), of = (/** @type {string} */ v) => judged.filter((/** @type {any} */ r) => r.verdict === v).length;
  const deviations = (state.log ?? []).filter((/** @type {any} */ r) => r.manner === "deviation").length, corrections = (state.log ?? []).filter((/** @type {any} */ r) => r.old?.length).length;
  const parts = [[of("pass"), "pass"], [of("conditional pass"), "conditional pass"], [of("conditional fail"), "conditional fail"], [of("fail"), "fail"], [of("not judged"), "not judged"]].filter(([n]) => n).map(([n, w]) => `${n} ${w}`);
  return `${judged.length} reading${judged.length === 1 ? "" : "s"}${parts.length ? `: ${list(parts)}` : ""}; ${deviations} deviation${deviations === 1 ? "" : "s"}, ${corrections} correction${corrections === 1 ? "" : "s"}.`;
}

/** The states, locks and earths that the end names. @param {any} ctx */
const finalStates = (ctx) => h("ul", { class: "facts" }, lanesOf(ctx.sheet).map((/** @type {any} */ s) => h("li", {}, h("span", { class: "k" }, sentence(s.title)), h("span", { class: "v" }, /** @type {any} */ (STATE_WORDS)[ctx.state.sources[s.name]?.state ?? "unknown"]))));

/** The run is stopped. @param {any} ctx */
export function stoppedPage(ctx) {
  const { state } = ctx, refused = h("p", { class: "refused", "data-refused": true });
  const reason = field({ label: "Why the run ends here", value: state.stop?.why ?? "", rows: true });
  const done = Object.keys(state.safe ?? {}).length, all = ctx.sheet.make_safe.length;
  const end = async () => {
    const r = await ctx.send({ do: "ended", outcome: "stopped", reason: reason.input.value.trim() });
    put(refused, r.refused?.says ?? "");
    if (!r.refused) ctx.shut();
  };
  const { node } = work([head("Stopped", "This run is stopped"), h("p", { class: "say" }, state.stop?.why ?? "", " Nothing that was recorded is hidden. Only make safe, remarks, pictures, corrections and the end remain."), h("p", { class: "plainly" }, done ? `${done} of ${all} steps of the make-safe list are recorded.` : "No step of the make-safe list is recorded yet.")],
    [h("div", { class: "choose" }, h("button", { type: "button", class: "way stop", "data-open-safe": true, on: { click: () => ctx.over("make_safe") } }, h("b", {}, "Open the make-safe list"), h("span", {}, "Nothing is switched from here; its own steps record."))), h("div", { class: "fields" }, reason.node), boardList(ctx), refused,
      h("div", { class: "acts one" }, h("button", { type: "button", class: "act first", "data-end": "stopped", on: { click: () => void end() } }, "End the run as stopped"))]);
  return { node, refuse: (/** @type {string} */ says) => put(refused, says) };
}

/** All steps are done. @param {any} ctx */
export function endPage(ctx) {
  const refused = h("p", { class: "refused", "data-refused": true });
  const end = async () => {
    const r = await ctx.send({ do: "ended", outcome: "done", reason: "" });
    put(refused, r.refused?.says ?? "");
    if (!r.refused) ctx.shut();
  };
  const { node } = work([head("End", "All steps are done"), h("p", { class: "say" }, countWords(ctx.state)), ctx.sheet.next_person ? h("p", { class: "heed" }, h("b", {}, "For the next person: "), ctx.sheet.next_person) : null, h("h2", { class: "part" }, "The run leaves"), finalStates(ctx)],
    [h("h2", { class: "part" }, "Locks and earths that stay on, with their holders"), boardList(ctx), refused,
      h("div", { class: "acts one" }, h("button", { type: "button", class: "act first", "data-end": "done", on: { click: () => void end() } }, "End the run"))]);
  return { node, refuse: (/** @type {string} */ says) => put(refused, says) };
}

/** Ended: sign, or read; a returned run is taken up again here. @param {any} ctx */
export function afterPage(ctx) {
  const { state } = ctx;
  if (state.phase === "voided") return readPage(ctx, "Voided", "This run is voided");
  if ((ctx.progress.may ?? []).includes("sign") && !ctx.run.readonly) return signPage(ctx);
  const holder = h("div"), made = readPage(ctx, "Ended and signed", state.ended?.outcome === "stopped" ? "Ended as stopped, and signed" : "Ended and signed", holder);
  void Promise.resolve(ctx.host.inbox?.()).catch(() => []).then((rows) => {
    const back = (rows ?? []).find((/** @type {any} */ r) => r.run === state.run && r.seq >= state.seq);
    if (back) put(holder, returnedBlock(ctx, back));
  });
  return made;
}

/** @param {any} ctx @param {any} back */
function returnedBlock(ctx, back) {
  const refused = h("p", { class: "refused" });
  const again = async () => {
    const r = await ctx.send({ do: "reopened", reason: back.reason, returned_by: back.by });
    put(refused, r.refused?.says ?? "");
    if (!r.refused) ctx.shut();
  };
  return h("div", { class: "heed", "data-returned": true }, h("b", {}, `Returned by ${back.by_name ?? back.by}, ${day(back.time)} ${minute(back.time)}`), h("p", { class: "say" }, `“${back.reason}”`), h("p", { class: "note" }, "Taken up again, only corrections, remarks and pictures may follow; then it is signed again."), refused,
    h("div", { class: "buttons" }, h("button", { type: "button", class: "act first", "data-reopen": true, on: { click: () => void again() } }, "Take it up again")));
}

/** @param {any} ctx @param {string} kind @param {string} title @param {any} [extra] */
function readPage(ctx, kind, title, extra = null) {
  const signed = (ctx.state.signatures ?? []).map((/** @type {any} */ s) => h("li", {}, h("span", { class: "k" }, personName(ctx.state, s.person)), h("span", { class: "v" }, `${s.meaning}, over events 0 to ${s.covers ?? s.seq - 1}`)));
  const { node } = work([head(kind, title), extra, h("p", { class: "say" }, countWords(ctx.state)), h("p", { class: "say" }, "Touch a row above to read it."), h("h2", { class: "part" }, "The run left"), finalStates(ctx)],
    [h("h2", { class: "part" }, "Signatures"), h("ul", { class: "facts" }, signed), h("h2", { class: "part" }, "Locks and earths"), boardList(ctx), h("div", { class: "acts one" }, h("button", { type: "button", class: "act first", on: { click: () => ctx.app.go("home") } }, "To the start page"))]);
  return { node };
}

/** What is signed is shown; then the recorder's own passphrase. @param {any} ctx */
function signPage(ctx) {
  const { state, sheet } = ctx, reopened = (state.log ?? []).some((/** @type {any} */ r) => r.kind === "reopened");
  const statement = `I did this work and these are my readings${reopened ? ", with the corrections shown" : ""}.`;
  const me = ctx.everyone().filter((/** @type {any} */ p) => p.id === state.recorder), refused = h("p", { class: "refused", "data-refused": true });
  const button = /** @type {HTMLButtonElement} */ (h("button", { type: "button", class: "act first", "data-sign": true, on: { click: () => void sign() } }, `Sign as ${me[0]?.name ?? state.recorder}`));
  const pass = passphrase({ people: me, legend: "Who signs", onchange: () => { button.disabled = !pass.ready(); } });
  button.disabled = true;
  async function sign() {
    put(refused);
    button.disabled = true;
    try {
      await ctx.run.sign({ person: state.recorder, passphrase: pass.phrase(), meaning: "performed", statement });
      pass.clear();
      ctx.shut();
      ctx.host.sync?.()?.catch?.(() => undefined);
    } catch (problem) {
      const { says, wait_s } = /** @type {any} */ (problem);
      put(refused, `${says ?? String(problem)}${wait_s ? ` Try again in ${Math.ceil(wait_s)} s.` : ""}`);
      button.disabled = !pass.ready();
    }
  }
  const { node } = work([head("Signature", "Sign what was recorded", state.ended?.outcome === "stopped" ? "ended as stopped" : ""), h("p", { class: "say" }, countWords(state)),
    h("div", { class: "signed-over" }, h("p", {}, "You sign this statement: ", h("b", {}, `“${statement}”`)),
      h("dl", {}, h("dt", {}, "Run"), h("dd", {}, state.run), h("dt", {}, "Procedure"), h("dd", {}, `${sheet.title}, edition ${sheet.edition}`), h("dt", {}, "Cabinet, tube"), h("dd", {}, `${state.started.cabinet}, ${state.started.tube}`), h("dt", {}, "Events"), h("dd", {}, `0 to ${state.seq}, every one`), h("dt", {}, "Last event’s hash"), h("dd", { class: "id" }, (state.head ?? "").match(/.{1,8}/g)?.join(" ") ?? ""), h("dt", {}, "Sheet’s hash"), h("dd", { class: "id" }, (state.sheet ?? "").match(/.{1,8}/g)?.join(" ") ?? "")))],
    [reopened ? h("div", { class: "heed" }, "This run was returned and taken up again. Touch a row above to correct it; sign when it is right.", h("div", { class: "buttons" }, h("button", { type: "button", class: "act", on: { click: () => ctx.over("remark") } }, "Remark"), h("button", { type: "button", class: "act", on: { click: () => ctx.over("picture") } }, "Picture"))) : null,
      pass.node, refused, h("div", { class: "acts one" }, button)]);
  return { node, refuse: (/** @type {string} */ says) => put(refused, says) };
}
