/** Another person records: the one who leaves signs what they did so far, the one who comes opens their own key. */
import { h, picks, put } from "../dom.js";
import { passphrase } from "../passphrase.js";
import { personName } from "../words.js";
import { overHead, overWork } from "./over_parts.js";

/** @param {any} ctx */
export function personPage(ctx) {
  const { state } = ctx, others = ctx.people().filter((/** @type {any} */ p) => p.id !== state.recorder && p.enrolledHere);
  const statement = "I did this work up to here and these are my readings; another person goes on.";
  const leaving = passphrase({ people: ctx.everyone().filter((/** @type {any} */ p) => p.id === state.recorder), legend: "Who leaves", onchange: () => ready() });
  const holder = h("div"), refused = h("p", { class: "refused" });
  let coming = /** @type {ReturnType<typeof passphrase> | null} */ (null);
  const who = picks({ legend: "Who goes on", options: others.map((/** @type {any} */ p) => ({ value: p.id, label: p.name })), onchange: () => {
    coming = passphrase({ people: others.filter((/** @type {any} */ p) => p.id === who.values()[0]), legend: "Who comes", onchange: () => ready() });
    put(holder, coming.node);
    ready();
  } });
  const go = /** @type {HTMLButtonElement} */ (h("button", { type: "button", class: "act first", "data-change-person": true, on: { click: () => void change() } }, "Change who records"));
  function ready() { go.disabled = !(leaving.ready() && coming?.ready()); }
  async function change() {
    put(refused);
    const to = who.values()[0];
    if (!(await leaving.check(ctx.host)) || !coming || !(await coming.check(ctx.host))) return;
    try {
      await ctx.run.sign({ person: state.recorder, passphrase: leaving.phrase(), meaning: "handed over", statement });
    } catch (problem) {
      put(refused, /** @type {any} */ (problem).says ?? String(problem));
      return;
    }
    const r = await ctx.send({ do: "person-changed", to });
    put(refused, r.refused?.says ?? "");
    if (!r.refused) ctx.shut();
  }
  ready();
  const node = overWork([overHead(ctx, "Another person records", `${personName(state, state.recorder)} records now`), h("p", { class: "say" }, "What was proved dead counts as locked only afterwards, and is proved again before hands go in.")],
    [others.length ? [h("div", { class: "signed-over" }, h("p", {}, `${personName(state, state.recorder)} signs: `, h("b", {}, `“${statement}”`))), leaving.node, h("div", { class: "fields" }, who.node), holder] : h("p", { class: "heed" }, "Nobody else who is here is enrolled on this tablet."), refused, others.length ? h("div", { class: "acts one" }, go) : null]);
  return { node };
}
