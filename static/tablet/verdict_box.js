/** The box beside a reading: the verdict's word and its mark, which is a small scale. */
import * as drawing from "../core/drawing.js";
import { h, put } from "./dom.js";
import { redraw, reword } from "./redraw.js";

/** @param {HTMLElement} box @param {string | null} verdict @param {string} [empty] what stands there without a verdict */
export function showVerdict(box, verdict, empty = "") {
  if (!box.firstElementChild) put(box, h("span", { class: "at", "aria-hidden": "true" }), h("span"));
  if (box.dataset.verdict !== (verdict ?? "none")) {
    box.dataset.verdict = verdict ?? "none";
    redraw(/** @type {Element} */ (box.firstElementChild), verdict && verdict !== "not judged" ? drawing.mark(verdict) : "");
  }
  reword(/** @type {Node} */ (box.lastChild), verdict ?? empty);
}
