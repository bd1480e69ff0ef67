/** Result: a derived value with its limits, the formula it came from and that formula's published source. The person sees it and goes on. */
import { h, part, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";
import { judged, showSentence } from "../judging.js";
import { limitScale } from "../scale.js";
import { showVerdict } from "../verdict_box.js";
import { limitWords, minus, pretty } from "../words.js";

/** Reference lines of the library formulas that the value uses. @param {any} ctx */
function references(ctx) {
  const names = ctx.step.control.formulas ?? [];
  return names.map((/** @type {string} */ name) => {
    const found = ctx.sheet.formulas?.[name];
    return h("p", {}, h("b", {}, name.replaceAll("_", " ")), found ? `: ${found.meaning} Source: ${found.reference}` : "");
  });
}

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const control = ctx.step.control, unit = control.unit.symbol;
  put(part(el.l, "unit"), pretty(unit));
  const lines = references(ctx);
  put(part(el.l, "reference"), lines.length ? lines : "Worked out from this run’s own readings.");
  const act = acting(ctx, { run: record });
  put(part(el.r, "act"), act.node);
  async function record() {
    const answer = await ctx.answer({ do: "worked-out" });
    if (answer.refused) put(part(el.l, "wrong"), answer.refused.says);
  }
  let drawn = "";
  function update() {
    const { value, limits, plate, spread } = ctx.progress, reasons = ctx.shutReasons(), isNumber = value !== null && /^-?[0-9.]+$/.test(String(value));
    const key = JSON.stringify([value, limits, plate, spread]);
    if (key !== drawn) {
      drawn = key;
      const found = isNumber ? judged({ text: String(value), unit, limits, resolution: control.resolution, instrument: spread ?? null, protects: control.protects }) : null;
      put(part(el.l, "value"), isNumber ? minus(String(value)) : "no value");
      showVerdict(part(el.l, "verdict-box"), found?.verdict ?? null, limits ? limitWords(limits, unit) : "no limits");
      put(part(el.l, "scale"), limits && isNumber ? limitScale({ limits, plate, found, text: String(value), unit }) : null);
      if (found) showSentence(part(el.l, "sentence"), found);
      else put(part(el.l, "sentence"), value ? String(value) : "A reading that this needs is missing.");
    }
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    act.show({ label: isNumber ? ["Record", h("span", { class: "num" }, minus(String(value))), pretty(unit)] : "Record that it has no value", reasons });
  }
  update();
  return { update };
}
