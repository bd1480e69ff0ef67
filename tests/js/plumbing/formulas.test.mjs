import assert from "node:assert/strict";
import { test } from "node:test";
import { evaluate, prepare } from "../../../static/core/evaluate.js";
import { Fault } from "../../../static/core/values.js";

const argument = { name: "x", unit: "V", factor: "1", offset: "0", low: "0", high: "10" };
const formula = (tree) => ({ once: { name: "once", meaning: "", arguments: [argument], result_unit: "V", tree, reference: "" } });
const TREE = { call: "once", of: [{ name: "reading" }] };
const TWICE = formula({ call: "add", of: [{ name: "x" }, { name: "x" }] });
const SQUARE = formula({ call: "mul", of: [{ name: "x" }, { name: "x" }] });

test("a tree that is kept answers for the names of each time", () => {
  assert.equal(evaluate(TREE, { reading: 3 }, {}, TWICE), 6);
  assert.equal(evaluate(TREE, { reading: 4 }, {}, TWICE), 8);
  assert.equal(evaluate(TREE, {}, {}, TWICE).code, "unknown-name");
  assert.equal(evaluate(TREE, { reading: 11 }, {}, TWICE).code, "out-of-range");
  assert.equal(evaluate(TREE, { reading: new Fault("missing", "") }, {}, TWICE).code, "missing");
  assert.equal(evaluate(TREE, { reading: 3 }, {}, TWICE), 6);
});

test("the same tree aboard another sheet has that sheet's formulas", () => {
  assert.equal(evaluate(TREE, { reading: 3 }, {}, TWICE), 6);
  assert.equal(evaluate(TREE, { reading: 3 }, {}, SQUARE), 9);
  assert.equal(evaluate(TREE, { reading: 3 }).code, "unknown-function");
  assert.equal(evaluate(TREE, { reading: 3 }, {}, TWICE), 6);
});

test("a tree made ready has the columns of each time", () => {
  const ready = prepare({ call: "last", of: [{ series: "levels" }] });
  assert.equal(ready.value({}, { levels: [1, 2] }), 2);
  assert.equal(ready.value({}, { levels: [1, 2, 5] }), 5);
  assert.equal(ready.value({}, { levels: [] }).code, "missing");
  assert.equal(ready.value().code, "unknown-name");
});

test("what is no tree is told, not kept", () => {
  for (const junk of [null, 5, "27", [], undefined]) assert.equal(evaluate(junk).code, "bad-tree");
  assert.equal(evaluate(TREE, { reading: 3 }, {}, null).code, "unknown-function");
});
