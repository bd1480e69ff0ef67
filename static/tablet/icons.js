/** Marks as elements: the symbols and verdict marks of core/drawing, hidden from readers because a word stands beside each. */
import * as drawing from "../core/drawing.js";
import { drawn } from "./dom.js";

/** @param {string} name a symbol of core/drawing: "lock", "make-safe", "pen" ... @returns {Element} */
export function icon(name) {
  const node = drawn(drawing.symbol(name));
  node.setAttribute("aria-hidden", "true");
  return node;
}

/** @param {string} verdict @returns {Element} */
export function verdictMark(verdict) {
  const node = drawn(drawing.mark(verdict));
  node.setAttribute("aria-hidden", "true");
  return node;
}
