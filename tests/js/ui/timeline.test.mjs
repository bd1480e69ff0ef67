import assert from "node:assert/strict";
import { test } from "node:test";
import { coming, current, walk } from "../../../static/tablet/timeline.js";

const sheet = {
  sources: [{ name: "beam" }, { name: "heater" }],
  steps: [{ id: "a" }, { id: "b" }, { id: "c" }],
  moves: [
    { id: "a-b", origin: "a", to: "b", on: "done", manner: "plain", effects: { sets: { heater: "on" } } },
    { id: "b-safe", origin: "b", to: "@safe", on: "fail", manner: "stop", effects: { sets: {} } },
    { id: "b-c", origin: "b", to: "c", on: "pass", manner: "plain", effects: { sets: { beam: "on" } } },
  ],
  make_safe: [{ id: "s1", sets: { beam: "off" } }],
};
const events = [
  { seq: 0, kind: "run-started", body: {} },
  { seq: 1, kind: "states-declared", body: { states: { beam: "proved", heater: "off" } } },
  { seq: 2, kind: "confirmed", body: { step: "a", move: "a-b" } },
  { seq: 3, kind: "paused", body: {} },
];

test("before anything was declared no source is known", () => assert.deepEqual(walk(sheet, events, {}).get(0).after, { beam: "unknown", heater: "unknown" }));
test("what is declared is as it was found, not a change", () => assert.deepEqual(walk(sheet, events, {}).get(1), { before: { beam: "proved", heater: "off" }, after: { beam: "proved", heater: "off" } }));
test("an answer changes what its move sets", () => assert.deepEqual(walk(sheet, events, {}).get(2).after, { beam: "proved", heater: "on" }));
test("a pause leaves a proved source only locked", () => assert.equal(walk(sheet, events, {}).get(3).after.beam, "locked"));
test("the last row ends where the fold says", () => assert.equal(walk(sheet, events, { beam: { state: "unknown" } }).get(3).after.beam, "unknown"));
test("the fold's sources are read by name", () => assert.deepEqual(current({ beam: { state: "on", seq: 3 } }), { beam: "on" }));

test("coming rows carry what each will set, one after the other", () => {
  const rows = coming(sheet, ["a", "b", "c"], { beam: "off", heater: "off" });
  assert.deepEqual(rows.map((r) => r.sets), [{ heater: "on" }, { beam: "on" }, {}]);
  assert.deepEqual(rows[2].before, { beam: "on", heater: "on" });
});
test("a coming row does not announce what is so already", () => assert.deepEqual(coming(sheet, ["a"], { beam: "off", heater: "on" })[0].sets, {}));
