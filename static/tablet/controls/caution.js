/** Caution: read aloud, then press and hold for a second. Says who heard it, and what the run already shows. */
import { h, part, put } from "../dom.js";
import { acting } from "../acting.js";
import { list, minute, minus, personName } from "../words.js";
import { isShown, rowTitle } from "../strip.js";

/** The last three rows of the log that did something. @param {any} state */
function shown(state) {
  return (state.log ?? []).filter((/** @type {any} */ r) => isShown(r) && r.step && r.kind !== "acknowledged").slice(-3).map((/** @type {any} */ r) => h("li", {},
    h("span", { class: "t" }, minute(r.wall)), h("span", {}, rowTitle(r), r.text && r.unit ? `, ${minus(r.text)} ${r.unit}` : ""), h("span", {}, personName(state, r.by))));
}

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const control = ctx.step.control;
  const panel = part(el.l, "panel");
  panel.dataset.signal = control.signal;
  if (control.signal === "NOTICE") part(el.l, "triangle").remove();
  put(part(el.l, "signal-word"), control.signal);
  put(part(el.l, "hazard"), control.hazard);
  put(part(el.l, "consequence"), control.consequence);
  put(part(el.l, "avoid"), control.avoid.map((/** @type {string} */ line) => h("li", {}, line)));
  const rows = shown(ctx.state);
  put(part(el.r, "shown"), rows);
  part(el.r, "known").hidden = rows.length === 0;
  const present = ctx.people();
  put(part(el.r, "heard"), present.length > 1 ? h("p", { class: "with" }, "It is read aloud to ", h("b", {}, list(present.map((/** @type {any} */ p) => p.name))), ".") : null);
  const act = acting(ctx, { held: true, run: () => ctx.answer({ do: "acknowledged", heard: ctx.state.started.present }) });
  put(part(el.r, "act"), act.node);
  function update() {
    act.show({ label: present.length < 2 ? "I have read this, and I am alone here" : "I have read this to everyone here", reasons: ctx.shutReasons() });
  }
  update();
  return { update };
}
