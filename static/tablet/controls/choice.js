/** Choice: a branch, as large rows that name where they lead. None is marked beforehand. */
import { h, part, put } from "../dom.js";
import { reasonList } from "../acting.js";
import { alertUser } from "../announce.js";

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const rows = ctx.step.control.options.map((/** @type {any} */ option) => {
    const node = /** @type {HTMLButtonElement} */ (h("button", { type: "button", class: "way", "data-option": option.value, on: { click: () => choose(option) } },
      h("b", {}, option.label), option.text ? h("span", {}, option.text) : null, h("span", { "data-shut": true })));
    return { node, option };
  });
  put(part(el.r, "options"), rows.map((/** @type {any} */ r) => r.node));
  /** @param {any} option */
  const moveOf = (option) => ctx.progress.moves?.find((/** @type {any} */ m) => m.choice === option.value);
  /** @param {any} option */
  async function choose(option) {
    const move = moveOf(option);
    if (move && !move.open) { alertUser(move.reasons.map((/** @type {any} */ r) => r.says).join(" ")); return; }
    await ctx.answer({ do: "chosen", value: option.value });
  }
  function update() {
    const reasons = ctx.shutReasons();
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    for (const { node, option } of rows) {
      const move = moveOf(option), shut = move && !move.open;
      node.setAttribute("aria-disabled", String(Boolean(shut)));
      node.classList.toggle("shut", Boolean(shut));
      put(part(node, "shut"), shut ? move.reasons.map((/** @type {any} */ r) => r.says).join(" ") : "");
    }
  }
  update();
  return { update };
}
