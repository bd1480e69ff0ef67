/**
 * What was typed into sums, and which were used, while this page is open. In memory only: a sum is no record, and a
 * reload forgets it.
 */

/**
 * By argument: value and unit; its ± ("%" as unit where it is of the value), or the meter that it was measured with.
 * @typedef {{texts: Record<string, string>, units: Record<string, string>, any: string, shown: Record<string, string>, uncertain: boolean, widths: Record<string, string>, widthUnits: Record<string, string>, meters: Record<string, string>}} Typed
 */

/** @type {Map<string, Typed>} name -> what was typed, the last used last */
const typed = new Map();
/** How the list stands: what was asked for, which subject is open, which sum was left last. */
export const list = { asked: "", open: "", last: "" };

/** What was typed into a sum; empty at first. @param {string} name @returns {Typed} */
export function of(name) {
  const found = typed.get(name) ?? { texts: {}, units: {}, any: "", shown: {}, uncertain: false, widths: {}, widthUnits: {}, meters: {} };
  typed.delete(name);
  typed.set(name, found);
  return found;
}

/** The sums used last, newest first. @param {number} most */
export const recent = (most) => [...typed.keys()].reverse().slice(0, most);
