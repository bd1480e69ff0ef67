/** People: hands in at a place by name, or everyone out by name and counted. */
import { h, part, picks, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";
import { list } from "../words.js";

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const { place, way } = ctx.step.control, where = place;
  const inside = ctx.state.hands?.[place] ?? [], out = way === "out";
  const present = ctx.people();
  put(part(el.l, "count"), inside.length
    ? [h("b", {}, `${inside.length} signed in at the ${where}: `), list(inside), "."]
    : `Nobody is signed in at the ${where}.`);
  const options = out ? inside.map((/** @type {string} */ n) => ({ value: n, label: n })) : present.map((/** @type {any} */ p) => ({ value: p.name, label: p.name }));
  const names = options.length ? picks({ legend: out ? "Who is out, seen and counted" : "Whose hands go in", many: true, chosen: ctx.draft.names ?? [], options, onchange: () => { ctx.keep({ names: names?.values() }); update(); } }) : null;
  put(part(el.l, "names"), names?.node);
  const chosen = () => names?.values() ?? [];
  const act = acting(ctx, { held: true, run: record });
  put(part(el.r, "act"), act.node);
  async function record() {
    const answer = await ctx.answer({ do: "people-counted", place, way, names: chosen() });
    if (answer.refused) put(part(el.l, "wrong"), answer.refused.says);
  }
  function update() {
    const reasons = ctx.shutReasons(), n = chosen().length, all = out ? n === inside.length : n > 0;
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    const label = out ? (inside.length ? `${n} of ${inside.length} out of the ${where}` : `Nobody is at the ${where}; looked and counted`) : n === 0 ? `Hands in at the ${where}` : `${n} ${n === 1 ? "person goes" : "people go"} in at the ${where}`;
    act.show({ label, ready: all, reasons, small: all ? undefined : out ? "Every name must be out, seen and counted" : "Name whose hands go in" });
  }
  update();
  return { update };
}
