/** The box beside a reading: the verdict's word and its mark, which is a small scale. */
import { put } from "./dom.js";
import { verdictMark } from "./icons.js";

/** @param {HTMLElement} box @param {string | null} verdict @param {string} [empty] what stands there without a verdict */
export function showVerdict(box, verdict, empty = "") {
  box.dataset.verdict = verdict ?? "none";
  put(box, verdict && verdict !== "not judged" ? verdictMark(verdict) : null, verdict ?? empty);
}
