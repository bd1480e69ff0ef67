/**
 * Wait: what is left in figures read at two metres, elapsed time on a scale, readings that fell due meanwhile. The display
 * is a function of the run's clock and is drawn afresh on every tick; nothing counts here.
 */
import { h, part, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";
import { timeScale } from "../scale.js";
import { alertUser } from "../announce.js";
import { chime } from "../chime.js";
import { countdown, lasting, passed } from "../words.js";

/** The wait that this step is about: the one with the most time left. @param {any} ctx */
function theWait(ctx) {
  const waits = ctx.progress.waits ?? [];
  return waits.find((/** @type {any} */ w) => w.step === ctx.step.id) ?? [...waits].sort((a, b) => Number(b.left) - Number(a.left))[0] ?? null;
}

/** @param {any} ctx @param {string} id */
const isReading = (ctx, id) => ctx.sheet.steps.find((/** @type {any} */ s) => s.id === id)?.control.control === "number";

/** Wall time at which the wait ends at the earliest. @param {string} wall @param {number} left */
function endsAt(wall, left) {
  const zone = /([+-]\d\d):?(\d\d)$/.exec(wall);
  const offset = zone ? (Number(zone[1]) * 60 + Math.sign(Number(zone[1]) || 1) * Number(zone[2])) * 60000 : 0;
  return new Date(Date.parse(wall) + left * 1000 + offset).toISOString().slice(11, 19);
}

/** @param {string} text "6:18" */
const figures = (text) => text.split("").map((c) => (c === ":" ? h("span", { class: "c" }, ":") : h("span", {}, c)));

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const act = acting(ctx, { run: () => ctx.answer({ do: "waited" }) });
  put(part(el.r, "act"), act.node);
  let over = false;

  function update() {
    const wait = theWait(ctx), left = Math.max(0, Number(wait?.left ?? 0)), reasons = ctx.shutReasons();
    const hours = left >= 3600, far = part(el.l, "far");
    far.classList.toggle("hours", hours);
    put(far, figures(hours ? `${Math.floor(left / 3600)}:${String(Math.floor((left % 3600) / 60)).padStart(2, "0")}` : countdown(left)));
    put(part(el.l, "left"), left > 0 ? [h("b", {}, lasting(left)), " left", hours ? " (hours and minutes above)" : ""] : h("b", {}, "The time has passed"));
    put(part(el.l, "end"), left > 0 ? ["ends not before ", h("span", { class: "num" }, endsAt(ctx.run.now().wall, left))] : "");
    if (wait) {
      const least = Number(wait.least), elapsed = Number(wait.elapsed);
      put(part(el.r, "scale"), timeScale({ elapsed, least }));
      put(part(el.r, "sentence"), h("b", {}, passed(elapsed)), ` of at least ${countdown(least)} has passed by the running timer, which is what counts${wait.greatest && passed(wait.greatest) !== passed(elapsed) ? `; ${passed(wait.greatest)} by the clock, which is only compared` : ""}.`);
    }
    showDue();
    const other = reasons.filter((/** @type {any} */ r) => !(Number(r.left) > 0));
    put(part(el.r, "reasons"), other.length ? reasonList(other) : null);
    put(part(el.r, "note"), left > 0 ? `At the end: sound, vibration and words here. ${ctx.awake() ? "The screen stays on." : "Keep the screen on."}` : "");
    act.show({ label: left > 0 ? `Opens in ${countdown(left)}` : "The wait is over: go on", reasons });
    if (left > 0) over = false;
    else if (!over) { over = true; if (wait) { alertUser(`${ctx.step.title}: the wait is over.`); chime(); } }
  }
  function showDue() {
    // Only a coming reading falls due; another wait is no reading, and what was read before stands in the strip.
    const due = (ctx.progress.waits ?? []).filter((/** @type {any} */ w) => w.step && w.step !== ctx.step.id && w.says && w !== theWait(ctx) && isReading(ctx, w.step));
    part(el.r, "due").hidden = !due.length;
    put(part(el.r, "due-list"), due.map((/** @type {any} */ w) => h("li", {}, h("span", { class: "t" }), h("span", {}, w.says), h("span", { class: "v" }, Number(w.left) > 0 ? `in ${countdown(w.left)}` : "due now"))));
  }
  update();
  return { update };
}
