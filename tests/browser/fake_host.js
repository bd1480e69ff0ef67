/**
 * A host for looking at the screens: runs live in memory, decided and folded by the same run engine as on a real tablet.
 * Served in place of static/tablet/host.js by look_server.py; what it holds comes from scene.json. No storage, keys or network:
 * a passphrase is right when it is "right", a save takes as long as the scene says.
 */
import { decide } from "../core/decide.js";
import { next_event, read, to_text } from "../core/events.js";
import { progress } from "../core/progress.js";
import * as folding from "../core/state.js";

const scene = await (await fetch("/scene.json")).json();
const began = performance.now();
const hex = async (/** @type {string} */ text) => [...new Uint8Array(await crypto.subtle.digest("SHA-256", new TextEncoder().encode(text)))].map((b) => b.toString(16).padStart(2, "0")).join("");
const listeners = [];
/** Moved by tests: seconds that have passed beside the real ones. */
globalThis.skip = (seconds) => { scene.skipped = (scene.skipped ?? 0) + seconds; };
/** Every command that reached the host, for tests. */
globalThis.commands = [];

export const app = "0.1.0";
export async function open() { return structuredClone(scene.held); }
export async function enrol() { if (scene.enrolSays) throw scene.enrolSays; return { enrolment: "e1", person: "vell", status: "waiting" }; }
export async function enrolStatus() { return [{ person: "vell", status: "waiting" }]; }
export async function fetchKit(told) {
  for (let n = 0; n < 4; n += 1) { told(n, 4, ["sheet/warm-up", "source/warm-up", "registers", "controls"][n]); await new Promise((r) => setTimeout(r, 20)); }
  if (scene.kitSays) throw scene.kitSays;
  return scene.held.kit;
}
export async function sums() { return scene.sums === null ? null : (await fetch("/sums.json")).json(); }
export async function startRun(asked) {
  globalThis.commands.push({ do: "start", ...asked });
  if (scene.startSays) throw scene.startSays;
  return { run: scene.runs[0].run };
}
export async function unlockPerson(person, passphrase) {
  if (passphrase !== "right") throw { code: "wrong-passphrase", says: "That passphrase does not open this key. Nothing was signed.", wait_s: 2 };
  return true;
}
export const inbox = async () => scene.inbox ?? [];
export async function sync() { const s = { state: "unreachable", says: "The server cannot be reached. What is recorded stays on this tablet.", oldestUnsynced: null }; listeners.forEach((cb) => cb(s)); return s; }
export function onsync(cb) { listeners.push(cb); cb(scene.sync ?? { state: "idle", says: "", oldestUnsynced: null }); }
/** For tests: the loop says something. */
globalThis.synced = (state) => { for (const run of scene.held.runs) Object.assign(run, { acked: run.seq, synced: true }); listeners.forEach((cb) => cb({ state, says: "", oldestUnsynced: null })); };
export const ontrouble = () => undefined;
export const onupdate = () => undefined;

const runs = new Map();
export async function openRun(name) {
  if (!runs.has(name)) runs.set(name, await load(scene.runs.find((r) => r.run === name)));
  return runs.get(name);
}

async function load(kept) {
  const sheet = scene.sheets[kept.sheet], drafts = new Map(), callbacks = [];
  let events = [], state = folding.new_state ? folding.new_state(sheet, kept.run, kept.chain, kept.sheet) : null;
  for (const text of kept.events) events.push(read(text, await hex(text)));
  state = folding.fold(sheet, events);
  const last = events.at(-1).at;
  const now = () => {
    const ms = performance.now() - began + (scene.skipped ?? 0) * 1000, wall = new Date(Date.parse(last.wall) + 3600000 + ms).toISOString();
    return { wall: wall.replace("Z", "+01:00"), mono: String(Number(last.mono) + ms), boot: last.boot };
  };
  const append = async (kind, body, by) => {
    const text = to_text(next_event(state, kind, body, by, now(), "0.1.0"));
    events = [...events, read(text, await hex(text))];
    state = folding.fold(sheet, events);
    const row = scene.held.runs.find((r) => r.run === kept.run);
    if (row) Object.assign(row, { seq: state.seq, phase: state.phase, synced: false });
  };
  return {
    sheet, get state() { return state; }, get events() { return events; }, readonly: Boolean(kept.readonly), says: kept.readonly ?? "",
    progress: (using = null) => progress(sheet, state, now(), using), now, screenSays: () => "",
    command: async ({ statement, passphrase, ...command }) => {
      globalThis.commands.push(command);
      await new Promise((r) => setTimeout(r, scene.slow ?? 0));
      if (scene.commandSays) return { refused: scene.commandSays };
      const answer = decide(sheet, state, command, now());
      if (answer.refused) return answer;
      for (const { kind, body } of answer.events) {
        await append(kind, body, command.by ?? state.recorder);
        if (state.unsigned) await append("signed", { person: state.unsigned.person, meaning: state.unsigned.meaning, jws: "e30.e30.AAAA" }, state.unsigned.person);
      }
      callbacks.forEach((cb) => cb({ state }));
      return { ok: true, state };
    },
    sign: async ({ person, passphrase, meaning, statement }) => {
      globalThis.commands.push({ do: "sign", person, meaning, statement });
      if (passphrase !== "right") throw { code: "wrong-passphrase", says: "That passphrase does not open this key. Nothing was signed.", wait_s: 2 };
      await append("signed", { person, meaning, jws: "e30.e30.AAAA" }, person);
      callbacks.forEach((cb) => cb({ state }));
      return { ok: true, state };
    },
    picture: async (file) => { if (!file.type.startsWith("image/")) throw { code: "not-a-picture", says: "This file cannot be read as a picture. Take it again, or choose a JPEG, PNG or WebP file." }; return { sha256: "1".repeat(64), media: "image/jpeg", width: 1600, height: 1200, size: file.size }; },
    pictureBytes: async () => { throw { code: "picture-lost", says: "A picture of this run is lost or damaged on this tablet. Take it again beside the step." }; },
    draft: async (step) => drafts.get(step) ?? null, saveDraft: async (step, draft) => { if (draft === null) drafts.delete(step); else drafts.set(step, draft); },
    onchange: (cb) => { callbacks.push(cb); return () => callbacks.splice(callbacks.indexOf(cb), 1); }, close: () => undefined,
  };
}
