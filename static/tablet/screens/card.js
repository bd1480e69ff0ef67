/** The site card: emergency off, telephone, first aid, nearest help. Aboard with the kit, one touch from anywhere. */
import { h } from "../dom.js";
import { band, facts, page } from "./pages.js";

/** The card's parts, for its own page and for the page over a run. @param {any} site */
export function cardBody(site) {
  const card = site?.card;
  if (!card) return [h("p", { class: "heed" }, "The kit has no card for this site. Ask the person who knows the site before you begin.")];
  return [
    h("div", { class: "eo" }, h("b", {}, "Emergency off"), h("dl", { class: "card-eo" }, card.emergency_off.map((/** @type {any} */ e) => [h("dt", {}, e.name), h("dd", {}, e.where)]))),
    (card.notes ?? []).map((/** @type {string} */ note) => h("p", { class: "heed" }, note)),
    facts([["Telephone", card.telephone.map((/** @type {any} */ t) => h("div", {}, `${t.who}: `, /^[+\d][\d ()-]*$/.test(t.number) ? h("a", { class: "num call", href: `tel:${t.number.replace(/[^+\d]/g, "")}` }, t.number) : h("span", { class: "num" }, t.number)))],
      ["First aid", card.first_aid.map((/** @type {string} */ line) => h("div", {}, line))], ["Nearest help", card.nearest_help]]),
    h("p", { class: "note" }, "The maker’s instructions, your site’s rules, local codes and qualified practice come first."),
  ];
}

/** @param {any} app @param {Record<string, string>} args */
export async function cardScreen(app, args) {
  const sites = app.held.kit?.registers?.sites ?? {};
  const chosen = args.site ? [[args.site, sites[args.site]]] : Object.entries(sites);
  const bands = chosen.length ? chosen.map(([id, site]) => band({ title: site?.name ?? id, front: true }, cardBody(site)))
    : [band({ front: true }, h("p", { class: "heed" }, "There is no kit on this tablet, so there is no site card. Take the kit, or ask at the site."))];
  return { node: page(app, { title: "Site card" }, bands), title: "Site card" };
}
