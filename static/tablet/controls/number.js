/**
 * Number: one reading, typed as text, judged while it is typed. What was typed stays on a refusal, with the words beside
 * the field. Enter never records: a scanner or a sleeve must not.
 * A key touches only what the typed text changes (judging, drawing, words); everything else is brought up to date by the clock.
 */
import { h, part, put } from "../dom.js";
import { acting, showReasons } from "../acting.js";
import { keypad } from "../keypad.js";
import { judged, showSentence, showWords } from "../judging.js";
import { meterPart } from "../meter.js";
import { redraw, reword } from "../redraw.js";
import { scaleText } from "../scale.js";
import { showVerdict } from "../verdict_box.js";
import { sayOncePaused } from "../announce.js";
import { spoken } from "../spoken.js";
import { acceptWords, limitWords, minus, pretty } from "../words.js";

/** The words follow when no key came for so long: whoever still types does not read them, and the next verdict comes sooner. */
const WORDS_MS = 60;

/** Why Record is shut where the meter is refused; what to do about it stands beside the meter. */
const OTHER_METER = { says: "Opens with another meter.", left: null };

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const control = ctx.step.control, unit = control.unit.symbol;
  const [input, wrong, box, scale, sentence, words] = ["typed", "wrong", "verdict-box", "scale", "sentence", "spoken"].map((name) => part(el.l, name));
  const reasonsAt = part(el.r, "reasons"), old = ctx.lastReading(ctx.step.id);
  const meter = meterPart(part(el.l, "meter"), ctx, { asked: control.meter, changed: show });
  put(part(el.l, "label"), `${ctx.step.title}, in ${pretty(unit)}`);
  put(part(el.l, "unit"), pretty(unit));
  // A long unit stands over the words, so that the figures keep their room.
  input.closest(".well")?.classList.toggle("stack", pretty(unit).length > 2);
  put(part(el.r, "pad"), keypad(() => input));
  const act = acting(ctx, { run: record });
  put(part(el.r, "act"), act.node);
  const typed = h("span", { class: "num" }), recordIt = ["Record", typed, pretty(unit)];
  let today = ctx.run.now().wall, reasons = /** @type {any[]} */ ([]);
  let said = /** @type {{text: string, found: any}} */ ({ text: "", found: null }), soon = /** @type {ReturnType<typeof setTimeout> | undefined} */ (undefined);
  input.value = ctx.draft.text ?? "";

  input.addEventListener("input", () => {
    if (wrong.firstChild) { put(wrong); input.setAttribute("aria-invalid", "false"); }
    ctx.keep({ text: input.value });
    show();
  });
  input.addEventListener("keydown", (/** @type {KeyboardEvent} */ e) => { if (e.key === "Enter") e.preventDefault(); });

  async function record() {
    const { instrument } = ctx.progress;
    const answer = await ctx.answer({ do: "read", text: input.value.trim(), unit, instrument: instrument?.id ?? null, range: instrument?.range ?? "" });
    if (!answer.refused) return;
    put(wrong, answer.refused.says);
    input.setAttribute("aria-invalid", "true");
    input.focus();
  }

  /** What the typed text and the meter's range say: the verdict and its scale at once, the words once typing rests. */
  function show() {
    const text = input.value.trim(), { limits, plate, instrument } = ctx.progress;
    const long = text.length > 6 ? "2" : text.length > 4 ? "1" : "0";
    if (input.dataset.long !== long) input.dataset.long = long;
    const found = text ? judged({ text, unit, limits, resolution: control.resolution, instrument, protects: control.protects, day: today }) : null;
    const usable = found && !found.refused, unfit = !text && Boolean(limits?.coarse || limits?.fault);
    showVerdict(box, usable ? found.verdict : unfit ? "not judged" : null, text ? "not a number yet" : limitWords(limits, unit) || "no limits");
    redraw(scale, limits ? scaleText({ limits, plate, found: usable ? found : null, text: usable ? text : null, unit, old }) : "");
    label(text);
    sayOncePaused(usable ? `${minus(text)} ${pretty(unit)}, ${found.verdict}` : "");
    said = { text, found };
    clearTimeout(soon);
    soon = setTimeout(say, WORDS_MS);
  }
  /** The typed number in words, and the judge's sentence. */
  function say() {
    const { text, found } = said, { limits } = ctx.progress, aloud = spoken(text), much = aloud.length > 36 ? "1" : "0";
    reword(words, aloud);
    if (words.dataset.long !== much) words.dataset.long = much;
    if (!text) showWords(sentence, "", "");
    if (found) showSentence(sentence, { ...found, reach: limits?.reach });
    else showWords(sentence, ...acceptWords(limits, unit));
  }
  /** @param {string} text */
  function label(text) {
    reword(typed, minus(text));
    act.show({ label: text ? recordIt : "Type the reading", ready: Boolean(text), reasons });
  }
  function update() {
    today = ctx.run.now().wall;
    meter.update();
    reasons = [...(meter.refused() ? [OTHER_METER] : []), ...ctx.shutReasons()];
    showReasons(reasonsAt, ctx.shutReasons());
    label(input.value.trim());
  }
  update();
  show();
  say();
  return { update, focus: input, stop: () => clearTimeout(soon) };
}
