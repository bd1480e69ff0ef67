/** Taking the kit: sheets, registers, lock board, site cards, people; all of it or none of it, with what is coming named. */
import { h, put } from "../dom.js";
import { band, page } from "./pages.js";

/** @param {any} app */
export async function kitScreen(app) {
  const fill = h("i"), bar = h("div", { class: "progress", role: "progressbar", "aria-label": "Parts of the kit taken", "aria-valuemin": "0", "aria-valuemax": "1", "aria-valuenow": "0", hidden: true }, fill);
  const says = h("p", { class: "say", role: "status", "data-kit-says": true });
  const wrong = h("p", { class: "refused", role: "alert" });
  const take = h("button", { type: "button", class: "act first", "data-kit-take": true, on: { click: () => { if (aboard) app.go("home"); else void fetchIt(); } } }, "Take the kit now");
  let aboard = false;

  async function fetchIt() {
    take.setAttribute("disabled", "");
    put(wrong);
    bar.hidden = false;
    try {
      const kit = await app.host.fetchKit((/** @type {number} */ done, /** @type {number} */ of, /** @type {string} */ name) => {
        fill.style.width = `${of ? (done / of) * 100 : 0}%`;
        bar.setAttribute("aria-valuemax", String(of || 1));
        bar.setAttribute("aria-valuenow", String(done));
        put(says, name ? `Part ${done + 1} of ${of}: ${name}` : `${of} parts taken and checked against their hashes.`);
      });
      await app.refresh();
      fill.style.width = "100%";
      put(says, `The kit is aboard: ${(kit ?? app.held.kit)?.procedures?.length ?? 0} procedures. Everything from here works without a network.`);
      put(take, "Done");
      take.removeAttribute("disabled");
      aboard = true;
    } catch (problem) {
      put(wrong, `${/** @type {any} */ (problem).says ?? problem} The kit that was aboard is unchanged.`);
      take.removeAttribute("disabled");
    }
  }
  return { node: page(app, { title: "Take the kit", under: "Needs the server" }, band({ front: true }, h("p", { class: "say" }, "Procedures, registers with the lock board, site cards, people and their certificates, the formulas of the sums, and the pages of the controls."), bar, says, wrong, h("div", { class: "buttons" }, take))), title: "Take the kit" };
}
