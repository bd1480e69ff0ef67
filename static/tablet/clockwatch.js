// @ts-check
/**
 * The tablet's clocks: what time an event gets, and what is noticed when they part or stop.
 *
 * One boot id a page; within it `mono` counts. Wall and mono are compared every ten seconds and whenever the page is
 * shown again. Backwards, or forwards while the page was in view: the clock was changed. Forwards after the page was
 * hidden, or both clocks far ahead at once: the tablet slept. Not here: what a gap does to a wait (core/clock.js).
 */

import { randomId } from "./bytes.js";

/** @typedef {{wall: string, mono: string, boot: string}} At */
/** @typedef {{kind: 'clock-changed' | 'slept', wall_s: string, mono_s: string}} Seen */

export const SAMPLE_MS = 10_000;
export const JUMP_S = 2;
export const GAP_S = 120;

const boot = randomId(12);

/**
 * ISO 8601 with milliseconds and this tablet's offset from UTC at that moment.
 * @param {number} ms
 */
export function isoWithOffset(ms) {
  const date = new Date(ms);
  const offset = -date.getTimezoneOffset();
  const local = new Date(ms + offset * 60_000).toISOString().slice(0, -1);
  const abs = Math.abs(offset);
  const two = (/** @type {number} */ n) => String(n).padStart(2, "0");
  return `${local}${offset < 0 ? '-' : '+'}${two(Math.floor(abs / 60))}:${two(abs % 60)}`;
}

/** @returns {At} */
export function now() {
  return { wall: isoWithOffset(Date.now()), mono: performance.now().toFixed(1), boot };
}

/** @param {number} s seconds as the decimal string of an event */
const seconds = (s) => s.toFixed(3);

/**
 * What happened between two samples, or null. Pure.
 * @param {{wall: number, mono: number}} before milliseconds
 * @param {{wall: number, mono: number}} after
 * @param {boolean} hidden the page was out of view at some time between them
 * @returns {Seen | null}
 */
export function between(before, after, hidden) {
  const wall = (after.wall - before.wall) / 1000;
  const mono = (after.mono - before.mono) / 1000;
  const parted = wall - mono;
  const says = { wall_s: seconds(wall), mono_s: seconds(mono) };
  if (parted < -JUMP_S || (parted > JUMP_S && !hidden)) return { kind: "clock-changed", ...says };
  return Math.max(wall, mono) > GAP_S ? { kind: "slept", ...says } : null;
}

/**
 * Watches until the returned function is called; `seen` is told of each change or sleep.
 * @param {(what: Seen) => void} seen
 * @returns {() => void}
 */
export function watch(seen) {
  const sample = () => ({ wall: Date.now(), mono: performance.now() });
  let last = sample();
  let hidden = document.visibilityState === "hidden";
  const look = () => {
    const at = sample();
    const found = between(last, at, hidden);
    last = at;
    hidden = document.visibilityState === "hidden";
    if (found) seen(found);
  };
  const shown = () => {
    if (document.visibilityState === "hidden") hidden = true;
    else look();
  };
  const back = () => {
    hidden = true;
    look();
  };
  const timer = setInterval(look, SAMPLE_MS);
  document.addEventListener("visibilitychange", shown);
  window.addEventListener("pageshow", look);
  document.addEventListener("resume", back);
  return () => {
    clearInterval(timer);
    document.removeEventListener("visibilitychange", shown);
    window.removeEventListener("pageshow", look);
    document.removeEventListener("resume", back);
  };
}

/**
 * Keeps the screen on while a run is open, as far as the browser lets. Says so when it does not.
 * @param {(says: string) => void} tell "" when the screen is kept on
 * @returns {() => void} lets go
 */
export function keepAwake(tell) {
  let wanted = true;
  /** @type {WakeLockSentinel | null} */
  let held = null;
  const take = async () => {
    if (!wanted || held || document.visibilityState === "hidden") return;
    try {
      held = await navigator.wakeLock.request("screen");
      held.addEventListener("release", () => {
        held = null;
      });
      tell("");
    } catch {
      tell("This tablet may switch its screen off. Waits are counted all the same; set the screen to stay on.");
    }
  };
  const again = () => void take();
  document.addEventListener("visibilitychange", again);
  document.addEventListener("pointerup", again);
  again();
  return () => {
    wanted = false;
    document.removeEventListener("visibilitychange", again);
    document.removeEventListener("pointerup", again);
    void held?.release();
  };
}
