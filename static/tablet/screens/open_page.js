/** What stands in the white band: a control, the ways on after a reading, or the page of a phase (states, stopped, end). */
import { cloneControl, stepHead, work } from "../step_page.js";
import { CONTROLS } from "../controls/all.js";
import { h, put } from "../dom.js";
import { ladder } from "../ladder.js";
import { confirmPage, declarePage } from "./states.js";
import { afterPage, endPage, stoppedPage } from "./ending.js";
import { waysPage } from "./ways.js";

/** A control that answers the open step. @param {any} ctx */
function controlPage(ctx) {
  const { control } = ctx.step.control, el = cloneControl(ctx.templates, control);
  const refused = h("p", { class: "refused", "data-refused": true }), round = h("div", { class: "round", "data-ways-round": true });
  const { node, left, right } = work([stepHead(ctx.sheet, ctx.step, { level: ctx.progress.level, note: noteOf(ctx) })], []);
  left.append(...el.l.childNodes);
  const rungs = ladder(ctx);
  // Where there is a keypad the ladder stands below it, so that the reading and its button keep their place.
  if (rungs && control !== "number") left.append(rungs);
  right.append(refused, round, ...el.r.childNodes);
  if (rungs && control === "number") right.append(rungs);
  const mounted = /** @type {any} */ (CONTROLS)[control].mount(ctx, { l: left, r: right });
  waysRound(ctx, round);
  return {
    node, focus: mounted.focus && matchMedia("(min-width: 641px)").matches ? mounted.focus : null,
    update: () => { mounted.update(); waysRound(ctx, round); },
    stop: () => mounted.stop?.(),
    /** Say a refusal here unless the control said it beside its field. @param {string} says */
    refuse: (says) => {
      const said = [...node.querySelectorAll(".wrong, .refused")].some((n) => n !== refused && n.textContent);
      put(refused, said ? "" : says);
    },
  };
}

/** Labelled ways round a step that cannot be done: taken without an answer. @param {any} ctx @param {HTMLElement} node */
function waysRound(ctx, node) {
  const ways = (ctx.progress.moves ?? []).filter((/** @type {any} */ m) => m.button && m.manner === "plain" && ["done", "pass"].includes(m.on) && m.open);
  const key = ways.map((/** @type {any} */ m) => m.move + m.label).join("|");
  if (node.dataset.shown === key) return;
  node.dataset.shown = key;
  put(node, ways.map((/** @type {any} */ m) => h("button", { type: "button", class: "way", "data-move": m.move, on: { click: () => void ctx.answer({ do: "went-on", move: m.move }) } }, h("b", {}, m.label), h("span", {}, "Goes round this step without an answer"))));
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
