// @ts-check
/**
 * An open run: its sheet, its folded state, and the only ways to lengthen its chain: a command, a signature, the clock.
 *
 * Commands go one after the other through core/decide.js; each event that it gives is on disk before the next is made
 * and before anyone is told. An event that speaks for a person (a release, a lock taken off, a deviation) is made only
 * just after that person's passphrase was entered, and their signature follows at once.
 * Not here: storing (journal.js), keys (keys.js), what a command means (core/).
 */

import { decide } from "../core/decide.js";
import { progress } from "../core/progress.js";
import * as folding from "../core/state.js";
import * as clockwatch from "./clockwatch.js";
import * as journal from "./journal.js";
import * as keys from "./keys.js";
import { Refused, told } from "./refusal.js";

/** @typedef {import("./db.js").Store} Store */
/** @typedef {import("./sentinel.js").RunRow} RunRow */
/** @typedef {import("../core/events.js").Event} Event */
/** @typedef {{ok: true, state: any} | {refused: {code: string, says: string}}} Done */

/** Seconds within which a passphrase counts as just entered. */
const FRESH_S = 120;

/** Event kind -> whose passphrase it needs, and what their signature then means. @type {Record<string, (body: any) => {person: string, meaning: string} | null>} */
const SPEAKS_FOR = {
  released: (body) => ({ person: body.who, meaning: "released" }),
  unlocked: (body) => ({ person: body.who, meaning: "unlocked" }),
  "went-on": (body) => (body.authority ? { person: body.authority, meaning: "allowed" } : null),
};

/** phases in which time that passes is nobody's concern */
const STILL = ["new", "ended", "voided"];

/** @param {unknown} bad @returns {{refused: {code: string, says: string}}} */
function refusal(bad) {
  const { code, says } = told(bad);
  return { refused: { ...(bad instanceof Refused ? { ...bad } : {}), code, says } };
}

/**
 * Opens a run. `taken` resolves once it is known whether this tab may write.
 * @param {Store} store @param {RunRow} start @param {any} sheet @param {string} app version of this page
 * @param {{saved: () => void}} hooks
 */
export async function open(store, start, sheet, app, hooks) {
  const loaded = await journal.load(store, start);
  const pen = journal.writer(store, { ...start, broken: loaded.broken });
  const foldAll = (/** @type {Event[]} */ events) => events.reduce(folding.apply, folding.begin(sheet));
  let folded = foldAll(loaded.events);
  let mine = false;
  let closed = false;
  /** @type {((what: any) => void)[]} */
  const listeners = [];
  /** @type {Promise<unknown>} */
  let line = Promise.resolve();

  const why = () => pen.broken || (closed ? "This run was closed here. Open it again." : mine ? "" : "This run is open in another window of this tablet. Here it can only be read.");
  const change = (/** @type {any} */ more = {}) => listeners.forEach((cb) => cb({ state: folded.state, readonly: why() !== "", says: why(), ...more }));

  /** @template T @param {() => Promise<T>} work @returns {Promise<T>} */
  function inLine(work) {
    const done = line.then(work);
    line = done.catch(() => undefined);
    return done;
  }

  /** @param {string} kind @param {any} body @param {string} by */
  async function append(kind, body, by) {
    if (why()) throw new Refused("read-only", why());
    let next = folded;
    const event = await pen.append(kind, body, by, clockwatch.now(), app, (made) => {
      next = folding.apply(folded, made);
      return next.state.phase;
    });
    folded = next;
    if (kind === "person-changed") keys.forget(body.to);
    return event;
  }

  /** @param {string} person @param {string} meaning @param {string} statement */
  async function appendSignature(person, meaning, statement) {
    const { people } = folded.state.started;
    const payload = {
      run: folded.state.run,
      chain: folded.state.chain,
      seq: folded.state.seq,
      head: folded.state.head,
      sheet: folded.state.sheet,
      meaning,
      person,
      name: people.find((/** @type {any} */ p) => p.id === person)?.name ?? person,
      time: clockwatch.now().wall,
      statement,
      pictures: folded.events.filter((e) => e.kind === "pictured").map((e) => e.body.sha256),
    };
    await append("signed", { person, meaning, jws: await keys.signAs(store, person, payload) }, person);
  }

  /**
   * What decide gave, on disk event by event. An event that speaks for a person needs their fresh passphrase.
   * @param {{kind: string, body: any}[]} made @param {{by?: string, passphrase?: string, statement?: string}} how
   */
  async function record(made, { by, passphrase, statement }) {
    const speakers = made.map(({ kind, body }) => SPEAKS_FOR[kind]?.(body) ?? null);
    for (const speaker of speakers) {
      if (!speaker) continue;
      if (passphrase) await keys.unlock(store, speaker.person, passphrase);
      else if (!keys.isFresh(speaker.person, FRESH_S)) {
        throw new Refused("passphrase-needed", "This needs that person’s own passphrase, entered now.", { person: speaker.person });
      }
      await keys.maySign(store, speaker.person);
    }
    for (const [n, { kind, body }] of made.entries()) {
      await append(kind, body, by ?? folded.state.recorder);
      const speaker = speakers[n];
      if (speaker) await appendSignature(speaker.person, speaker.meaning, statement ?? body.statement ?? body.reason ?? "");
    }
  }

  /** @param {any} command @returns {Promise<Done>} */
  function command({ passphrase, statement, ...asked }) {
    return inLine(async () => {
      try {
        if (why()) throw new Refused("read-only", why());
        const words = asked.do === "released" || statement === undefined ? { ...asked, ...(statement === undefined ? {} : { statement }) } : asked;
        let answer = decide(folded.ctx, folded.state, words, clockwatch.now());
        if ("refused" in answer && answer.refused.code === "not-resumed") {
          // Many short sleeps, each too short for the watch: together they are a gap, which is told first.
          const gap = decide(folded.ctx, folded.state, { do: "resumed", cause: "sleep" }, clockwatch.now());
          if ("events" in gap) await record(gap.events, {});
          answer = decide(folded.ctx, folded.state, words, clockwatch.now());
        }
        if ("refused" in answer) return answer;
        await record(answer.events, { by: asked.by, passphrase, statement });
        return { ok: true, state: folded.state };
      } catch (bad) {
        return refusal(bad);
      } finally {
        change();
        hooks.saved();
      }
    });
  }

  /**
   * A signature over the head as it is now. Throws Refused wrong-passphrase, too-soon, locked-key, not-enrolled-here.
   * @param {{person: string, passphrase?: string, meaning: string, statement: string}} what
   * @returns {Promise<{ok: true, state: any}>}
   */
  function sign({ person, passphrase, meaning, statement }) {
    return inLine(async () => {
      if (why()) throw new Refused("read-only", why());
      // Only the recorder goes on under a passphrase entered up to ten minutes ago; everybody else enters theirs now.
      if (passphrase) await keys.unlock(store, person, passphrase);
      else if (person !== folded.state.recorder && !keys.isFresh(person, FRESH_S)) throw new Refused("locked-key", "Enter the passphrase to sign.");
      const last = folded.state.signatures.at(-1);
      // record() has already signed for the event that speaks for this person; a second signature would say nothing new.
      const already = last && last.seq === folded.state.seq && last.person === person && last.meaning === meaning;
      if (!already) await appendSignature(person, meaning, statement);
      change();
      hooks.saved();
      return { ok: true, state: folded.state };
    });
  }

  /** What a gap or a loss leaves to be said before anything else. */
  async function catchUp() {
    if (pen.broken || STILL.includes(folded.state.phase)) return;
    const { found } = pen.row;
    const at = clockwatch.now();
    if (folded.state.clock && folded.state.clock.boot !== at.boot) {
      const wall = (Date.parse(at.wall) - Date.parse(folded.state.clock.wall)) / 1000;
      await append("resumed", { cause: "reload", wall_s: wall.toFixed(3), mono_s: null }, folded.state.recorder);
    }
    // After it, because the gap is counted from the last event before.
    if (found) await append("storage-found", { lost: found.lost, restored: found.restored, note: "restored from the second copy on the tablet" }, folded.state.recorder);
  }

  /** @param {clockwatch.Seen} what */
  function clockSaid({ kind, wall_s, mono_s }) {
    void inLine(async () => {
      if (why() || STILL.includes(folded.state.phase)) return;
      if (kind === "clock-changed") await append(kind, { wall_s, mono_s }, folded.state.recorder);
      else await append("resumed", { cause: "sleep", wall_s, mono_s }, folded.state.recorder);
    })
      .catch((bad) => change({ trouble: told(bad) }))
      .finally(() => change());
  }

  const stopWatch = clockwatch.watch(clockSaid);
  /** @type {() => Promise<void>} */
  let letGo = async () => undefined;
  const taken = await new Promise((resolve) => {
    letGo = journal.hold(start.run, resolve, () => {
      void inLine(async () => {
        await pen.refresh();
        folded = foldAll((await journal.load(store, pen.row)).events);
        mine = true;
        await catchUp();
      })
        .catch((bad) => change({ trouble: told(bad) }))
        .finally(() => change());
    });
  });
  mine = taken;
  if (mine) await inLine(catchUp);

  return {
    sheet,
    get state() {
      return folded.state;
    },
    get events() {
      return folded.events;
    },
    get readonly() {
      return why() !== "";
    },
    get says() {
      return why();
    },
    get row() {
      return pen.row;
    },
    command,
    sign,
    progress: (/** @type {any} */ using = null) => progress(folded.ctx, folded.state, clockwatch.now(), using),
    now: () => clockwatch.now(),
    /** @param {(what: any) => void} cb */
    onchange(cb) {
      listeners.push(cb);
      return () => listeners.splice(listeners.indexOf(cb), 1);
    },
    /** Lets go of the run; resolves once another window, or this one again, may take it. */
    async close() {
      if (closed) return;
      closed = true;
      stopWatch();
      await line;
      await letGo();
    },
  };
}
