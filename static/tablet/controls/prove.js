/**
 * Prove dead: tester on the known source, every point, tester on the known source again. Read with both hands free and
 * entered afterwards, as one answer: nothing is recorded before the last value stands. The tester is one throughout.
 */
import { h, part, put } from "../dom.js";
import { acting, showReasons } from "../acting.js";
import { keypad } from "../keypad.js";
import { judged, showSentence, showWords } from "../judging.js";
import { meterPart } from "../meter.js";
import { redraw, reword } from "../redraw.js";
import { tinyText } from "../scale.js";
import { sayOncePaused } from "../announce.js";
import { freshen } from "../step_page.js";
import { limitWords, minus, pretty } from "../words.js";

/** Why Record is shut where the tester is refused; what to do about it stands beside the tester. */
const OTHER_TESTER = { says: "Opens with a tester in date.", left: null };

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const control = ctx.step.control, unit = control.unit.symbol;
  const wrong = part(el.l, "wrong"), template = part(el.l, "row"), sentence = part(el.l, "sentence"), reasonsAt = part(el.r, "reasons");
  const tester = meterPart(part(el.l, "meter"), ctx, { asked: control.tester, changed: paint });
  put(part(el.l, "known-source"), "Known source ", h("span", { class: "id" }, control.known_source), ". Work as if live until the last line is in.");
  const asked = [{ name: "before", title: "Tester on the known source", known: true }, ...control.points, { name: "after", title: "Tester, known source again", known: true }];
  const rows = asked.map((/** @type {any} */ ask, /** @type {number} */ k) => row(ask, k));
  put(part(el.l, "proof"), rows.map((r) => r.node));
  let open = Math.max(0, rows.findIndex((r) => !r.input.value)), today = ctx.run.now().wall;
  put(part(el.r, "pad"), keypad(() => rows[open].input));
  const act = acting(ctx, { side: false, run: () => (rows.every((r) => r.input.value.trim()) ? record() : next()) });
  put(part(el.r, "act"), act.node);
  const typed = h("span", { class: "num" }), recordIt = ["Record", typed, pretty(unit)];

  /** @param {any} ask @param {number} k */
  function row(ask, k) {
    const copy = /** @type {DocumentFragment} */ (template.content.cloneNode(true));
    freshen(copy);
    const node = /** @type {HTMLElement} */ (copy.firstElementChild), [input, limit, tiny] = ["typed", "limit", "tiny"].map((name) => part(node, name));
    put(part(node, "n"), String(k + 1));
    put(part(node, "what"), ask.title);
    put(part(node, "label"), `${ask.title}, in ${pretty(unit)}`);
    put(part(node, "unit"), pretty(unit));
    input.value = ctx.draft[`row${k}`] ?? "";
    input.addEventListener("focus", () => { if (open !== k) { open = k; paint(); } });
    input.addEventListener("input", () => { if (wrong.firstChild) put(wrong); ctx.keep({ [`row${k}`]: input.value }); line(rows[k], k); update(); });
    input.addEventListener("keydown", (/** @type {KeyboardEvent} */ e) => { if (e.key === "Enter") e.preventDefault(); });
    return { node, input, ask, limit, tiny };
  }
  /** @param {any} ask limits of one row, as the engine shows them */
  const limitsOf = (ask) => ctx.progress.points?.find((/** @type {any} */ p) => p.field === (ask.known ? ask.name : `points.${ask.name}`))?.limits ?? null;

  /** One line as it is typed. @param {any} r @param {number} k */
  function line(r, k) {
    const limits = limitsOf(r.ask), text = r.input.value.trim();
    const found = text ? judged({ text, unit, limits, resolution: control.resolution, instrument: ctx.progress.instrument, protects: true, day: today }) : null;
    const usable = found && !found.refused, said = limitWords(limits, unit);
    r.node.classList.toggle("open", k === open);
    r.node.classList.toggle("todo", !text && k !== open);
    if (r.limit.childNodes.length !== 2) put(r.limit, h("span", { class: "in-line" }), h("strong"));
    reword(r.limit.firstChild, `${said}${found?.refused ? `${said ? ", " : ""}not a number yet` : usable && said ? ": " : ""}`);
    reword(r.limit.lastChild, usable ? found.verdict : "");
    redraw(r.tiny, limits ? tinyText({ limits, unit, text: usable ? text : null, found: usable ? found : null }) : "");
    if (k !== open) return;
    if (found) showSentence(sentence, { ...found, reach: limits?.reach });
    else showWords(sentence, "", "");
    sayOncePaused(usable ? `${r.ask.title}: ${minus(text)} ${pretty(unit)}, ${found.verdict}` : "");
  }
  /** Every line: another one is open, or the tester's range changed. */
  function paint() {
    rows.forEach(line);
    update();
  }
  function next() {
    open = rows.findIndex((r) => !r.input.value.trim());
    rows[open].input.focus();
    paint();
  }
  async function record() {
    const { instrument } = ctx.progress, points = rows.slice(1, -1).map((r) => ({ name: r.ask.name, text: r.input.value.trim() }));
    const answer = await ctx.answer({ do: "proved", instrument: instrument?.id ?? control.tester.instrument ?? "", range: instrument?.range ?? "", before: rows[0].input.value.trim(), points, after: rows.at(-1)?.input.value.trim() ?? "" });
    if (answer.refused) put(wrong, answer.refused.says);
  }
  function update() {
    today = ctx.run.now().wall;
    tester.update();
    const reasons = [...(tester.refused() ? [OTHER_TESTER] : []), ...ctx.shutReasons()], all = rows.every((r) => r.input.value.trim());
    showReasons(reasonsAt, ctx.shutReasons());
    reword(typed, rows.map((r) => minus(r.input.value.trim())).join(", "));
    act.show({ label: all ? recordIt : "Next line", ready: all || Boolean(rows[open]?.input.value.trim()), reasons });
  }
  paint();
  return { update, focus: rows[open].input };
}
