/**
 * Sums: the formulas of the kit, to work a number out. A page of its own, and a page over the open step of a run, where
 * MAKE SAFE stays in reach. Nothing is recorded here; going back lands on the same step.
 */
import { alertUser } from "../announce.js";
import { chime } from "../chime.js";
import { h, put } from "../dom.js";
import { now } from "../clockwatch.js";
import { sumOf } from "../sums/book.js";
import { listView } from "../sums/list.js";
import { metersOf } from "../sums/meters.js";
import { sumView } from "../sums/sum.js";
import { opensWords } from "../opens.js";
import { lower } from "../words.js";
import { makeSafeMark } from "../frame.js";
import { overHead } from "./over_parts.js";
import { page } from "./pages.js";

/** Said under the list, and shorter beside a sum, whose page says it in full at its foot. */
const UNRECORDED = "Sums are not recorded, and nothing from here enters a run by itself.", SHORT = "Sums: nothing is recorded";
const NONE = "The kit on this tablet has no sums: it was made before there were any. Take the kit again to have them.";

/** The sums of the kit, or words on why there are none. @param {any} host @returns {Promise<{book: any, says: string}>} */
async function bookOf(host) {
  try {
    const book = (await host.sums?.()) ?? null;
    return { book, says: book ? "" : NONE };
  } catch (problem) {
    return { book: null, says: /** @type {any} */ (problem).says ?? String(problem) };
  }
}

/**
 * The list or one sum, whichever is asked for.
 * @param {{book: any, says: string}} from @param {string} name @param {(name: string) => void} open
 * @param {{instruments: any[], today: () => string}} kit what values may have been measured with
 * @returns {{node: HTMLElement, title: string, isSum: boolean, stop: () => void, focus: HTMLElement | null}}
 */
function view(from, name, open, kit) {
  const sum = from.book && name ? sumOf(from.book, name) : null, none = { stop: () => undefined, focus: null };
  if (!from.book) return { ...none, node: h("p", { class: "heed", "data-no-sums": true }, from.says), title: "Sums", isSum: false };
  if (sum) return { ...sumView(from.book, sum, open, { meters: metersOf(kit.instruments), today: kit.today }), title: sum.title, isSum: true };
  const list = listView(from.book, open);
  return { ...none, ...list, title: "Sums", isSum: false };
}

/** As a page of its own. @param {any} app @param {Record<string, string>} args */
export async function sumsScreen(app, args) {
  const open = (/** @type {string} */ name) => app.go("sums", { name }), made = view(await bookOf(app.host), args.name ?? "", open, { instruments: Object.values(app.held?.kit?.registers?.instruments ?? {}), today: () => now().wall });
  const run = app.held?.runs.find((/** @type {any} */ r) => !["ended", "voided"].includes(r.phase));
  const all = made.isSum ? h("button", { type: "button", class: "tool", "data-all-sums": true, on: { click: () => app.go("sums") } }, "All sums") : null;
  const safe = run ? makeSafeMark(() => app.go("run", { run: run.run, over: "make_safe" })) : null;
  const none = made.node.matches("[data-no-sums]") ? h("div", { class: "buttons" }, h("button", { type: "button", class: "act first", on: { click: () => app.go("kit") } }, "To the kit")) : null;
  const node = page(app, { title: made.title, under: made.isSum ? SHORT : UNRECORDED, lead: safe, tools: [all] }, h("section", { class: "band front sums-band", "data-band": "sums" }, made.node, none));
  return { node, title: made.title, stop: made.stop };
}

/** Over the open step of a run. @param {any} ctx @param {{name?: string}} args */
export function sumsPage(ctx, args) {
  const open = (/** @type {string} */ name) => ctx.over("sums", { name }), place = h("div", {}, h("p", { class: "say" }, "Opening the sums of the kit"));
  const heading = h("h1", { tabindex: "-1" }, "Sums"), ways = h("div", { class: "sums-ways" });
  const wait = h("b", { "data-step-waits": true });
  const node = h("div", { class: "work sums-work" }, h("div", { class: "panel-head" }, h("div", {}, h("p", { class: "with" }, args.name ? `${SHORT}. ` : `${UNRECORDED} `, wait), heading), ways), place);
  let stop = () => {}, waited = false;
  /** The step goes on below: what it waits for is said here too, and spoken when it is over. */
  function update() {
    const reasons = ctx.step ? ctx.shutReasons() : [], waits = reasons.length > 0 && reasons.every((/** @type {any} */ r) => Number(r.left) > 0), over = `Step ${ctx.step?.number}: the wait is over.`;
    if (waits) put(wait, `Step ${ctx.step.number}: ${lower(opensWords(reasons))}.`);
    else if (waited) { put(wait, over); alertUser(over); chime(); }
    waited = waits;
  }
  const [, back] = overHead(ctx, "Sums")[0].children;
  put(ways, back);
  void bookOf(ctx.host).then((from) => {
    if (!node.isConnected) return;
    const made = view(from, args.name ?? "", open, { instruments: ctx.state.started?.instruments ?? [], today: () => ctx.run.now().wall });
    stop = made.stop;
    put(heading, made.title);
    node.setAttribute("aria-label", made.title);
    put(ways, made.isSum ? h("button", { type: "button", class: "close", "data-all-sums": true, on: { click: () => ctx.over("sums") } }, "All sums") : null, back);
    place.replaceWith(made.node);
  });
  update();
  return { node, update, stop: () => stop() };
}
