/** The small pages beside a step: this run, remark, picture, trip or something odd, pause, site card, lock board, ending early. */
import { field, h, picks, put } from "../dom.js";
import { pictureBody, showPreview } from "../controls/picture.js";
import { overHead, overWork } from "./over_parts.js";
import { lookTools } from "./pages.js";
import { cardBody } from "./card.js";
import { siteOf } from "./make_safe.js";
import { boardList } from "./states.js";

/** @param {string} title @param {string} small @param {() => void} run @param {Record<string, any>} [attributes] */
const way = (title, small, run, attributes = {}) => h("button", { type: "button", class: "way", ...attributes, on: { click: run } }, h("b", {}, title), h("span", {}, small));
/** @param {string} label @param {() => void} run @param {string} name */
const first = (label, run, name) => h("div", { class: "acts one" }, h("button", { type: "button", class: "act first", [`data-${name}`]: true, on: { click: run } }, label));

/** What else can be done in this run. @param {any} ctx */
export function thisRunPage(ctx) {
  const may = ctx.progress.may ?? [], can = (/** @type {string} */ what) => !ctx.run.readonly && may.includes(what);
  const node = overWork([overHead(ctx, "This run", `Run ${ctx.state.run}`), h("div", { class: "menu" },
    can("trip") ? way("Trip, or something odd", "Which indicator, at what level, what was done", () => ctx.over("trip"), { "data-to": "trip" }) : null,
    way("Site card", "Emergency off, telephone, first aid", () => ctx.over("card", { back: "this_run" }), { "data-to": "card" }),
    way("Sums", "Work a number out; nothing is recorded", () => ctx.over("sums"), { "data-to": "sums" }),
    way("Locks and earths", "On this cabinet now, with their holders", () => ctx.over("board"), { "data-to": "board" }),
    can("pause") ? way("Pause", "Everything is confirmed again afterwards", () => ctx.over("pause"), { "data-to": "pause" }) : null,
    can("change-person") ? way("Another person records", "The one who leaves signs", () => ctx.over("person"), { "data-to": "person" }) : null,
    can("remark") ? way("Remark", "Beside this step", () => ctx.over("remark"), { "data-to": "remark" }) : null,
    can("picture") ? way("Picture", "Beside this step", () => ctx.over("picture"), { "data-to": "picture" }) : null,
    can("end") && ctx.state.node !== "@end" ? way("End the run early", "With a reason; it stays in the record as stopped", () => ctx.over("end_early"), { "data-to": "end_early" }) : null,
    can("void") ? way("Void this run", "With a reason; it stays, marked as void", () => ctx.over("void_run"), { "data-to": "void_run" }) : null,
    way("To the start page", "The run stays open and waits go on", () => ctx.app.go("home"), { "data-to": "home" })),
  h("p", { class: "note" }, "To correct something: scroll up in the strip and touch its row."),
  h("div", { class: "buttons" }, lookTools("act"))]);
  return { node };
}

/** @param {any} ctx */
export function remarkPage(ctx) {
  const text = field({ label: "Remark", rows: true, attributes: { "data-remark": true } });
  const go = async () => {
    if (!text.input.value.trim()) { text.wrong("Nothing is written here."); return; }
    const r = await ctx.send({ do: "remarked", step: ctx.step?.id ?? ctx.state.node, text: text.input.value.trim() });
    if (r.refused) text.wrong(r.refused.says); else ctx.shut();
  };
  return { node: overWork([overHead(ctx, "Remark", "Beside this step"), h("div", { class: "fields" }, text.node)], [first("Record the remark", () => void go(), "record-remark")]), focus: text.input };
}

/** The file field, looking like the button that it is. @param {HTMLElement} node */
function camera(node) {
  node.dataset.field = "picture";
  return node;
}

/** @param {any} ctx */
export function picturePage(ctx) {
  const file = field({ label: "Take the picture", kind: "file", attributes: { accept: "image/*", capture: "environment", "data-picture": true } });
  const note = field({ label: "What it shows", attributes: { "data-note": true } }), preview = h("div");
  let kept = /** @type {any} */ (null);
  const button = first("Record the picture", () => void go(), "record-picture"), act = /** @type {HTMLButtonElement} */ (button.firstElementChild);
  act.disabled = true;
  file.input.addEventListener("change", async () => {
    const taken = file.input.files?.[0];
    if (!taken) return;
    file.wrong("");
    try { kept = await ctx.run.picture(taken); showPreview(preview, taken); act.disabled = false; } catch (problem) { file.wrong(/** @type {any} */ (problem).says ?? "This picture could not be kept. Take it again."); }
  });
  const go = async () => {
    const r = await ctx.send({ do: "pictured", step: ctx.step?.id ?? ctx.state.node, ...pictureBody(kept), note: note.input.value.trim() });
    if (r.refused) note.wrong(r.refused.says); else ctx.shut();
  };
  return { node: overWork([overHead(ctx, "Picture", "Beside this step"), h("div", { class: "shot" }, camera(file.node), preview, note.node)], [button]) };
}

/** @param {any} ctx */
export function tripPage(ctx) {
  const kind = picks({ legend: "What it was", options: [{ value: "trip", label: "A trip" }, { value: "odd", label: "Something odd" }], chosen: ["trip"] });
  const indicator = field({ label: "Which indicator, or what was seen, heard or smelt", attributes: { "data-indicator": true } });
  const level = field({ label: "At what level or reading", help: "With its unit, as the meter showed it; empty if none.", attributes: { "data-level": true } });
  const done = field({ label: "What was done", rows: true, attributes: { "data-did": true } }), refused = h("p", { class: "refused" });
  const go = async () => {
    if (!indicator.input.value.trim()) { indicator.wrong("Name the indicator, or what was noticed."); return; }
    if (!done.input.value.trim()) { done.wrong("Say what was done, even if it was nothing."); return; }
    const r = await ctx.send({ do: "trip-recorded", kind: kind.values()[0], indicator: indicator.input.value.trim(), level: level.input.value.trim(), done: done.input.value.trim() });
    put(refused, r.refused?.says ?? "");
    if (!r.refused) ctx.shut();
  };
  return { node: overWork([overHead(ctx, "Trip, or something odd"), h("p", { class: "say" }, "If it can hurt: make safe first, write it afterwards. A trip pauses the run: each source is then confirmed again. Something odd is only noted."), h("div", { class: "fields" }, kind.node, indicator.node, level.node, done.node)], [refused, first("Record it", () => void go(), "record-trip")]) };
}

/** @param {any} ctx */
export function pausePage(ctx) {
  const reason = field({ label: "Why", attributes: { "data-reason": true } });
  const go = async () => {
    const r = await ctx.send({ do: "paused", reason: reason.input.value.trim() });
    if (r.refused) reason.wrong(r.refused.says); else ctx.shut();
  };
  return { node: overWork([overHead(ctx, "Pause"), h("p", { class: "say" }, "Afterwards each source is confirmed again, what was shown counts no more, and what was proved dead counts as locked. Sources that are on stay on: say who watches."), h("div", { class: "fields" }, reason.node)], [first("Pause the run", () => void go(), "record-pause")]) };
}

/** @param {any} ctx @param {{back?: string}} args */
export function cardPage(ctx, args) {
  const back = args.back ? h("div", { class: "buttons" }, h("button", { type: "button", class: "act", on: { click: () => ctx.over(args.back) } }, args.back === "make_safe" ? "Back to the list" : "Back to this run")) : null;
  return { node: overWork([overHead(ctx, siteOf(ctx)?.name ?? "Site card", "Site card"), cardBody(siteOf(ctx)), back]) };
}

/** @param {any} ctx */
export function boardPage(ctx) {
  return { node: overWork([overHead(ctx, "Locks and earths", `Cabinet ${ctx.state.started?.cabinet ?? ""}`), boardList(ctx), h("p", { class: "note" }, "They belong to the cabinet and outlive the run.")]) };
}

/** @param {any} ctx */
export const endEarlyPage = (ctx) => reasonPage(ctx, { title: "End the run early", says: "Make safe first where a source is live. The run stays in the record as stopped; nothing is removed.", label: "Why the run ends here", act: "End the run as stopped", name: "end-early", command: { do: "ended", outcome: "stopped" } });

/** @param {any} ctx */
export const voidPage = (ctx) => reasonPage(ctx, { title: "Void this run", says: "For a run that was begun by mistake. It stays, with everything in it, marked as void, and nothing can follow.", label: "Why it is void", act: "Void this run", name: "void-run", command: { do: "voided" } });

/** A page that asks for a reason and sends one command with it. @param {any} ctx @param {{title: string, says: string, label: string, act: string, name: string, command: any}} spec */
function reasonPage(ctx, spec) {
  const reason = field({ label: spec.label, rows: true, attributes: { "data-reason": true } });
  const go = async () => {
    if (!reason.input.value.trim()) { reason.wrong("Give the reason; it stands in the record."); return; }
    const r = await ctx.send({ ...spec.command, reason: reason.input.value.trim() });
    if (r.refused) reason.wrong(r.refused.says); else ctx.shut();
  };
  return { node: overWork([overHead(ctx, spec.title), h("p", { class: "say" }, spec.says), boardList(ctx), h("div", { class: "fields" }, reason.node)], [first(spec.act, () => void go(), spec.name)]) };
}
