/** What stands in the white band: a control, the ways on after a reading, or the page of a phase (states, stopped, end). */
import { cloneControl, stepHead, work } from "../step_page.js";
import { CONTROLS } from "../controls/all.js";
import { h, put } from "../dom.js";
import { confirmPage, declarePage } from "./states.js";
import { afterPage, endPage, stoppedPage } from "./ending.js";
import { waysPage } from "./ways.js";

/** A control that answers the open step. @param {any} ctx */
function controlPage(ctx) {
  const { control } = ctx.step.control, el = cloneControl(ctx.templates, control);
  const refused = h("p", { class: "refused", "data-refused": true });
  const { node, left, right } = work([stepHead(ctx.sheet, ctx.step, { level: ctx.progress.level, note: noteOf(ctx) })], []);
  left.append(...el.l.childNodes);
  right.append(refused, ...el.r.childNodes);
  const mounted = /** @type {any} */ (CONTROLS)[control].mount(ctx, { l: left, r: right });
  return {
    node, focus: mounted.focus && matchMedia("(min-width: 641px)").matches ? mounted.focus : null,
    update: () => { mounted.update(); if (refused.textContent && !ctx.progress.reasons?.length) return; },
    stop: () => mounted.stop?.(),
    /** Say a refusal here unless the control said it beside its field. @param {string} says */
    refuse: (says) => {
      const said = [...node.querySelectorAll(".wrong, .refused")].some((n) => n !== refused && n.textContent);
      put(refused, said ? "" : says);
    },
  };
}

/** A short word on the right of the step's head. @param {any} ctx */
function noteOf(ctx) {
  if (ctx.step.control.limits?.guarded || ctx.progress.limits?.guarded) return "guarded limits";
  return ctx.step.section;
}

/** @param {any} ctx @returns {{node: HTMLElement, update?: () => void, stop?: () => void, refuse?: (says: string) => void, focus?: any}} */
export function openPage(ctx) {
  const { state } = ctx;
  if (state.phase === "declare" || state.phase === "new") return declarePage(ctx);
  if (state.phase === "confirm") return confirmPage(ctx);
  if (state.phase === "stopped") return stoppedPage(ctx);
  if (state.phase === "ended" || state.phase === "voided") return afterPage(ctx);
  if (state.node === "@end") return endPage(ctx);
  if (state.pending || !ctx.step) return waysPage(ctx);
  return controlPage(ctx);
}
