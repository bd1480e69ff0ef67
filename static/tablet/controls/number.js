/**
 * Number: one reading, typed as text, judged while it is typed. What was typed stays on a refusal, with the words beside
 * the field. Enter never records: a scanner or a sleeve must not.
 */
import { h, part, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";
import { keypad } from "../keypad.js";
import { judged, meterWords, showSentence } from "../judging.js";
import { limitScale } from "../scale.js";
import { showVerdict } from "../verdict_box.js";
import { say } from "../announce.js";
import { spoken } from "../spoken.js";
import { limitWords, minus, pretty } from "../words.js";

/** Shows which meter is to be read. @param {HTMLElement} node @param {any} words */
export function showMeter(node, words) {
  if (!words) { node.hidden = true; return; }
  put(node, `${words.kind} `, h("span", { class: "id" }, words.id), words.accuracy ? `, ${words.accuracy}` : "", words.calibrated ? h(words.overdue ? "b" : "span", { class: words.overdue ? null : "roomy" }, `, ${words.calibrated}`) : null);
}

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const control = ctx.step.control, unit = control.unit.symbol;
  const input = part(el.l, "typed"), wrong = part(el.l, "wrong"), box = part(el.l, "verdict-box");
  const { instrument } = ctx.progress;
  showMeter(part(el.l, "meter"), meterWords(instrument, control.meter, ctx.run.now().wall));
  put(part(el.l, "label"), `${ctx.step.title}, in ${pretty(unit)}`);
  put(part(el.l, "unit"), pretty(unit));
  put(part(el.r, "pad"), keypad(() => input));
  const act = acting(ctx, { run: record });
  put(part(el.r, "act"), act.node);
  input.value = ctx.draft.text ?? "";

  input.addEventListener("input", () => { put(wrong); input.setAttribute("aria-invalid", "false"); ctx.keep({ text: input.value }); show(); });
  input.addEventListener("keydown", (/** @type {KeyboardEvent} */ e) => { if (e.key === "Enter") e.preventDefault(); });

  async function record() {
    const answer = await ctx.answer({ do: "read", text: input.value.trim(), unit, instrument: instrument?.id ?? null, range: instrument?.range ?? "" });
    if (!answer.refused) return;
    put(wrong, answer.refused.says);
    input.setAttribute("aria-invalid", "true");
    input.focus();
  }

  function show() {
    const text = input.value.trim();
    input.dataset.long = text.length > 6 ? "2" : text.length > 4 ? "1" : "0";
    put(part(el.l, "spoken"), spoken(text));
    const limits = ctx.progress.limits;
    const found = text ? judged({ text, unit, limits, resolution: control.resolution, instrument, protects: control.protects, day: ctx.run.now().wall }) : null;
    const usable = found && !found.refused;
    showVerdict(box, usable ? found.verdict : null, text ? "not a number yet" : limits ? limitWords(limits, unit) || "no limits" : "no limits");
    put(part(el.l, "scale"), limits ? limitScale({ limits, plate: ctx.progress.plate, found: usable ? found : null, text: usable ? text : null, unit, old: ctx.lastReading(ctx.step.id) }) : null);
    showSentence(part(el.l, "sentence"), found);
    if (usable) say(`${minus(text)} ${pretty(unit)}, ${found.verdict}`);
    update();
  }
  function update() {
    const text = input.value.trim(), reasons = ctx.shutReasons();
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    act.show({ label: text ? ["Record", h("span", { class: "num" }, minus(text)), pretty(unit)] : "Type the reading", ready: Boolean(text), reasons });
  }
  show();
  return { update, focus: input };
}
