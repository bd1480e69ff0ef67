/**
 * A run on screen: head with MAKE SAFE, rails and their words, the strip with the open step. Redrawn when an event was
 * recorded; twice a second only what time changes is brought up to date, so that nothing typed is disturbed.
 */
import { alertUser, say } from "../announce.js";
import { h, put } from "../dom.js";
import { frame } from "../frame.js";
import { liveList } from "../live.js";
import { rails, shortRails } from "../rails.js";
import { comingRow, isShown, pastRow } from "../strip.js";
import { coming, current, walk } from "../timeline.js";
import { openPage } from "./open_page.js";
import { overPage } from "./overs.js";

const TICK_MS = 500;
/** A draft is written when no key has come for so long: the disk does not compete with the drawing of a key. */
const DRAFT_MS = 100;

/** What makes an open page another one: the step, its tries, what it waits for. @param {any} state */
function pageKey(state) {
  const tries = state.done?.[state.node]?.count ?? 0;
  const again = state.counters?.[`again:${state.node}`] ?? 0;
  return [state.phase, state.node, tries, again, state.pending?.seq ?? "", state.stop?.seq ?? "", state.recorder, state.signatures?.length ?? 0].join("|");
}

/** @param {any} run @param {any} [using] instrument and range that the person reads with, if not those proposed @returns {any} progress, or an empty one where the engine has nothing to say */
function progressOf(run, using = null) {
  try { return run.progress(using) ?? {}; } catch { return { reasons: [], moves: [], waits: [], may: [], path: [] }; }
}

/** @param {any} app @param {Record<string, string>} args */
export async function runScreen(app, args) {
  const run = await app.host.openRun(args.run);
  const sheet = run.sheet;
  const drafts = /** @type {Map<string, any>} */ (new Map());
  let over = /** @type {{name: string, args: any} | null} */ (null), page = /** @type {any} */ (null), key = "", busy = false, drawn = "", draftTimer = 0;
  const view = frame(sheet, { makeSafe: () => ctx.over("make_safe"), thisRun: () => ctx.over("this_run") });

  /** @type {any} */
  const ctx = {
    app, host: app.host, run, sheet, templates: app.templates(), state: run.state, progress: progressOf(run), step: null, draft: {},
    over: (/** @type {string} */ name, /** @type {any} */ more = {}) => { over = { name, args: more }; key = ""; void draw(); },
    shut: (/** @type {boolean} */ toHead = true) => { over = null; key = ""; void draw(toHead); },
    answer, send, keep, repaint,
    // Limits, guard and what is too coarse follow at once; nothing is recorded.
    use: (/** @type {any} */ using) => { keep({ using }); ctx.progress = told(); },
    settle: () => view.settle(),
    shutReasons: () => (ctx.progress.open === false ? ctx.progress.reasons ?? [] : []),
    people: () => (ctx.state.started?.people ?? []).filter((/** @type {any} */ p) => ctx.state.started.present.includes(p.id)).map(withKey),
    everyone: () => (ctx.state.started?.people ?? []).map(withKey),
    lastReading: () => null,
    awake: () => !run.screenSays?.(),
  };
  ctx.lastReading = (/** @type {string} */ step) => {
    const row = [...(ctx.state.log ?? [])].reverse().find((/** @type {any} */ r) => r.step === step && r.kind === "read");
    return row ? { text: row.text, name: row.level && row.level !== ctx.progress.level ? `at ${row.level}` : "last try" } : null;
  };
  /** Whether a person of the run can sign on this tablet. @param {any} person */
  function withKey(person) {
    const found = app.held.people.find((/** @type {any} */ p) => p.id === person.id);
    return { ...person, enrolledHere: found ? Boolean(found.enrolledHere) : false };
  }
  /** Drafts are kept while typing, never at unload. @param {Record<string, any>} patch */
  function keep(patch) {
    ctx.draft = { ...ctx.draft, ...patch };
    if (!ctx.step) return;
    const { id } = ctx.step;
    drafts.set(id, ctx.draft);
    clearTimeout(draftTimer);
    draftTimer = setTimeout(() => saveDraft(id), DRAFT_MS);
  }
  /** What was typed in a step, or nothing once it is answered, as it stands in memory. @param {string} step */
  function saveDraft(step) {
    clearTimeout(draftTimer);
    return Promise.resolve(run.saveDraft(step, drafts.get(step) ?? null)).catch(() => undefined);
  }
  /** Progress with what the person chose to read the open step with. */
  const told = () => progressOf(run, ctx.step && ctx.step.id === run.state.node ? ctx.draft.using ?? null : null);
  /** Send a command; "saved" is said only once it is on disk. @param {any} command @param {string} [statement] what the person who is spoken for signs */
  async function send(command, statement) {
    if (busy) return { refused: { code: "busy", says: "" } };
    busy = true;
    view.saved("Saving");
    const asked = statement === undefined ? command : { ...command, statement };
    try {
      return await run.command(asked);
    } catch (problem) {
      return { refused: { code: /** @type {any} */ (problem).code ?? "fault", says: /** @type {any} */ (problem).says ?? `Not saved: ${/** @type {any} */ (problem).message ?? problem}` } };
    } finally {
      busy = false;
    }
  }
  /** Answer the open step. @param {any} command @param {string} [statement] */
  async function answer(command, statement) {
    const step = ctx.step?.id, result = await send(step ? { step, ...command } : command, statement);
    if (result.refused) {
      alertUser(result.refused.says);
      setTimeout(() => page?.refuse?.(result.refused.says), 0);
      await draw();
    } else {
      if (step) { ctx.draft = {}; drafts.delete(step); await saveDraft(step); }
      await draw(true);
      say("Saved on this tablet");
    }
    return result;
  }

  function paintHead() {
    const { state } = ctx, mine = app.held.runs.find((/** @type {any} */ r) => r.run === state.run), acked = run.row?.acked?.seq ?? mine?.acked ?? -1;
    view.head(state, { called: Boolean(state.stop) || Boolean(ctx.progress.moves?.some((/** @type {any} */ m) => m.manner === "stop" && m.on === "fail") && state.pending), readonly: run.readonly ? run.says || "This run can only be read here." : "" });
    if (!busy) view.saved(run.readonly ? "read only here" : acked >= state.seq && state.seq >= 0 ? "Received by the server" : "Saved on this tablet", state.clock?.wall);
    const words = liveList(sheet, state, ctx.progress), next = coming(sheet, [ctx.step?.id ?? state.node, ...(ctx.progress.path ?? [])].filter(Boolean).slice(0, 8), current(state.sources)).find((r) => Object.keys(r.sets).length);
    if (words.textContent !== drawn) {
      drawn = words.textContent ?? "";
      view.live(words, shortRails(sheet, current(state.sources), ["declare", "confirm"].includes(state.phase) ? {} : next?.after ?? {}));
    }
  }
  /** Rows above and below the open page. */
  function paintRows() {
    const { state, progress } = ctx, states = walk(sheet, run.events ?? [], state.sources);
    const rows = (state.log ?? []).filter(isShown).map((/** @type {any} */ row) => pastRow(sheet, row, states.get(row.seq), (r) => ctx.over("past", { row: r })));
    const now = current(state.sources), after = ctx.step ? coming(sheet, [ctx.step.id, progress.path?.find((/** @type {string} */ p) => p !== ctx.step.id)].filter(Boolean), now)[0]?.after ?? now : now;
    const ahead = coming(sheet, (progress.path ?? []).filter((/** @type {string} */ id) => id !== ctx.step?.id), after).map((row) => comingRow(sheet, row));
    view.rows(rows, ahead);
  }
  function openRails() {
    const now = current(ctx.state.sources), waits = (ctx.progress.waits ?? []).filter((/** @type {any} */ w) => Number(w.left) > 0 && ["on", "standby"].includes(now[w.source])).map((/** @type {any} */ w) => w.source);
    const after = ctx.step && !ctx.state.pending ? coming(sheet, [ctx.step.id, ...(ctx.progress.path ?? []).filter((/** @type {string} */ p) => p !== ctx.step.id)].slice(0, 2), now)[0]?.after : now;
    const changes = Object.entries(after ?? {}).some(([k, v]) => now[k] !== v);
    return rails(sheet, now, after ?? now, { planned: true, at: changes ? 88 : 100, standing: true, warming: waits.filter((/** @type {string} */ s) => s === "heater") });
  }

  /** Head and rails after a record that leaves its page open. */
  function repaint() {
    ctx.state = run.state;
    ctx.progress = told();
    view.lanes(openRails());
    paintHead();
  }

  async function draw(toHead = false) {
    ctx.state = run.state;
    ctx.progress = told();
    ctx.step = ["going"].includes(ctx.state.phase) ? ctx.progress.step ?? null : null;
    const fresh = over ? `over:${over.name}` : pageKey(ctx.state);
    if (fresh !== key) {
      key = fresh;
      if (ctx.step && !over) ctx.draft = drafts.get(ctx.step.id) ?? (await Promise.resolve(run.draft(ctx.step.id)).catch(() => null)) ?? {};
      if (ctx.draft.using) ctx.progress = told();
      page?.stop?.();
      page = over ? overPage(ctx, over.name, over.args) : openPage(ctx);
      view.open(openRails(), page.node, Boolean(over));
      paintRows();
      view.settle();
      const focus = page.focus && !over ? page.focus : page.node.querySelector("h1");
      if (toHead || over) focus?.focus({ preventScroll: true });
    } else {
      paintRows();
      page.update?.();
    }
    paintHead();
  }
  function tick() {
    if (busy) return;
    ctx.progress = told();
    page?.update?.();
    paintHead();
  }

  await draw();
  const timer = setInterval(tick, TICK_MS);
  const seen = () => { if (document.visibilityState === "visible") tick(); };
  document.addEventListener("visibilitychange", seen);
  const forget = run.onchange?.((/** @type {any} */ what) => { if (what?.trouble?.says) alertUser(what.trouble.says); if (!busy) void draw(); });
  const quiet = app.onsync((/** @type {any} */ sync) => { if (sync.state === "received") void app.refresh().then(() => paintHead()); });
  if (args.over) ctx.over(args.over);

  return {
    node: view.node, title: sheet.title, focus: page.focus ?? null,
    stop: () => { clearInterval(timer); if (draftTimer && ctx.step) void saveDraft(ctx.step.id); document.removeEventListener("visibilitychange", seen); forget?.(); quiet(); page?.stop?.(); run.close?.(); },
  };
}
