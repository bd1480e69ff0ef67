/** Enrolment: a person and this tablet become known to the server, once, while it can be reached. */
import { field, h, put } from "../dom.js";
import { band, page } from "./pages.js";

/** @param {any} app */
export async function enrolScreen(app) {
  const name = field({ label: "Name of this tablet", value: app.held.device?.name ?? "", help: "As it is written on its back." });
  const login = field({ label: "Your sign-in at the station", attributes: { autocomplete: "username" } });
  const password = field({ label: "Password of that sign-in", kind: "password", attributes: { autocomplete: "current-password" } });
  const phrase = field({ label: "A new passphrase for signing on this tablet", kind: "password", help: "Ten characters or more, or four words; not your password. It opens your key here, works without a network, and cannot be fetched back by anybody.", attributes: { autocomplete: "new-password" } });
  const again = field({ label: "The passphrase once more", kind: "password", attributes: { autocomplete: "new-password" } });
  const says = h("div", { "data-enrol-says": true });
  const send = h("button", { type: "button", class: "act first", "data-enrol-send": true, on: { click: () => void enrol() } }, "Enrol on this tablet");
  const ask = h("button", { type: "button", class: "act", "data-enrol-status": true, on: { click: () => void status() } }, "Ask how it stands");
  const reads = { name, login, password, phrase, again };

  async function enrol() {
    for (const f of Object.values(reads)) f.wrong("");
    if (!name.input.value.trim()) { name.wrong("Give the tablet a name."); return; }
    if (!login.input.value.trim()) { login.wrong("Write the name that you sign in with at the desk."); return; }
    if (phrase.input.value !== again.input.value) { again.wrong("The two passphrases differ. Type both again."); return; }
    send.setAttribute("disabled", "");
    put(says, h("p", { class: "say", role: "status" }, "Making your key and asking the server."));
    try {
      await app.host.enrol({ login: login.input.value.trim(), password: password.input.value, tabletName: name.input.value.trim(), passphrase: phrase.input.value });
      for (const f of [password, phrase, again]) f.input.value = "";
      await app.refresh();
      put(says, h("p", { class: "heed", role: "status" }, "Asked for. Whoever holds the signing authority’s passphrase now issues your certificate at the desk. You can take the kit meanwhile; you can sign once the certificate is here."));
      await status();
    } catch (problem) {
      const { code, says: words } = /** @type {any} */ (problem);
      if (code === "weak-passphrase") phrase.wrong(words);
      else put(says, h("p", { class: "refused", role: "alert" }, words ?? String(problem)));
    } finally {
      send.removeAttribute("disabled");
    }
  }
  async function status() {
    try {
      const rows = await app.host.enrolStatus();
      await app.refresh();
      const nameOf = (/** @type {string} */ id) => app.held.people.find((/** @type {any} */ p) => p.id === id)?.name ?? id;
      const words = { waiting: "waiting for the signing authority", issued: "certificate is here: ready to sign", refused: "refused at the desk" };
      const list = Array.isArray(rows) ? rows : rows ? [rows] : [];
      put(says, h("ul", { class: "facts" }, list.map((/** @type {any} */ r) => h("li", {}, h("span", { class: "k" }, nameOf(r.person)), h("span", { class: "v" }, /** @type {any} */ (words)[r.status] ?? r.status)))),
        h("div", { class: "buttons" }, h("button", { type: "button", class: "act", on: { click: () => app.go("kit") } }, "Take the kit")));
    } catch (problem) {
      put(says, h("p", { class: "refused", role: "alert" }, /** @type {any} */ (problem).says ?? String(problem)));
    }
  }
  const node = page(app, { title: "Enrol a person", under: "Needs the server, once" },
    band({ front: true }, h("p", { class: "say" }, "A signing key is made on this tablet and never leaves it. It is locked with your passphrase."),
      h("form", { class: "fields", on: { submit: (/** @type {Event} */ e) => { e.preventDefault(); } } }, Object.values(reads).map((f) => f.node)),
      says, h("div", { class: "buttons" }, app.held.enrolled || app.held.device ? ask : null, send)));
  return { node, title: "Enrol" };
}
