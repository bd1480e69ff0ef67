/** Lock: a lock and tag on an isolating point, with the numbers on them and whose lock it is. A lock is not proof. */
import { part, picks, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";
import { list, sentence, sourceTitle } from "../words.js";

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const control = ctx.step.control;
  const lock = el.l.querySelector("[data-field=lock] input"), tag = el.l.querySelector("[data-field=tag] input");
  const inputs = { lock: /** @type {HTMLInputElement} */ (lock), tag: /** @type {HTMLInputElement} */ (tag) };
  put(part(el.l, "point"), `Isolating point ${control.point}.`);
  put(part(el.l, "sources"), `${sentence(list(control.sources.map((/** @type {string} */ s) => sourceTitle(ctx.sheet, s))))}. `, control.ask);
  const there = (ctx.state.locks ?? []).filter((/** @type {any} */ l) => l.point === control.point);
  put(part(el.l, "on-board"), there.length ? `Already on this point: ${there.map((/** @type {any} */ l) => `lock ${l.lock}, ${l.holder_name || l.holder}`).join("; ")}. Add your own, never take another’s off.` : "No lock is on this point on the board.");
  const present = ctx.people();
  const holder = picks({ legend: "Whose lock it is, and who keeps the key", options: present.map((/** @type {any} */ p) => ({ value: p.id, label: p.name })),
    chosen: [ctx.draft.holder ?? ctx.state.recorder], onchange: () => { ctx.keep({ holder: holder.values()[0] }); update(); } });
  put(part(el.l, "holder"), holder.node);
  for (const [name, input] of Object.entries(inputs)) {
    input.value = ctx.draft[name] ?? "";
    input.addEventListener("input", () => { put(part(el.l, `wrong=${name}`)); ctx.keep({ [name]: input.value }); update(); });
  }
  const act = acting(ctx, { run: record });
  put(part(el.r, "act"), act.node);

  async function record() {
    const answer = await ctx.answer({ do: "locked", point: control.point, lock: inputs.lock.value.trim(), tag: inputs.tag.value.trim(), holder: holder.values()[0] });
    if (answer.refused) { put(part(el.l, "wrong=lock"), answer.refused.says); inputs.lock.focus(); }
  }
  function update() {
    const reasons = ctx.shutReasons(), number = inputs.lock.value.trim(), ready = Boolean(number && inputs.tag.value.trim() && holder.values().length);
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    act.show({ label: number ? `Record lock ${number} on ${control.point}` : "Write the number on the lock", ready, reasons });
  }
  update();
  return { update, focus: inputs.lock };
}
