/**
 * The clock of a run: least and greatest times from a running timer and a wall clock.
 * Twin of fieldkit/run/clock.py, which says what it means; held by tests/vectors/clock and runs.
 * @module
 */

/** @typedef {{wall: string, mono: string, boot: string}} At */
/** @typedef {{least: string, greatest: string, wall: string, mono: string, boot: string, gaps: number, changed: boolean, owed: string | null}} Clock */
/** @typedef {{least: number, greatest: number, out: number | null, boot: boolean, moved: boolean, ahead: boolean}} Passed */

export const PAUSE_MS = 120000;
export const SLACK_MS = 2000;
/** What a gap that nobody can tell counts for greatest times: at least a day. */
const UNTOLD_MS = 86400000;

const WALL = /^(\d{4})-(\d\d)-(\d\d)T(\d\d):(\d\d):(\d\d)(?:\.(\d{1,9}))?(Z|[+-]\d\d:\d\d)$/;
const MONO = /^(\d{1,13})(?:\.\d+)?$/;
const SECONDS = /^(-?)(\d{1,12})(?:\.(\d{1,3})\d*)?$/;
const DAY = /^(\d{4})-(\d\d)-(\d\d)$/;
const MONTHS = [31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31];

/** @param {unknown} text @returns {number | null} milliseconds since 1970 */
export function wall_ms(text) {
  const found = typeof text === "string" ? WALL.exec(text) : null;
  if (!found) return null;
  const [year, month, day, hour, minute, second] = found.slice(1, 7).map(Number);
  if (month < 1 || month > 12 || hour > 23 || minute > 59 || second > 59) return null;
  if (day < 1 || day > longest(year, month)) return null;
  const thousandths = Number(((found[7] || "") + "000").slice(0, 3));
  const zone = found[8];
  let offset = 0;
  if (zone !== "Z") {
    offset = Number(zone.slice(1, 3)) * 60 + Number(zone.slice(4, 6));
    if (zone[0] === "-") offset = -offset;
  }
  return ((days(year, month, day) * 24 + hour) * 60 + minute - offset) * 60000 + second * 1000 + thousandths;
}

/** How many days the month has. @param {number} year @param {number} month */
function longest(year, month) {
  const leap = year % 4 === 0 && (year % 100 !== 0 || year % 400 === 0);
  return month === 2 && leap ? 29 : MONTHS[month - 1];
}

/** The date so many months after a date, the day clipped to the month's end; null where it is none.
 * @param {unknown} date @param {unknown} months @returns {string | null} */
export function months_later(date, months) {
  const found = typeof date === "string" ? DAY.exec(date) : null;
  if (!found || typeof months !== "number" || !Number.isSafeInteger(months) || months < 0) return null;
  const [of_year, of_month, of_day] = found.slice(1, 4).map(Number);
  if (of_year < 1 || of_month < 1 || of_month > 12 || of_day < 1 || of_day > longest(of_year, of_month)) return null;
  const passed_months = of_month - 1 + months;
  const year = of_year + Math.floor(passed_months / 12);
  const month = (passed_months % 12) + 1;
  if (year > 9999) return null;
  const two = (/** @type {number} */ n) => String(n).padStart(2, "0");
  return `${String(year).padStart(4, "0")}-${two(month)}-${two(Math.min(of_day, longest(year, month)))}`;
}

/** @param {number} year @param {number} month @param {number} day */
function days(year, month, day) {
  const y = month <= 2 ? year - 1 : year;
  const era = Math.floor(y / 400);
  const of_era = y - era * 400;
  const of_year = Math.floor((153 * (month > 2 ? month - 3 : month + 9) + 2) / 5) + day - 1;
  return era * 146097 + of_era * 365 + Math.floor(of_era / 4) - Math.floor(of_era / 100) + of_year - 719468;
}

/** @param {unknown} text @returns {number | null} */
export function mono_ms(text) {
  const found = typeof text === "string" ? MONO.exec(text) : null;
  return found ? Number(found[1]) : null;
}

/** @param {number} ms */
export function seconds(ms) {
  const size = Math.abs(ms);
  return `${ms < 0 ? "-" : ""}${Math.floor(size / 1000)}.${String(size % 1000).padStart(3, "0")}`;
}

/** @param {unknown} text @returns {number | null} */
export function millis(text) {
  const found = typeof text === "string" ? SECONDS.exec(text) : null;
  if (!found) return null;
  const size = Number(found[2]) * 1000 + Number(((found[3] || "") + "000").slice(0, 3));
  return found[1] && size ? -size : size;
}

/** @param {At} at @returns {Clock} */
export function begin(at) {
  return { least: "0.000", greatest: "0.000", wall: at.wall, mono: at.mono, boot: at.boot, gaps: 0, changed: false, owed: "0.000" };
}

/** @param {Clock} clock @param {At} at @returns {Passed} */
export function passed(clock, at) {
  const wall_a = wall_ms(clock.wall);
  const wall_b = wall_ms(at.wall);
  const d_wall = wall_a !== null && wall_b !== null ? wall_b - wall_a : 0;
  const mono_a = mono_ms(clock.mono);
  const mono_b = mono_ms(at.mono);
  if (at.boot === clock.boot) {
    const d_mono = mono_a !== null && mono_b !== null ? Math.max(0, mono_b - mono_a) : 0;
    return {
      least: d_mono,
      greatest: Math.max(d_mono, d_wall),
      out: Math.max(0, d_wall - d_mono),
      boot: false,
      moved: d_wall < d_mono - SLACK_MS,
      ahead: d_wall > d_mono + SLACK_MS,
    };
  }
  return {
    least: 0,
    greatest: Math.max(d_wall >= 0 ? d_wall : UNTOLD_MS, mono_b ?? 0),
    out: d_wall >= 0 ? d_wall : null,
    boot: true,
    moved: d_wall < 0,
    ahead: false,
  };
}

/** The tablet was away for longer than a moment, or nobody can tell: a `resumed` or `clock-changed` says so first.
 * @param {Passed} passed */
export function away(passed) {
  return passed.boot || passed.out === null || passed.out > PAUSE_MS;
}

/** @param {Clock} clock @param {At} at @returns {Clock} */
export function advance(clock, at) {
  const step = passed(clock, at);
  return {
    least: seconds(total(clock.least) + step.least),
    greatest: seconds(total(clock.greatest) + step.greatest),
    wall: at.wall,
    mono: at.mono,
    boot: at.boot,
    gaps: clock.gaps + (step.boot ? 1 : 0),
    changed: clock.changed || step.moved,
    owed: clock.owed,
  };
}

/** Totals [least, greatest] in milliseconds since the run's first event.
 * @param {Clock | null} clock @param {At} at @returns {[number, number]} */
export function now(clock, at) {
  if (clock === null) return [0, 0];
  const step = passed(clock, at);
  return [total(clock.least) + step.least, total(clock.greatest) + step.greatest];
}

/** @param {Clock} clock @param {number | null} more @returns {Clock} */
export function owe(clock, more) {
  if (more === null || clock.owed === null) return { ...clock, owed: null };
  return { ...clock, owed: seconds(total(clock.owed) + more) };
}

/** @param {unknown} wall */
export function day(wall) {
  return typeof wall === "string" ? wall.slice(0, 10) : "";
}

/** Seconds as whole milliseconds, rounded up. @param {number} of */
export function ceil_ms(of) {
  return Math.ceil(of * 1000);
}

/** @param {number} ms */
export function spoken(ms) {
  let whole = ms > 0 ? Math.ceil(ms / 1000) : 0;
  if (whole >= 3600) whole = Math.ceil(whole / 60) * 60;
  const hours = Math.floor(whole / 3600);
  const minutes = Math.floor(whole / 60) % 60;
  const left = whole % 60;
  if (hours) return minutes ? `${hours} h ${minutes} min` : `${hours} h`;
  if (minutes) return left ? `${minutes} min ${left} s` : `${minutes} min`;
  return `${left} s`;
}

/** @param {string | null} text */
function total(text) {
  return millis(text) ?? 0;
}
