/**
 * The ways on after a reading: exactly what the step's moves allow. Taking it again needs a reason and is counted; a deviation
 * needs a supervisor's own passphrase; stop and make safe is never gated.
 */
import { field, h, put } from "../dom.js";
import { showSentence } from "../judging.js";
import { passphrase } from "../passphrase.js";
import { limitScale } from "../scale.js";
import { showVerdict } from "../verdict_box.js";
import { limitWords, minus, personName, pretty, time } from "../words.js";
import { stepHead, work } from "../step_page.js";

/** @param {any} ctx @param {any} move @returns {{title: string, small: string, order: number}} */
function wordsOf(ctx, move) {
  const shut = move.open ? "" : (move.reasons ?? []).map((/** @type {any} */ r) => r.says).join(" ");
  if (move.manner === "stop") return { title: move.label || "Stop and make safe", small: `Opens the list of ${ctx.sheet.make_safe.length} steps. Nothing is switched from here.`, order: 0 };
  if (move.manner === "again") {
    const left = move.tries ? move.tries.left : null;
    return { title: move.label || "Take it again", small: left === 0 ? "No more tries are left." : `Needs a reason. Both readings are kept.${left === null ? "" : ` ${left} ${left === 1 ? "try is" : "tries are"} left.`}${shut && left ? ` ${shut}` : ""}`, order: 1 };
  }
  if (move.manner === "deviation") return { title: move.label || "Accept as a deviation", small: shut || "A supervisor gives a reason and their own passphrase here.", order: 2 };
  return { title: move.label || "Go on", small: shut || "", order: 1 };
}

/** Lines of a proof on the known source, as the page that asked for them named them. */
const KNOWN = /** @type {Record<string, string>} */ ({ before: "Tester on the known source", after: "Tester, known source again" });

/** Every line of a proof with its own verdict: which point is not dead is what the person must see. @param {any} row */
function proofLines(row) {
  const box = h("div", { class: "verdict" });
  showVerdict(box, row.verdict ?? null);
  return [box, h("ul", { class: "facts", "data-proof-lines": true }, row.points.map((/** @type {any} */ p) => h("li", {}, h("span", { class: "k" }, KNOWN[p.field] ?? p.title),
    h("span", { class: "v" }, h(p.verdict === "pass" ? "span" : "b", {}, h("span", { class: "num" }, minus(p.text)), ` ${pretty(row.unit ?? "")}, ${p.verdict}`), p.limits ? `; ${limitWords(p.limits, row.unit ?? "")}` : ""))))];
}

/** Closed ways are shown for their reasons, but not where an open one leads the same way, and never twice. @param {any[]} moves */
export function worthShowing(moves) {
  const plain = moves.filter((m) => m.manner === "plain"), open = plain.some((m) => m.open), said = new Set();
  return moves.filter((m) => {
    if (m.manner !== "plain" || m.open) return true;
    const name = m.label || "Go on";
    if (open || said.has(name)) return false;
    said.add(name);
    return true;
  });
}

/** The reading that waits for a decision, as it was recorded. @param {any} ctx @param {any} row */
function recorded(ctx, row) {
  if (!row) return null;
  if (row.points?.length) return proofLines(row);
  const text = row.text || row.value, box = h("div", { class: "verdict" }), sentence = h("p", { class: "sentence" });
  showSentence(sentence, row);
  showVerdict(box, row.verdict ?? null);
  return [h("div", { class: "entry" }, h("div", { class: "well" }, h("span", { class: "figure" }, h("span", {}, minus(text ?? "")), h("span", { class: "u" }, pretty(row.unit ?? "")))), box),
    h("div", { class: "scalebox" }, row.limits && text ? limitScale({ limits: row.limits, plate: ctx.progress.plate, found: { u: row.u, margin: row.margin, verdict: row.verdict, words: row.words }, text: String(text), unit: row.unit }) : null),
    sentence];
}

/** @param {any} ctx */
export function waysPage(ctx) {
  const step = ctx.step ?? ctx.sheet.steps.find((/** @type {any} */ s) => s.id === (ctx.state.pending?.step ?? ctx.state.node));
  const row = (ctx.state.log ?? []).find((/** @type {any} */ r) => r.seq === ctx.state.pending?.seq);
  const failed = ctx.state.pending?.outcome === "fail";
  const list = h("div", { class: "choose", "data-ways": true }), form = h("div", { "data-way-form": true });
  const { node, right } = work([stepHead(ctx.sheet, step, { level: ctx.progress.level }), recorded(ctx, row)], [form, list]);
  let open = "";

  function ways() {
    const moves = worthShowing(ctx.progress.moves ?? []).map((m) => ({ move: m, words: wordsOf(ctx, m) })).sort((a, b) => (failed ? a.words.order - b.words.order : 0));
    put(list, h("p", { class: "q" }, row ? `Recorded ${time(row.wall)} by ${personName(ctx.state, row.by)}. ${failed ? "This does not pass; these are the ways on:" : "Go on where you decide:"}` : "The ways on:"),
      moves.map(({ move, words }) => h("button", { type: "button", class: `way ${move.manner === "stop" ? "stop" : ""}`, "data-way": move.manner, "data-move": move.move, disabled: move.manner !== "stop" && !move.open, on: { click: () => pick(move) } }, h("b", {}, words.title), h("span", {}, words.small))));
  }
  /** @param {any} move */
  function pick(move) {
    if (move.manner === "stop") { void take({ move: move.move, reason: "" }).then(() => ctx.over("make_safe")); return; }
    if (move.manner === "plain") { void take({ move: move.move, reason: "" }); return; }
    open = move.move;
    list.hidden = true;
    put(form, move.manner === "again" ? againForm(move) : deviationForm(move));
    /** @type {HTMLElement | null} */ (form.querySelector("input, textarea"))?.focus();
  }
  /** @param {any} body @param {string} [statement] */
  const take = (body, statement) => ctx.answer({ do: "went-on", ...body }, statement);
  const back = () => h("button", { type: "button", class: "act", on: { click: () => { open = ""; list.hidden = false; put(form); } } }, "Back to the ways on");

  /** @param {any} move */
  function againForm(move) {
    const reason = field({ label: "Why it is taken again", help: "Point in the wrong place, meter not steady, range too coarse.", attributes: { "data-reason": true } });
    const go = async () => { if (!reason.input.value.trim()) { reason.wrong("Give the reason in a few words; it stands in the record."); return; } const r = await take({ move: move.move, reason: reason.input.value.trim() }); if (r.refused) reason.wrong(r.refused.says); };
    return h("div", { class: "fields" }, reason.node, h("div", { class: "acts pair" }, back(), h("button", { type: "button", class: "act first", "data-confirm-again": true, on: { click: () => void go() } }, "Take it again")));
  }
  /** @param {any} move */
  function deviationForm(move) {
    const reason = field({ label: "Why this may stand", rows: true, attributes: { "data-reason": true } });
    const under = field({ label: "Under whose or which authority", help: "Maker’s letter, station’s rule.", attributes: { "data-under": true } });
    const supervisors = ctx.everyone().filter((/** @type {any} */ p) => p.roles.includes("supervisor") && !(ctx.state.recorders ?? [ctx.state.recorder]).includes(p.id));
    const pass = passphrase({ people: supervisors, legend: "Supervisor who allows it" });
    const go = async () => {
      if (!reason.input.value.trim()) { reason.wrong("Give the reason; it stands in the record and in the PDF."); return; }
      if (!under.input.value.trim()) { under.wrong("Say under whose authority: a letter, a rule of the station."); return; }
      const person = pass.person() ?? "";
      if (!(await pass.check(ctx.host))) return;
      const r = await take({ move: move.move, reason: reason.input.value.trim(), authority: person, under: under.input.value.trim() }, `I allow this deviation: ${reason.input.value.trim()}`);
      if (r.refused) reason.wrong(r.refused.says);
    };
    return h("div", { class: "fields" }, reason.node, under.node, pass.node, h("div", { class: "acts pair" }, back(), h("button", { type: "button", class: "act first", "data-confirm-deviation": true, on: { click: () => void go() } }, "Accept as a deviation")));
  }
  ways();
  const refused = h("p", { class: "refused", "data-refused": true });
  right.prepend(refused);
  return { node, update: () => { if (!open) ways(); }, refuse: (/** @type {string} */ says) => put(refused, form.querySelector(".wrong:not(:empty)") ? "" : says) };
}
