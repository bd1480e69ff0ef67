/** Remark: words of the person who records. */
import { part, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const input = /** @type {HTMLTextAreaElement} */ (el.l.querySelector("[data-field=text] textarea"));
  input.value = ctx.draft.text ?? "";
  input.addEventListener("input", () => { ctx.keep({ text: input.value }); update(); });
  const act = acting(ctx, { run: record });
  put(part(el.r, "act"), act.node);
  async function record() {
    const answer = await ctx.answer({ do: "remarked", text: input.value.trim() });
    if (answer.refused) { put(part(el.l, "wrong=text"), answer.refused.says); input.focus(); }
  }
  function update() {
    const reasons = ctx.shutReasons(), text = input.value.trim();
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    act.show({ label: text ? "Record the remark" : ctx.step.control.required ? "Write the remark" : "Nothing to remark", ready: Boolean(text) || !ctx.step.control.required, reasons });
  }
  update();
  return { update };
}
