/**
 * Prove dead: tester on the known source, every point, tester on the known source again. Read with both hands free and
 * entered afterwards, as one answer: nothing is recorded before the last value stands. The tester is one throughout.
 */
import { h, part, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";
import { keypad } from "../keypad.js";
import { judged, meterWords } from "../judging.js";
import { smallScale } from "../scale.js";
import { say } from "../announce.js";
import { freshen } from "../step_page.js";
import { limitWords, minus, pretty } from "../words.js";
import { showMeter } from "./number.js";

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const control = ctx.step.control, unit = control.unit.symbol, { instrument } = ctx.progress;
  const wrong = part(el.l, "wrong"), template = part(el.l, "row");
  showMeter(part(el.l, "meter"), meterWords(instrument, control.tester, ctx.run.now().wall));
  put(part(el.l, "known-source"), "Known source ", h("span", { class: "id" }, control.known_source), ". Work as if live until the last line is in.");
  const asked = [{ name: "before", title: "Tester on the known source", known: true }, ...control.points, { name: "after", title: "Tester, known source again", known: true }];
  const rows = asked.map((/** @type {any} */ ask, /** @type {number} */ k) => row(ask, k));
  put(part(el.l, "proof"), rows.map((r) => r.node));
  let open = Math.max(0, rows.findIndex((r) => !r.input.value));
  put(part(el.r, "pad"), keypad(() => rows[open].input));
  const act = acting(ctx, { side: false, run: () => (rows.every((r) => r.input.value.trim()) ? record() : next()) });
  put(part(el.r, "act"), act.node);

  /** @param {any} ask @param {number} k */
  function row(ask, k) {
    const copy = /** @type {DocumentFragment} */ (template.content.cloneNode(true));
    freshen(copy);
    const node = /** @type {HTMLElement} */ (copy.firstElementChild), input = part(node, "typed");
    put(part(node, "n"), String(k + 1));
    put(part(node, "what"), ask.title);
    put(part(node, "label"), `${ask.title}, in ${unit}`);
    put(part(node, "unit"), pretty(unit));
    input.value = ctx.draft[`row${k}`] ?? "";
    input.addEventListener("focus", () => { open = k; paint(); });
    input.addEventListener("input", () => { put(wrong); ctx.keep({ [`row${k}`]: input.value }); paint(); });
    input.addEventListener("keydown", (/** @type {KeyboardEvent} */ e) => { if (e.key === "Enter") e.preventDefault(); });
    return { node, input, ask };
  }
  /** @param {any} ask limits of one row, as the engine shows them */
  const limitsOf = (ask) => ctx.progress.points?.find((/** @type {any} */ p) => p.field === (ask.known ? ask.name : `points.${ask.name}`))?.limits ?? null;

  function paint() {
    rows.forEach((r, k) => {
      const limits = limitsOf(r.ask), text = r.input.value.trim();
      const found = text ? judged({ text, unit, limits, resolution: control.resolution, instrument, protects: true, day: ctx.run.now().wall }) : null;
      r.node.classList.toggle("open", k === open);
      r.node.classList.toggle("todo", !text && k !== open);
      put(part(r.node, "limit"), limitWords(limits, unit), found?.verdict ? [limits ? ": " : "", h("strong", {}, found.verdict)] : found?.refused ? " not a number yet" : "");
      put(part(r.node, "tiny"), limits ? smallScale({ limits, unit, text: found && !found.refused ? text : null, found: found?.refused ? null : found }) : null);
      if (k === open && found) { put(part(el.l, "sentence"), pretty(minus(found.words ?? found.refused.says))); if (found.verdict) say(`${r.ask.title}: ${text} ${unit}, ${found.verdict}`); }
    });
    update();
  }
  function next() {
    open = rows.findIndex((r) => !r.input.value.trim());
    rows[open].input.focus();
  }
  async function record() {
    const points = rows.slice(1, -1).map((r) => ({ name: r.ask.name, text: r.input.value.trim() }));
    const answer = await ctx.answer({ do: "proved", instrument: instrument?.id ?? control.tester.instrument ?? "", range: instrument?.range ?? "", before: rows[0].input.value.trim(), points, after: rows.at(-1)?.input.value.trim() ?? "" });
    if (answer.refused) put(wrong, answer.refused.says);
  }
  function update() {
    const reasons = ctx.shutReasons(), all = rows.every((r) => r.input.value.trim());
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    const now = rows[open]?.input.value.trim();
    act.show({ label: all ? ["Record", h("span", { class: "num" }, rows.map((r) => minus(r.input.value.trim())).join(", ")), pretty(unit)] : "Next line", ready: all || Boolean(now), reasons });
  }
  paint();
  return { update, focus: rows[open].input };
}
