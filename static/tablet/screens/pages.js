/** What every page outside a run shares: head with tools, body of bands. */
import { h, put } from "../dom.js";
import { hasGloves, isDark, turnGloves, turnTheme } from "../look.js";

/** Light or dark, and glove mode, as two buttons that say what they will do. @param {string} kind class of the buttons */
export function lookTools(kind = "tool") {
  const theme = h("button", { type: "button", class: kind, "data-theme-button": true, on: { click: () => { turnTheme(); say(); } } });
  const gloves = h("button", { type: "button", class: kind, "data-gloves-button": true, on: { click: () => { turnGloves(); say(); } } });
  function say() {
    put(theme, isDark() ? "Light screen" : "Dark screen");
    put(gloves, hasGloves() ? "Gloves off" : "Gloves on");
  }
  say();
  return [theme, gloves];
}

/**
 * @param {any} app @param {{title: string, under?: any, back?: boolean, tools?: any[], lead?: any}} spec @param {...any} bands
 * @returns {HTMLElement}
 */
export function page(app, spec, ...bands) {
  const back = spec.back === false ? null : h("button", { type: "button", class: "tool", "data-back": true, on: { click: () => app.go("home") } }, "Back");
  return h("div", { class: "page" },
    h("header", { class: `page-head ${spec.lead ? "led" : ""}` }, spec.lead, h("div", {}, h("h1", { tabindex: "-1" }, spec.title), spec.under ? h("p", {}, spec.under) : null), h("div", { class: "tools" }, spec.tools, back)),
    h("main", { class: "page-body" }, bands));
}

/** A band of the page; `front` is the one where the next thing to do stands. @param {{title?: string, front?: boolean, name?: string}} spec @param {...any} kids */
export const band = (spec, ...kids) => h("section", { class: `band ${spec.front ? "front" : ""}`, "data-band": spec.name ?? null }, spec.title ? h("h2", {}, spec.title) : null, kids);

/** Rows of a term and what is said of it. @param {[string, any][]} rows */
export const facts = (rows) => h("dl", { class: "facts" }, rows.map(([k, v]) => h("div", {}, h("dt", {}, k), h("dd", {}, v))));
