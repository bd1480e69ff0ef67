/** Caution: read aloud, then press and hold for a second. Says who heard it, and what the run already shows. */
import { h, part, picks, put } from "../dom.js";
import { acting } from "../acting.js";
import { minute, minus, personName } from "../words.js";
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
  const heard = present.length > 1
    ? picks({ legend: "Who heard it", many: true, chosen: present.map((/** @type {any} */ p) => p.id), onchange: () => update(),
      options: present.map((/** @type {any} */ p) => ({ value: p.id, label: p.name })) })
    : null;
  if (heard) put(part(el.r, "heard"), heard.node);
  const who = () => heard?.values() ?? present.map((/** @type {any} */ p) => p.id);
  const act = acting(ctx, { held: true, run: () => ctx.answer({ do: "acknowledged", heard: who() }) });
  put(part(el.r, "act"), act.node);

  function update() {
    const alone = present.length < 2;
    act.show({ label: alone ? "I have read this, and I am alone here" : "I have read this to everyone here", reasons: ctx.shutReasons(), ready: who().length > 0,
      small: who().length ? undefined : "Name at least one person who heard it" });
  }
  update();
  return { update };
}
