/** Words for states, times and people, as the screens say them. No element is made here and nothing is decided. */

/** state of a source -> how it is said */
export const STATE_WORDS = {
  on: "on", off: "off", standby: "on at standby volts", "cut-off": "at cut-off", locked: "locked, not proved dead",
  proved: "locked and proved dead", earthed: "locked, proved dead and earthed", unknown: "not known",
};
/** state of a source -> how a change to it is said after the source's name */
export const CHANGE_WORDS = {
  on: "goes on", off: "goes off", standby: "goes to standby volts", "cut-off": "goes to cut-off", locked: "is locked",
  proved: "is proved dead", earthed: "is earthed", unknown: "is not known",
};
/** sources whose titles are plurals */
const PLURAL = ["magnets", "auxiliaries", "x_rays"];
export const LIVE = ["on", "standby", "cut-off"];
export const SHUT = ["locked", "proved", "earthed"];

/** control -> what a coming row calls it */
export const CONTROL_WORDS = {
  caution: "caution", confirm: "act", number: "reading", prove: "prove dead", lock: "lock", unlock: "take a lock off", earth: "earth", lift: "lift the earth",
  choice: "choose", hold: "hold point", picture: "picture", remark: "remark", result: "worked out", wait: "wait", people: "people counted",
};

/** "14:31:07" of an ISO time as it stood on this tablet. @param {string} wall */
export const time = (wall) => (wall || "").slice(11, 19);
/** "14:31". @param {string} wall */
export const minute = (wall) => (wall || "").slice(11, 16);

const MONTHS = ["Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"];
/** "31 Jul 2026" of an ISO date or time. @param {string | null | undefined} iso */
export function day(iso) {
  const [y, m, d] = (iso || "").slice(0, 10).split("-").map(Number);
  return y ? `${d} ${MONTHS[m - 1]} ${y}` : "";
}

/** Dates inside a sentence as people write them: "ran out on 30 Nov 2026". @param {string} text */
export const dated = (text) => text.replace(/\b\d{4}-\d\d-\d\d\b/g, (iso) => day(iso));

/** Seconds that are still to wait, as shown: "6:18", "1:02:05"; never early, so parts of a second count up. @param {number | string} seconds */
export function countdown(seconds) {
  const s = Math.max(0, Math.ceil(Number(seconds) - 1e-6));
  const [hours, minutes, rest] = [Math.floor(s / 3600), Math.floor((s % 3600) / 60), s % 60];
  const two = (/** @type {number} */ n) => String(n).padStart(2, "0");
  return hours ? `${hours}:${two(minutes)}:${two(rest)}` : `${minutes}:${two(rest)}`;
}
/** Seconds that have passed, as shown: parts of a second are not counted. @param {number | string} seconds */
export const passed = (seconds) => countdown(Math.floor(Number(seconds) + 1e-6));

/** "6 min 18 s". @param {number | string} seconds @param {boolean} [up] count a part of a second as one (time left) */
export function lasting(seconds, up = true) {
  const s = Math.max(0, up ? Math.ceil(Number(seconds) - 1e-6) : Math.floor(Number(seconds) + 1e-6));
  const parts = [[Math.floor(s / 3600), "h"], [Math.floor((s % 3600) / 60), "min"], [s % 60, "s"]].filter(([n]) => n);
  return parts.length ? parts.map(([n, u]) => `${n} ${u}`).join(" ") : "0 s";
}

/** "a, b and c". @param {string[]} things */
export const list = (things) => (things.length < 2 ? things.join("") : `${things.slice(0, -1).join(", ")} and ${things.at(-1)}`);

/** A number as typed, with a true minus sign. @param {string} text */
export const minus = (text) => String(text ?? "").replace(/^-/, "−");

/** A figure and its unit are never parted at the end of a line: "10 s". @param {string} text */
export const together = (text) => text.replace(/(\d) (?=(s|min|h|m|cm|V|kV|A|mA|W|kW|°C)\b)/g, "$1\u00a0");

/** A unit as it is written by hand: the sheet's own symbols are plain ASCII. Also inside sentences. @param {string} text */
export const pretty = (text) => String(text ?? "").replace(/\b([kMm]?)ohm\b/g, "$1Ω").replace(/\b(c?m)([23])\b/g, (_, m, n) => m + (n === "2" ? "²" : "³")).replace(/\bdegC\b/g, "°C").replace(/\bu(A|V|W|s|Sv|m)\b/g, "µ$1");

/** How a change of a source is said after its name. @param {string} before @param {string} after */
export function changeWord(before, after) {
  if (SHUT.includes(before) && after === "off") return "is unlocked";
  if (before === "earthed" && SHUT.includes(after)) return "is no longer earthed";
  return /** @type {any} */ (CHANGE_WORDS)[after] ?? "changes";
}

/** "magnets go on", "bias goes on": a source and what becomes of it. @param {any} sheet @param {string} name @param {string} before @param {string} after */
export function changeOf(sheet, name, before, after) {
  const title = sourceTitle(sheet, name), word = changeWord(before, after);
  return `${title} ${PLURAL.includes(name) ? word.replace(/^is\b/, "are").replace(/^goes\b/, "go").replace(/^changes$/, "change") : word}`;
}

/** First letter large. @param {string} text */
export const sentence = (text) => (text ? text[0].toUpperCase() + text.slice(1) : "");

/** The title of a source. @param {any} sheet @param {string} name */
export function sourceTitle(sheet, name) {
  const found = sheet.sources.find((/** @type {any} */ s) => s.name === name);
  return found ? lower(found.title) : name.replaceAll("_", " ");
}
/** A title inside a sentence: its first letter small unless the word is an abbreviation. @param {string} title */
export const lower = (title) => (/^[A-ZΩ][A-Z0-9-]/.test(title) ? title : title.slice(0, 1).toLowerCase() + title.slice(1));

/** The name of a person of the run. @param {any} state @param {string} id */
export const personName = (state, id) => (state?.started?.people ?? []).find((/** @type {any} */ p) => p.id === id)?.name ?? id;

/** "at least 450 V", "6.10 to 6.50 V", "" without limits. @param {any} limits @param {string} unit */
export function limitWords(limits, unit) {
  const [low, high] = [limits?.low, limits?.high];
  unit = pretty(unit);
  if (low && low === high) return `exactly ${minus(low)} ${unit}`.trim();
  if (low && high) return `${minus(low)} to ${minus(high)} ${unit}`;
  if (low) return `at least ${minus(low)} ${unit}`;
  return high ? `at most ${minus(high)} ${unit}` : "";
}

/** What passes where the limits are guarded, as two parts: ["6.13 to 6.47 V passes;", " within the meter's ..."]; empty where they are not. @param {any} limits @param {string} unit @returns {[string, string]} */
export function acceptWords(limits, unit) {
  if (!limits?.guarded || limits.coarse || limits.fault || limits.reach) return ["", ""];
  const accepted = limitWords({ low: limits.accept_low, high: limits.accept_high }, unit);
  return accepted ? [`${sentence(accepted)} passes;`, " within the meter’s uncertainty of a limit the verdict is conditional."] : ["", ""];
}
