/** What a button that is not open yet says. No element is made here. */
import { countdown } from "./words.js";

/** @typedef {{says: string, left: string | number | null}} Reason */

/** What a button that is not open yet says. @param {Reason[]} reasons */
export function opensWords(reasons) {
  const left = reasons.filter((r) => r.left !== null && r.left !== undefined && Number(r.left) > 0);
  if (reasons.length && left.length === reasons.length) return `Opens in ${countdown(Math.max(...left.map((r) => Number(r.left))))}`;
  return (reasons.find((r) => !left.includes(r))?.says ?? "Not open yet").replace(/\.$/, "");
}
