/**
 * Starting a run: procedure, cabinet, tube, who is here, who records. What may not be started says why, and what one person
 * may do alone. Nothing is recorded before the button that names it.
 */
import { h, picks, put } from "../dom.js";
import { lower } from "../words.js";
import { band, page } from "./pages.js";

/** @param {any} app */
export async function startScreen(app) {
  await app.refresh();
  const { kit, people } = app.held, registers = kit?.registers;
  if (!kit || !app.held.enrolled) return { node: page(app, { title: "Start a run" }, band({ front: true }, h("p", { class: "heed" }, "This needs a kit and a person enrolled on this tablet first."))), title: "Start a run" };
  const wrong = h("div", { "data-start-wrong": true }), rest = h("div"), start = h("button", { type: "button", class: "act first", "data-start": true, on: { click: () => void begin() } });
  const usable = kit.procedures.filter((/** @type {any} */ p) => p.sheet !== null || p.sheet === undefined);
  const procedure = picks({ legend: "Procedure", options: usable.map((/** @type {any} */ p) => ({ value: p.procedure, label: p.title, small: `edition ${p.edition}${crew(p) > 1 ? `, ${crew(p)} people` : ""}` })), onchange: () => update() });
  const cabinets = Object.entries(registers.cabinets);
  const cabinet = picks({ legend: "Cabinet", options: cabinets.map(([id, c]) => ({ value: id, label: `Cabinet ${id}`, small: /** @type {any} */ (c).title === `Cabinet ${id}` ? null : /** @type {any} */ (c).title })), onchange: () => tubesFor() });
  const tubeBox = h("div"), present = picks({ legend: "Who is here, by name", many: true, options: people.map((/** @type {any} */ p) => ({ value: p.id, label: p.name, small: p.enrolledHere ? p.roles.join(", ") : "not enrolled on this tablet: cannot sign here" })), onchange: () => recorders() });
  const recorderBox = h("div");
  let tube = /** @type {ReturnType<typeof picks> | null} */ (null), recorder = /** @type {ReturnType<typeof picks> | null} */ (null);

  /** @param {any} p */
  function crew(p) { return p.crew ?? p.sheet?.crew ?? 1; }
  function tubesFor() {
    const id = cabinet.values()[0];
    const rows = Object.entries(registers.tubes).filter(([, t]) => /** @type {any} */ (t).cabinet === id);
    tube = picks({ legend: "Tube", chosen: rows.length === 1 ? [rows[0][0]] : [], onchange: () => update(),
      options: rows.map(([serial, t]) => ({ value: serial, label: serial, small: `${/** @type {any} */ (t).hours ?? "?"} heater hours${/** @type {any} */ (t).confirmed ? "" : "; nameplate not confirmed by a second person"}` })) });
    put(tubeBox, rows.length ? tube.node : h("p", { class: "heed" }, `No tube stands in the register for cabinet ${id}.`));
    update();
  }
  function recorders() {
    const here = people.filter((/** @type {any} */ p) => present.values().includes(p.id)), can = here.filter((/** @type {any} */ p) => p.enrolledHere);
    recorder = picks({ legend: "Who records", options: can.map((/** @type {any} */ p) => ({ value: p.id, label: p.name })), chosen: can.length === 1 ? [can[0].id] : recorder?.values() ?? [], onchange: () => update() });
    put(recorderBox, can.length ? recorder.node : here.length ? h("p", { class: "heed" }, "Nobody of those here is enrolled on this tablet, so nobody can record.") : null);
    update();
  }
  function update() {
    const p = usable.find((/** @type {any} */ u) => u.procedure === procedure.values()[0]), here = present.values().length;
    const ready = Boolean(p && cabinet.values()[0] && tube?.values()[0] && recorder?.values()[0]);
    put(rest, app.held.health.installed ? null : h("p", { class: "heed" }, h("b", {}, "This is a browser window, not the app on the home screen."), " The browser may remove what it holds after some days. Install it, enrol there, and start the run there."),
      here === 1 ? h("p", { class: "heed" }, "You work alone; the record will say so.") : null,
      p?.sheet ? h("p", { class: "heed" }, "This edition is checked; it is not proved: no proof of its every path exists yet. The record says so.") : null);
    put(wrong);
    put(start, !p ? "Choose a procedure" : !cabinet.values()[0] ? "Choose a cabinet" : !tube?.values()[0] ? "Choose a tube" : !here ? "Say who is here" : !recorder?.values()[0] ? "Say who records" : `Start ${lower(p.title)}`);
    /** @type {HTMLButtonElement} */ (start).disabled = !ready;
  }
  async function begin() {
    put(wrong);
    /** @type {HTMLButtonElement} */ (start).disabled = true;
    try {
      const { run } = await app.host.startRun({ procedure: procedure.values()[0], cabinet: cabinet.values()[0], tube: tube?.values()[0], present: present.values(), recorder: recorder?.values()[0] });
      app.go("run", { run });
    } catch (problem) {
      const { code, says } = /** @type {any} */ (problem);
      const p = usable.find((/** @type {any} */ u) => u.procedure === procedure.values()[0]), alone = p?.alone ?? p?.sheet?.alone;
      const refused = h("p", { class: "refused", role: "alert", tabindex: "-1", "data-code": code }, h("b", {}, "This run is not started."), says ?? String(problem), alone && code?.includes("crew") && !String(says).includes(alone) ? h("span", {}, ` Alone you may: ${alone}`) : null);
      put(wrong, refused);
      refused.focus();
      /** @type {HTMLButtonElement} */ (start).disabled = false;
    }
  }
  if (cabinets.length === 1) tubesFor();
  update();
  const node = page(app, { title: "Start a run", under: "Nothing is recorded before the button below" },
    band({ front: true }, h("div", { class: "fields" }, procedure.node, cabinet.node, tubeBox, present.node, recorderBox), rest, wrong, h("div", { class: "buttons" }, h("button", { type: "button", class: "act", on: { click: () => app.go("card") } }, "Site card"), start)));
  return { node, title: "Start a run" };
}
