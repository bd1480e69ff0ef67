/**
 * Unlock: a lock comes off by its holder's own passphrase; or, where the holder is away, by three checks written down, with
 * the passphrases of whoever takes it off and of a second person.
 */
import { h, part, picks, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";
import { passphrase } from "../passphrase.js";
import { list, sentence, sourceTitle } from "../words.js";

/** field of the form -> name of the check in the event */
const CHECKS = { not_on_site: "not on site", tried: "tried to reach", told: "told before return" };

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const { point, sources } = ctx.step.control, wrong = part(el.l, "wrong");
  const locks = (ctx.state.locks ?? []).filter((/** @type {any} */ l) => l.point === point);
  put(part(el.l, "point"), `Isolating point ${point}.`);
  put(part(el.l, "sources"), `${sentence(list(sources.map((/** @type {string} */ s) => sourceTitle(ctx.sheet, s))))}.`);
  const which = locks.length > 1 ? picks({ legend: "Which lock comes off", options: locks.map((/** @type {any} */ l) => ({ value: l.lock, label: `Lock ${l.lock}`, small: l.holder_name || l.holder })), chosen: [locks[0].lock], onchange: () => paint() }) : null;
  put(part(el.l, "which"), which?.node, locks.length ? null : h("p", { class: "refused" }, "The board shows no lock on this point. If there is one, record it as something odd and stop."));
  const lock = () => locks.find((/** @type {any} */ l) => l.lock === which?.values()[0]) ?? locks[0];
  // Whoever records is here: their own lock comes off by their own passphrase, never by checks that say they are away.
  const mine = locks.length > 0 && locks.every((/** @type {any} */ l) => l.holder === ctx.state.recorder);
  const way = picks({ legend: "Who takes it off", options: [{ value: "holder", label: "Its holder" }, ...(mine ? [] : [{ value: "checks", label: "Holder is away", small: "three checks, two people" }])], chosen: ["holder"], onchange: () => paint() });
  put(part(el.l, "way"), locks.length && !mine ? way.node : null);
  const inputs = Object.keys(CHECKS).map((name) => /** @type {HTMLInputElement} */ (el.l.querySelector(`[data-field="${name}"] input`)));
  for (const input of inputs) input.addEventListener("input", () => update());
  let pass = /** @type {ReturnType<typeof passphrase> | null} */ (null), second = /** @type {ReturnType<typeof passphrase> | null} */ (null);
  const act = acting(ctx, { held: true, run: take });
  put(part(el.r, "act"), act.node);
  const byChecks = () => way.values()[0] === "checks";

  function paint() {
    const found = lock();
    if (!found) { update(); return; }
    const taker = byChecks() ? ctx.state.recorder : found.holder;
    pass = passphrase({ people: ctx.everyone().filter((/** @type {any} */ p) => p.id === taker), legend: "Who takes it off", onchange: () => update() });
    second = byChecks() ? passphrase({ people: ctx.people().filter((/** @type {any} */ p) => p.id !== ctx.state.recorder && p.id !== found.holder), legend: "Second person", onchange: () => update() }) : null;
    part(el.l, "checks").hidden = part(el.l, "second").hidden = !byChecks();
    put(part(el.l, "second"), second?.node);
    put(part(el.l, "holder"), h("p", { class: "with" }, `Lock ${found.lock}, tag ${found.tag || "without a number"}, held by ${found.holder_name || found.holder}.`), pass.node);
    update();
  }
  async function take() {
    const found = lock();
    if (!pass || !(await pass.check(ctx.host)) || (second && !(await second.check(ctx.host)))) return;
    const checks = byChecks() ? Object.values(CHECKS).map((name, k) => ({ name, how: inputs[k].value.trim() })) : [];
    const statement = byChecks() ? `Lock ${found.lock} on ${point} comes off; its holder is away and will be told before returning.` : `I take my lock ${found.lock} off ${point}.`;
    const asked = { do: "unlocked", point, lock: found.lock, who: pass.person() };
    const answer = await ctx.answer(second ? { ...asked, checks, second: second.person() } : asked, statement);
    if (answer.refused) put(wrong, answer.refused.says);
  }
  function update() {
    const reasons = ctx.shutReasons(), found = lock();
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    const ready = Boolean(found && pass?.ready() && (!second || (second.ready() && inputs.every((i) => i.value.trim()))));
    act.show({ label: found ? `Lock ${found.lock} is off ${point}` : "No lock to take off", ready, reasons, small: ready ? undefined : byChecks() ? "Needs the three checks and both passphrases" : "Needs the holder’s passphrase" });
  }
  paint();
  return { update };
}
