/**
 * One formula after the other in evaluate.js and in compiled mathjs, for tests/bench/test_formula.py.
 *
 * On stdin [{name, tree, formulas, expression, values}, ...]; on stdout, for each, the least nanoseconds of an
 * evaluation and its value: {name, ours, theirs, our_value, their_value}. The goes of both take turns.
 */

import { compile } from "../js/node_modules/mathjs/lib/esm/index.js";
import { prepare } from "../../static/core/evaluate.js";

const [GOES, TURNS] = [40, 20_000];

/** Nanoseconds of one evaluation. @param {() => unknown} work */
function go(work) {
  const from = process.hrtime.bigint();
  for (let turn = 0; turn < TURNS; turn += 1) work();
  return Number(process.hrtime.bigint() - from) / TURNS;
}

const read = [];
for await (const part of process.stdin) read.push(part);
const cases = JSON.parse(Buffer.concat(read).toString()).map((one) => ({
  ...one,
  prepared: prepare(one.tree, one.formulas),
  compiled: compile(one.expression),
  scope: new Map(Object.entries(one.values)), // what it takes without a wrapper
  least: [Infinity, Infinity],
}));
for (let turn = 0; turn < GOES; turn += 1) {
  for (const { prepared, values, compiled, scope, least } of cases) {
    least[0] = Math.min(least[0], go(() => prepared.value(values)));
    least[1] = Math.min(least[1], go(() => compiled.evaluate(scope)));
  }
}
const told = cases.map(({ name, prepared, values, compiled, scope, least: [ours, theirs] }) => {
  return { name, ours, theirs, our_value: prepared.value(values), their_value: compiled.evaluate(scope) };
});
console.log(JSON.stringify(told));
