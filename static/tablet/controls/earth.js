/** Earth and lift: one numbered stick on one point, or off it, counted. Press and hold: hands are at the conductor. */
import { h, part, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";
import { list, sentence, sourceTitle } from "../words.js";

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const { stick, point, source } = ctx.step.control, lifting = ctx.step.control.control === "lift";
  put(part(el.l, "stick"), `Earthing stick ${stick} `);
  put(part(el.l, "where"), `${lifting ? "comes off" : "goes on"} ${point.replaceAll("_", " ")}: ${sentence(sourceTitle(ctx.sheet, source))}.`);
  const on = (ctx.state.earths ?? []).map((/** @type {any} */ e) => e.stick);
  put(part(el.l, "count"), on.length ? [h("b", {}, `${on.length} on now: `), list(on), "."] : "No earth is on now.");
  const act = acting(ctx, { held: true, run: () => ctx.answer({ do: lifting ? "lifted" : "earthed", stick, point }) });
  put(part(el.r, "act"), act.node);
  function update() {
    const reasons = ctx.shutReasons();
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    act.show({ label: lifting ? `Stick ${stick} is off` : `Stick ${stick} is on`, reasons });
  }
  update();
  return { update };
}
