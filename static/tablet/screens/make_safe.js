/**
 * MAKE SAFE: the list. Opening it changes and records nothing; only its own steps record. Its first line names the site's real
 * emergency off, because this is none. Never gated; never takes a lock or an earth off.
 */
import { field, h, put } from "../dom.js";
import { holdButton } from "../holding.js";
import { overHead, overWork } from "./over_parts.js";
import { SHUT, STATE_WORDS, minute, sourceTitle } from "../words.js";

/** The site of the run. @param {any} ctx */
export const siteOf = (ctx) => ctx.app.held.kit?.registers?.sites?.[ctx.state.started?.site];

/** @param {any} ctx */
export function makeSafePage(ctx) {
  const site = siteOf(ctx), list = h("ol", { class: "list", "data-safe-list": true }), says = h("p", { class: "nothing", role: "status", "data-nothing": true }), refused = h("p", { class: "refused" });
  const remark = field({ label: "A remark on how it was made safe" }), foot = h("div");
  const over = ["ended", "voided"].includes(ctx.state.phase);

  /** @param {any} item @param {boolean} done */
  async function record(item, done) {
    const r = await ctx.send({ do: "safe-step-done", item: item.id, done });
    put(refused, r.refused?.says ?? "");
    ctx.repaint();
    paint();
  }
  /** What a line makes of a source; a lock, a proof and an earth stay. @param {string} source @param {string} to */
  function effect(source, to) {
    const now = ctx.state.sources[source]?.state ?? "unknown", words = /** @type {any} */ (STATE_WORDS);
    const stays = now === to || (to === "off" && SHUT.includes(now));
    return `${sourceTitle(ctx.sheet, source)}: ${stays ? `is ${words[now]}, stays so` : `now ${words[now]}, then ${words[to]}`}`;
  }
  /** @param {any} item @param {number} k */
  function row(item, k) {
    const seq = ctx.state.safe?.[item.id], at = seq === undefined ? null : ctx.state.log?.find((/** @type {any} */ r) => r.seq === seq);
    const sets = Object.entries(item.sets ?? {}).map(([s, v]) => effect(s, /** @type {string} */ (v)));
    return h("li", { class: seq === undefined ? "" : "done", "data-item": item.id }, h("span", { class: "n" }, String(k + 1)), h("span", { class: "w" }, item.text, item.note ? h("span", {}, item.note) : null, seq === undefined ? sets.map((s) => h("span", {}, s)) : null),
      seq !== undefined ? h("span", { class: "v" }, `recorded ${minute(at?.wall ?? "")}`) : over ? null : h("span", { class: "two-acts" },
        h("button", { type: "button", class: "act", "data-was-so": item.id, on: { click: () => void record(item, false) } }, "Was so"), h("button", { type: "button", class: "act", "data-done": item.id, on: { click: () => void record(item, true) } }, "Done")));
  }
  function paint() {
    const n = Object.keys(ctx.run.state.safe ?? {}).length, all = ctx.sheet.make_safe.length;
    ctx.state = ctx.run.state;
    put(says, n === 0 ? [h("b", {}, "Nothing has been changed yet."), h("span", {}, "Only the steps below record; none of them switches anything by itself.")] : [h("b", {}, `${n} of ${all} steps ${n === 1 ? "is" : "are"} recorded.`), h("span", {}, n < all ? "Go on down the list." : "Say below that the list is done.")]);
    put(list, ctx.sheet.make_safe.map(row));
    put(foot, over || n === 0 ? null : [remark.node, end.node]);
  }
  const end = holdButton({ label: "The list is done", run: () => void finish() });
  async function finish() {
    const r = await ctx.send({ do: "safe-ended", remark: remark.input.value.trim() });
    put(refused, r.refused?.says ?? "");
    if (!r.refused) ctx.shut();
  }
  const eo = site?.card?.emergency_off ?? [];
  paint();
  const node = overWork([
    overHead(ctx, "Make safe", "", "Leave the list"),
    h("div", { class: "eo", "data-eo": true }, h("b", {}, "Danger to life: ", eo.length ? eo.map((/** @type {any} */ e, /** @type {number} */ k) => [k ? "; " : "", h("span", { class: "whole" }, e.name), ` ${e.where}`]) : "the site’s emergency off"),
      h("p", {}, eo.length ? "Press the real one: this list operates nothing." : "The kit names none for this site; you must know where it is. This list operates nothing."),
      h("button", { type: "button", class: "close", "data-card": true, on: { click: () => ctx.over("card", { back: "make_safe" }) } }, "Site card")),
    says, list], [refused, foot]);
  return { node, update: () => undefined };
}
