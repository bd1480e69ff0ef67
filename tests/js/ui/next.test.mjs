/** What is said of the next change, and which ways on are worth a button; sheets as small as the words need. */
import assert from "node:assert/strict";
import { test } from "node:test";
import { nextWords } from "../../../static/tablet/live.js";
import { worthShowing } from "../../../static/tablet/screens/ways.js";

const step = (id, number, control, level = null) => ({ id, number, level, control: { control } });
const sheet = {
  sources: [{ name: "beam_supply", title: "Beam supply" }],
  steps: [step("kv", "36", "number", {}), step("set", "36", "confirm", {}), step("off", "49", "confirm"), step("next", "52", "choice")],
  moves: [{ origin: "set", effects: { sets: { beam_supply: "on" } } }, { origin: "off", effects: { sets: { beam_supply: "off" } } }],
};
const state = { phase: "going", node: "kv", choices: {}, sources: { beam_supply: { state: "on" } } };
const off = { sources: { beam_supply: "off" }, step: "off", number: "49" };

test("a rung is said before the change of a state that comes after it", () =>
  assert.equal(nextWords(sheet, state, { node: "kv", path: ["set", "off"], next_change: off, waits: [] }), "beam supply may change level, at step 36; beam supply goes off, at step 49"));
test("the rung that is to be set is said with its level", () =>
  assert.equal(nextWords(sheet, { ...state, node: "set" }, { node: "set", level: "20 kV", path: ["kv", "off"], next_change: off, waits: [] }), "beam supply to 20 kV, at this step; beam supply goes off, at step 49"));
test("a choice that is open decides what changes", () => assert.equal(nextWords(sheet, state, { path: ["next"], next_change: null }), "depends on the choice at step 52"));
test("a choice that was made does not", () => assert.equal(nextWords(sheet, { ...state, choices: { next: "lock" } }, { path: ["next"], next_change: null }), "none foreseen"));
test("an ended run changes nothing", () => assert.equal(nextWords(sheet, { ...state, phase: "ended" }, { path: [], next_change: null }), "none: the run has ended"));

const way = (move, label, open, manner = "plain") => ({ move, label, open, manner });
test("one open way back hides the ways back from other rungs", () => {
  const moves = [way("back2", "Back one level", false), way("back3", "Back one level", true), way("back4", "Back one level", false), way("safe", "", true, "stop")];
  assert.deepEqual(worthShowing(moves).map((m) => m.move), ["back3", "safe"]);
});
test("where none is open each closed way is shown once, with its reason", () =>
  assert.deepEqual(worthShowing([way("a", "Back", false), way("b", "Back", false), way("again", "", false, "again")]).map((m) => m.move), ["a", "again"]));
