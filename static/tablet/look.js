/** Light or dark, and glove mode: chosen by a button on this tablet. Kept where it may be lost without harm. */

const KEYS = { theme: "fieldkit-theme", gloves: "fieldkit-gloves" };

/** @param {string} key */
function kept(key) {
  try { return localStorage.getItem(key); } catch { return null; }
}
/** @param {string} key @param {string} value */
function keep(key, value) {
  try { localStorage.setItem(key, value); } catch { /* a look that is forgotten harms nobody */ }
}

/** Put on the look that was chosen last. */
export function dress() {
  document.documentElement.dataset.theme = kept(KEYS.theme) === "dark" ? "dark" : "light";
  document.documentElement.dataset.gloves = kept(KEYS.gloves) === "on" ? "on" : "off";
}
export const isDark = () => document.documentElement.dataset.theme === "dark";
export const hasGloves = () => document.documentElement.dataset.gloves === "on";
export function turnTheme() {
  document.documentElement.dataset.theme = isDark() ? "light" : "dark";
  keep(KEYS.theme, document.documentElement.dataset.theme);
}
export function turnGloves() {
  document.documentElement.dataset.gloves = hasGloves() ? "off" : "on";
  keep(KEYS.gloves, document.documentElement.dataset.gloves ?? "off");
}
