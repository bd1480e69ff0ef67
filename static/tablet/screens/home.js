/**
 * Home: how the tablet stands, the kit's age, the runs on it, and the way to start one. A tablet whose storage is gone or
 * that was never enrolled says so in words; an empty list alone is never shown.
 */
import { h } from "../dom.js";
import { day, minute } from "../words.js";
import { band, facts, lookTools, page } from "./pages.js";

const PHASES = { new: "just begun", declare: "energy states not confirmed yet", going: "going on", confirm: "paused, states to be confirmed", stopped: "stopped", ended: "ended", voided: "voided" };

/** What was lost and what to do about it. @param {any} health */
function storageAlarm(health) {
  const lost = health.storage === "lost";
  return h("div", { class: "alarm", role: "alert", "data-storage": health.storage },
    h("h2", {}, lost ? "What this tablet held is gone" : "What this tablet holds is damaged"),
    h("div", {}, h("p", { class: "say" }, lost ? "The browser has removed or reset the storage. Runs that the server had not received may be lost. This list being empty does not mean that there were no runs." : "Part of the storage cannot be read. Nothing is removed by itself."),
      health.says.map((/** @type {string} */ s) => h("p", { class: "say" }, s))),
    h("ol", {}, h("li", {}, "Do not clear anything and do not start a new run on this tablet yet."), h("li", {}, "Close every window of fieldkit, then open it again. What has a second copy here is restored by itself."),
      h("li", {}, "Connect to the station’s network: the desk sees up to which event this tablet’s runs were received."), h("li", {}, "Work that is not there is done and recorded again, from the plant as it is now.")));
}

/** How old the kit is, in days. @param {string} made */
const age = (made) => Math.max(0, Math.floor((Date.now() - Date.parse(made)) / 86400000));

/** @param {any} app */
function kitBand(app) {
  const { kit, enrolled } = app.held;
  if (!kit) {
    return band({ title: "Kit", name: "kit" }, h("p", { class: "say" }, "There is no kit on this tablet. Without one no run can be started. Take it while the server can be reached."),
      h("div", { class: "buttons" }, h("button", { type: "button", class: "act", disabled: !app.held.device, on: { click: () => app.go("kit") } }, "Take the kit")));
  }
  const days = age(kit.made);
  return band({ title: "Kit", name: "kit" },
    facts([["Made", `${day(kit.made)} ${minute(kit.made)}, ${days === 0 ? "today" : `${days} day${days === 1 ? "" : "s"} ago`}`], ["Procedures", kit.procedures.map((/** @type {any} */ p) => `${p.title}, edition ${p.edition}`).join("; ")]]),
    days > 7 ? h("p", { class: "heed" }, `This kit is ${days} days old. Limits, people or the lock board may have changed since; take it again before you leave for site.`) : null,
    h("div", { class: "buttons" }, h("button", { type: "button", class: "act", "data-take-kit": true, disabled: !enrolled && !app.held.device, on: { click: () => app.go("kit") } }, "Take the kit again")));
}

/** What is wrong with a run, or with what the server made of it. @param {any} run */
function runTrouble(run) {
  if (run.broken) return run.broken;
  if (run.kept?.length) return `The server kept ${run.kept.length} event${run.kept.length === 1 ? "" : "s"} of this run that it cannot place; ask at the desk.`;
  return run.trouble?.says ?? "";
}

/** @param {any} app @param {any} run */
function runRow(app, run) {
  const sent = run.synced ? "received by the server" : `saved on this tablet, ${run.seq - run.acked} event${run.seq - run.acked === 1 ? "" : "s"} not received by the server`;
  const over = ["ended", "voided"].includes(run.phase);
  return h("li", {}, h("button", { type: "button", class: "run-row", "data-run": run.run, on: { click: () => app.go("run", { run: run.run }) } },
    h("span", {}, h("b", {}, `${run.title}, ${run.cabinet}, tube ${run.tube}`), h("br"), h("span", {}, `${run.run}: ${/** @type {any} */ (PHASES)[run.phase] ?? run.phase}; ${sent}`), runTrouble(run) ? h("span", {}, h("br"), h("b", {}, runTrouble(run))) : null),
    h("span", { class: "v" }, h("span", {}, `${day(run.updated)} ${minute(run.updated)} `), h("span", { class: "go" }, over ? "Read it" : "Go on"))));
}

/** @param {any} app */
function runsBand(app) {
  const { runs, health } = app.held;
  const says = health.storage !== "ok" ? "None can be read. See above: this is a loss, not an empty list." : app.held.device ? "None has been recorded on this tablet since it was enrolled." : "Nothing is held here: this tablet was never enrolled, or the browser has removed everything.";
  return band({ title: "Runs on this tablet", name: "runs" }, runs.length ? h("ul", { class: "runs" }, runs.map((/** @type {any} */ r) => runRow(app, r))) : h("p", { class: "say" }, says));
}

/** Words on events that the server has not received for long. @param {string | null} oldest */
function unsentWords(oldest) {
  const hours = oldest ? (Date.now() - Date.parse(oldest)) / 3600000 : 0;
  if (hours < 24) return null;
  const days = Math.floor(hours / 24), said = `The oldest event here that the server has not received is ${days} day${days === 1 ? "" : "s"} old.`;
  return h("p", { class: "heed" }, hours < 72 ? `${said} Connect when you can.` : h("b", {}, `${said} Connect before you record more: until then this tablet holds the only copy.`));
}

/** @param {any} app */
function healthBand(app) {
  const { health, people, device, enrolled } = app.held;
  const here = people.filter((/** @type {any} */ p) => p.enrolledHere), waiting = people.filter((/** @type {any} */ p) => p.enrolment === "waiting");
  const yes = (/** @type {boolean} */ ok, /** @type {string} */ good, /** @type {string} */ bad) => (ok ? good : h("b", {}, bad));
  return band({ title: "This tablet", name: "health" }, facts([
    ["Works offline", yes(health.offline_ready, "yes, every file is aboard", "not yet: open it once more while the server can be reached")],
    ["Installed", yes(health.installed, "yes", "no: add it to the home screen, or the browser may remove what it holds")],
    ["Storage", [yes(health.persisted, "kept by the browser", "the browser does not promise to keep it"), health.probe ? `; ${health.probe}` : ""]],
    ["Enrolled", enrolled ? `${here.map((/** @type {any} */ p) => p.name).join(", ") || "nobody has a certificate yet"}${device?.name ? `; this is ${device.name}` : ""}${waiting.length ? `; waiting for the signing authority: ${waiting.map((/** @type {any} */ p) => p.name).join(", ")}` : ""}` : h("b", {}, "nobody")],
    ["Sending", [app.sync.says || "nothing to send", app.sync.oldestUnsynced ? ` Oldest event not received: ${day(app.sync.oldestUnsynced)} ${minute(app.sync.oldestUnsynced)}.` : ""]]]),
    unsentWords(app.sync.oldestUnsynced),
    health.storage === "ok" ? health.says.map((/** @type {string} */ s) => h("p", { class: "heed" }, s)) : null,
    h("div", { class: "buttons" }, h("button", { type: "button", class: "act", "data-enrol": true, on: { click: () => app.go("enrol") } }, enrolled ? "Enrol another person" : "Enrol a person"),
      h("button", { type: "button", class: "act", "data-send": true, on: { click: () => { void Promise.resolve(app.host.sync()).catch(() => undefined).then(() => app.go("home")); } } }, "Send now"),
      app.newer ? h("button", { type: "button", class: "act", "data-update": true, on: { click: () => { void Promise.resolve(app.host.update()).catch((/** @type {any} */ problem) => app.trouble(problem.says ?? String(problem))); } } }, "Take the newer version") : null));
}

/** What is looked up, not done. @param {any} app */
const lookUps = (app) => [h("button", { type: "button", class: "act", on: { click: () => app.go("card") } }, "Site card"), h("button", { type: "button", class: "act", "data-sums": true, on: { click: () => app.go("sums") } }, "Sums")];

/** The one thing to do next. @param {any} app @param {any[]} returned */
function frontBand(app, returned) {
  const { held } = app, open = held.runs.find((/** @type {any} */ r) => !["ended", "voided"].includes(r.phase));
  const go = (/** @type {string} */ label, /** @type {() => void} */ run, /** @type {string} */ name) => h("div", { class: "buttons" }, lookUps(app), h("button", { type: "button", class: "act first", "data-next": name, on: { click: run } }, label));
  if (held.health.storage !== "ok") {
    // After a loss nothing is put forward as the next thing to do; what is possible stays possible.
    return band({ name: "front" }, h("div", { class: "buttons" }, lookUps(app),
      open ? h("button", { type: "button", class: "act", on: { click: () => app.go("run", { run: open.run }) } }, "Look at the open run") : null,
      held.enrolled && held.kit ? h("button", { type: "button", class: "act", on: { click: () => app.go("start") } }, "Start a run all the same") : null));
  }
  if (!held.device || !held.enrolled) {
    return band({ front: true, name: "front" }, h("p", { class: "lead" }, "This tablet is not enrolled"), h("p", { class: "say" }, "Nobody can record or sign here yet. Enrolment needs the server once; everything after it works without a network. A browser tab and the app on the home screen do not share what they hold: enrol in the one you take to site."), go("Enrol a person", () => app.go("enrol"), "enrol"));
  }
  if (!held.kit) return band({ front: true, name: "front" }, h("p", { class: "lead" }, "Take the kit before you leave"), h("p", { class: "say" }, "The kit holds the procedures, the registers, the lock board, the site card and the people."), go("Take the kit", () => app.go("kit"), "kit"));
  const back = returned.find((/** @type {any} */ r) => held.runs.some((/** @type {any} */ own) => own.run === r.run && own.phase === "ended" && r.seq >= own.seq));
  if (open) return band({ front: true, name: "front" }, h("p", { class: "lead" }, `${open.title} on ${open.cabinet} is open`), h("p", { class: "say" }, `Tube ${open.tube}, run ${open.run}, last event ${minute(open.updated)}.`), go("Go on with it", () => app.go("run", { run: open.run }), "run"));
  if (back) return band({ front: true, name: "front" }, h("p", { class: "lead" }, `Run ${back.run} was returned`), h("p", { class: "say" }, `${back.by_name ?? back.by}: “${back.reason}”`), go("Take it up again", () => app.go("run", { run: back.run }), "returned"));
  return band({ front: true, name: "front" }, h("p", { class: "lead" }, "Start a run"), h("p", { class: "say" }, "Procedure, cabinet, tube, who is here. Then the energy states as they are."), go("Start a run", () => app.go("start"), "start"));
}

/** @param {any} app */
export async function homeScreen(app) {
  await app.refresh();
  const returned = (await Promise.resolve(app.host.inbox?.()).catch(() => [])) ?? [];
  const { held } = app, station = held.kit?.registers?.station?.name;
  const alarm = held.health.storage === "ok" ? null : band({ name: "storage" }, storageAlarm(held.health));
  return { node: page(app, { title: station ?? "fieldkit", under: station ? "fieldkit" : "Field checklist and commissioning recorder", back: false, tools: lookTools() }, alarm, frontBand(app, returned), runsBand(app), kitBand(app), healthBand(app)), title: "Start" };
}
