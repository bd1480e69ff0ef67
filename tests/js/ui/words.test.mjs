import assert from "node:assert/strict";
import { test } from "node:test";
import { changeOf, changeWord, countdown, lasting, limitWords, lower, passed, pretty, time, together } from "../../../static/tablet/words.js";
import { spoken } from "../../../static/tablet/spoken.js";
import { opensWords } from "../../../static/tablet/opens.js";

for (const [text, words] of [
  ["6.30", "six point three zero"], ["-119.6", "minus one hundred and nineteen point six"], ["12,5", "twelve point five"], ["0.4", "zero point four"],
  ["1200", "one thousand two hundred"], ["30009", "thirty thousand and nine"], ["6.", "six"], ["007", "zero zero seven"], ["1234567", "one two three four five six seven"],
  ["", ""], ["12.5.1", ""], ["1e5", ""], ["-", ""], ["1 000", ""],
]) test(`${JSON.stringify(text)} is said ${JSON.stringify(words)}`, () => assert.equal(spoken(text), words));

for (const [seconds, text] of [[378, "6:18"], [377.001, "6:18"], [0, "0:00"], [0.2, "0:01"], [59.9, "1:00"], [3725, "1:02:05"], [-3, "0:00"]]) {
  test(`${seconds} s still to wait are shown as ${text}, never early`, () => assert.equal(countdown(seconds), text));
}
test("time that has passed is not counted before it is whole", () => assert.equal(passed(522.9), "8:42"));
test("time left is said in units", () => assert.equal(lasting(3725), "1 h 2 min 5 s"));
test("a time is that of this tablet's clock as recorded", () => assert.equal(time("2026-07-31T14:31:07.123+01:00"), "14:31:07"));

test("limits on one side are said so", () => assert.equal(limitWords({ low: "450", high: null }, "V"), "at least 450 V"));
test("limits on both sides carry a true minus", () => assert.equal(limitWords({ low: "-150.0", high: "-115.0" }, "V"), "−150.0 to −115.0 V"));
test("one figure that alone is allowed is said so", () => assert.equal(limitWords({ low: "3", high: "3" }, ""), "exactly 3"));
test("a figure and its unit stay on one line", () => assert.equal(together("Beam voltage 10 s after the stop, at 2 places"), "Beam voltage 10\u00a0s after the stop, at 2 places"));
for (const [plain, shown] of [["uA", "µA"], ["1.10 ohm", "1.10 Ω"], ["mohm", "mΩ"], ["degC", "°C"], ["mW/cm2", "mW/cm²"], ["kV", "kV"], ["usual", "usual"], ["um", "µm"]]) {
  test(`the unit ${plain} is written ${shown}`, () => assert.equal(pretty(plain), shown));
}

test("an unlocked source is not said to go off", () => assert.equal(changeWord("locked", "off"), "is unlocked"));
test("a live source goes off", () => assert.equal(changeWord("on", "off"), "goes off"));
const named = { sources: [{ name: "magnets", title: "Magnets" }, { name: "bias", title: "Bias" }] };
test("sources in the plural go on, the others goes on", () => assert.deepEqual(
  [changeOf(named, "magnets", "off", "on"), changeOf(named, "magnets", "off", "locked"), changeOf(named, "bias", "off", "cut-off")],
  ["magnets go on", "magnets are locked", "bias goes to cut-off"]));
test("an abbreviation keeps its capital inside a sentence", () => assert.deepEqual(["X-rays", "RF drive", "Q1 isolator", "Ion pump"].map(lower), ["X-rays", "RF drive", "Q1 isolator", "ion pump"]));
test("a lifted earth leaves the lock", () => assert.equal(changeWord("earthed", "locked"), "is no longer earthed"));

test("a button that only time keeps shut counts down to the longest wait", () => assert.equal(opensWords([{ says: "a.", left: 20 }, { says: "b.", left: 378 }]), "Opens in 6:18"));
test("a button that more than time keeps shut says the other reason", () =>
  assert.equal(opensWords([{ says: "Opens in 20 s.", left: 20 }, { says: "Opens when vacuum good was shown.", left: null }]), "Opens when vacuum good was shown"));
