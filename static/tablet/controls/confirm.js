/** Confirm: the person says that an act is done. Held acts are pressed for a second. */
import { part, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";
import { changeOf, list, sentence } from "../words.js";
import { likelyMove } from "../timeline.js";

/** What recording this says about the plant. @param {any} ctx */
function effectWords(ctx) {
  const sets = likelyMove(ctx.sheet, ctx.step.id, undefined)?.effects?.sets ?? {};
  const words = Object.entries(sets).filter(([s, v]) => ctx.state.sources?.[s]?.state !== v).map(([s, v]) => changeOf(ctx.sheet, s, ctx.state.sources?.[s]?.state, /** @type {string} */ (v)));
  return words.length ? `${sentence(list(words))} with this step. Record it once it is so; nothing is switched from here.` : "";
}

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const act = acting(ctx, { held: ctx.step.control.held, run: () => ctx.answer({ do: "confirmed" }) });
  put(part(el.r, "act"), act.node);
  put(part(el.r, "effect"), effectWords(ctx));
  put(part(el.l, "level"), ctx.progress.level);
  function update() {
    const reasons = ctx.shutReasons();
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    act.show({ label: ctx.step.control.button || "Done", reasons });
  }
  update();
  return { update };
}
