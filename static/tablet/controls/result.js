/** Result: a derived value with its uncertainty and limits, the formula it came from and that formula's published source. The person sees it and goes on. */
import { h, part, put } from "../dom.js";
import { acting, showReasons } from "../acting.js";
import { judged, showSentence } from "../judging.js";
import { notesPart } from "../meter.js";
import { redraw, reword } from "../redraw.js";
import { scaleText } from "../scale.js";
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
  const [value, box, scale, sentence] = ["value", "verdict-box", "scale", "sentence"].map((name) => part(el.l, name));
  const own = h("p", { class: "own-u", "data-own-u": true }), notes = notesPart();
  put(part(el.l, "unit"), pretty(unit));
  value.closest(".entry").after(own);
  scale.before(notes.node);
  const lines = references(ctx);
  put(part(el.l, "reference"), lines.length ? lines : "Worked out from this run’s own readings.");
  const act = acting(ctx, { run: record });
  put(part(el.r, "act"), act.node);
  const recorded = h("span", { class: "num" }), recordIt = ["Record", recorded, pretty(unit)];
  async function record() {
    const answer = await ctx.answer({ do: "worked-out" });
    if (answer.refused) put(part(el.l, "wrong"), answer.refused.says);
  }
  let drawn = "";
  function update() {
    const { value: text, shown, limits, plate, spread } = ctx.progress, isNumber = text !== null && /^-?[0-9.]+$/.test(String(text));
    const key = JSON.stringify([text, shown, limits, plate, spread]);
    if (key !== drawn) {
      drawn = key;
      const found = isNumber ? judged({ text: String(text), unit, limits, resolution: control.resolution, instrument: spread ?? null, protects: control.protects }) : null;
      // As many digits as its uncertainty leaves; what is compared with the limits stands in the sentence.
      const [figure, u] = (isNumber ? String(shown || text) : "").split(" ± ");
      value.dataset.long = figure.length > 8 ? "2" : figure.length > 5 ? "1" : "0";
      reword(value, isNumber ? minus(figure) : "no value");
      reword(own, u ? `± ${u} ${pretty(unit)} (k = 2)` : isNumber && control.spread ? "its uncertainty is not known" : "");
      reword(recorded, minus(figure));
      showVerdict(box, found?.verdict ?? null, limits ? limitWords(limits, unit) : "no limits");
      redraw(scale, limits && isNumber ? scaleText({ limits, plate, found, text: String(text), unit }) : "");
      if (found) showSentence(sentence, found);
      else put(sentence, text ? String(text) : "A reading that this needs is missing.");
    }
    notes.update(ctx.progress);
    const reasons = ctx.shutReasons();
    showReasons(part(el.r, "reasons"), reasons);
    act.show({ label: isNumber ? recordIt : "Record that it has no value", reasons });
  }
  update();
  return { update };
}
