/**
 * The library's formulas in JavaScript: one JSON object on stdin, {"formulas": {...}, "asked": {NAME: [[hex, ...], ...]},
 * "slopes": bool}, each row the arguments of one call as the bits of doubles. Answers {NAME: [hex | [code, sentence], ...]};
 * with slopes, for each row, [that, [[argument, hex], ...] | [code, sentence]].
 */

import { readFileSync } from "node:fs";

import { evaluate } from "../../static/core/evaluate.js";
import { gradient } from "../../static/core/slopes.js";

const BITS = new DataView(new ArrayBuffer(8));

/** @param {string} hex @returns {number} */
function double(hex) {
  BITS.setBigUint64(0, BigInt(`0x${hex}`));
  return BITS.getFloat64(0);
}

/** @param {any} value @returns {any} */
function written(value) {
  if (typeof value !== "number") return [value.code, value.says];
  BITS.setFloat64(0, value);
  return BITS.getBigUint64(0).toString(16).padStart(16, "0");
}

const { formulas, asked, slopes } = JSON.parse(readFileSync(0, "utf8"));
/** @type {Record<string, any[]>} */
const answers = {};
for (const [name, rows] of Object.entries(asked)) {
  const tree = { call: name, of: formulas[name].arguments.map((/** @type {any} */ a) => ({ name: a.name })) };
  answers[name] = /** @type {string[][]} */ (rows).map((row) => {
    const names = Object.fromEntries(row.map((hex, k) => [formulas[name].arguments[k].name, double(hex)]));
    if (!slopes) return written(evaluate(tree, names, {}, formulas));
    const { value, of } = gradient(tree, names, {}, formulas);
    return [written(value), of instanceof Map ? [...of].map(([argument, d]) => [argument, written(d)]) : written(of)];
  });
}
process.stdout.write(JSON.stringify(answers));
