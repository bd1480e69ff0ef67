/** Hold: a hold point that only a second person, or a supervisor, releases, with their own passphrase. */
import { part, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";
import { passphrase } from "../passphrase.js";
import { sentence } from "../words.js";

/** Those who may release it: never the recorder. @param {any} ctx */
function who(ctx) {
  const supervisor = ctx.step.control.by === "supervisor";
  const among = supervisor ? ctx.everyone().filter((/** @type {any} */ p) => p.roles.includes("supervisor")) : ctx.people();
  return among.filter((/** @type {any} */ p) => p.id !== ctx.state.recorder);
}

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const { statement, by } = ctx.step.control, wrong = part(el.r, "wrong"), people = who(ctx);
  put(part(el.l, "by"), `Hold point: a ${by} releases it`);
  put(part(el.l, "statement"), `“${statement}”`);
  const pass = passphrase({ people, legend: `${sentence(by)} who releases it`, onchange: () => update() });
  put(part(el.r, "who"), pass.node);
  const act = acting(ctx, { held: true, run: release });
  put(part(el.r, "act"), act.node);

  async function release() {
    put(wrong);
    const person = pass.person() ?? "";
    if (!(await pass.check(ctx.host))) return;
    const answer = await ctx.answer({ do: "released", who: person }, statement);
    if (answer.refused) put(wrong, answer.refused.says);
    else pass.clear();
  }
  function update() {
    const reasons = ctx.shutReasons();
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    const name = people.find((/** @type {any} */ p) => p.id === pass.person())?.name;
    act.show({ label: name ? `${name} releases the hold point` : "Release the hold point", ready: pass.ready(), reasons, small: pass.ready() ? undefined : "Needs the person and their passphrase" });
  }
  update();
  return { update };
}
