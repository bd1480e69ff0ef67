/**
 * A person and their own passphrase: for hold points, deviations, locks, signatures. Paste and password managers work. A wrong
 * passphrase is said beside the field, with how long to wait; nobody is locked out.
 */
import { field, h, picks, put } from "./dom.js";

/** What was wrong, with how long to wait said once. @param {string} says @param {number | null | undefined} wait */
const said = (says, wait) => (!wait || says.includes(`${Math.ceil(wait)} s`) ? says : `${says} Try again in ${Math.ceil(wait)} s.`);

/**
 * @param {{people: {id: string, name: string, enrolledHere?: boolean}[], legend: string, chosen?: string, onchange?: () => void}} spec
 * @returns {{node: HTMLElement, person: () => string | undefined, phrase: () => string, ready: () => boolean, check: (host: any) => Promise<boolean>, clear: () => void}}
 */
export function passphrase(spec) {
  const here = spec.people.filter((p) => p.enrolledHere !== false), away = spec.people.filter((p) => p.enrolledHere === false);
  const who = here.length === 1 ? null : picks({ legend: spec.legend, quiet: false, chosen: spec.chosen ? [spec.chosen] : [], options: here.map((p) => ({ value: p.id, label: p.name })), onchange: () => { words.wrong(""); spec.onchange?.(); } });
  const person = () => (who ? who.values()[0] : here[0]?.id);
  const words = field({ label: here.length === 1 ? `Passphrase of ${here[0].name}` : "That person’s own passphrase", kind: "password", attributes: { autocomplete: "current-password", "data-passphrase": true } });
  words.input.addEventListener("input", () => { words.wrong(""); spec.onchange?.(); });
  const show = h("button", { type: "button", class: "close", "aria-pressed": "false", on: { click: () => {
    const hidden = words.input.type === "password";
    words.input.type = hidden ? "text" : "password";
    put(show, hidden ? "Hide" : "Show");
    show.setAttribute("aria-pressed", String(hidden));
  } } }, "Show");
  const node = h("div", { class: "fields" }, who?.node, here.length ? h("div", { class: "person-row" }, words.node, show) : null,
    away.length ? h("p", { class: "note" }, `Not enrolled on this tablet, so unable to sign here: ${away.map((p) => p.name).join(", ")}.`) : null,
    here.length ? null : h("p", { class: "refused" }, "Nobody who may do this is enrolled on this tablet. Enrol the person here while the server can be reached."));

  return {
    node, person, phrase: () => words.input.value, ready: () => Boolean(person() && words.input.value), clear: () => { words.input.value = ""; },
    check: async (host) => {
      try {
        await host.unlockPerson(person(), words.input.value);
        return true;
      } catch (problem) {
        const { says, wait_s } = /** @type {any} */ (problem);
        words.wrong(said(says ?? "That passphrase does not open this person’s key.", wait_s));
        return false;
      }
    },
  };
}
