// Tick marks of an axis: steps of 1, 2 or 5, in whole numbers. Twin of fieldkit/drawing/ticks.py.

import { floor } from "./number.js";

/**
 * The finest steps that put at most `most` major ticks on the axis from a to b.
 * @param {bigint} a @param {bigint} b @param {number} places @param {number} most
 */
export function ticks(a, b, places, most) {
  for (let power = 0; ; power++) {
    for (const [step, divide] of [[1n, 5n], [2n, 4n], [5n, 5n]]) {
      const major = step * 10n ** BigInt(power);
      if (floor(b - a, major) < BigInt(most) && major >= divide) {
        return { major, minor: floor(major, divide), keep: Math.max(0, places - power) };
      }
    }
  }
}
