/**
 * The tablet's own keypad: digits, point, comma, plus-minus, rub out, clear. It writes into the text field that was last
 * in focus, at the caret, as a keyboard would; it never changes what was typed by itself.
 */
import { h } from "./dom.js";
import { icon } from "./icons.js";

/** @type {[string, string, string][]} key, class, name for screen readers */
const KEYS = [["7", "", ""], ["8", "", ""], ["9", "", ""], ["back", "fn", "Rub out"], ["4", "", ""], ["5", "", ""], ["6", "", ""], ["Clear", "fn", "Clear"],
  ["1", "", ""], ["2", "", ""], ["3", "", ""], ["±", "fn pm", "Plus or minus"], ["0", "two", ""], [".", "", "Point"], [",", "", "Comma"]];

/** Type one key into a field. @param {HTMLInputElement} input @param {string} key */
export function press(input, key) {
  const start = input.selectionStart ?? input.value.length, end = input.selectionEnd ?? start;
  if (key === "Clear") input.value = "";
  else if (key === "±") input.value = /^[-−]/.test(input.value) ? input.value.slice(1) : `-${input.value}`;
  else if (key === "back") input.setRangeText("", start === end ? Math.max(0, start - 1) : start, end, "end");
  else input.setRangeText(key, start, end, "end");
  if (key === "Clear" || key === "±") input.setSelectionRange(input.value.length, input.value.length);
  input.dispatchEvent(new Event("input", { bubbles: true }));
}

/** @param {() => HTMLInputElement} target the field that is being typed in @returns {HTMLElement} */
export function keypad(target) {
  const key = (/** @type {[string, string, string]} */ [text, kind, name]) => h("button", {
    type: "button", class: `key ${kind}`, "data-key": text, "aria-label": name || null,
    on: {
      // Keep the caret where it is: the field must not lose focus to a key.
      pointerdown: (/** @type {Event} */ e) => e.preventDefault(),
      click: () => { const input = target(); if (document.activeElement?.tagName !== "BUTTON") input.focus({ preventScroll: true }); press(input, text); },
    },
  }, text === "back" ? icon("backspace") : text);
  return h("div", { class: "pad", role: "group", "aria-label": "Keypad", "data-keypad": true }, KEYS.map(key));
}
