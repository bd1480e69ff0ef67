/** The ± of a sum without a page: what was typed after it, what a meter makes of a value, what comes of them, and how it is shown. */
import assert from "node:assert/strict";
import { test } from "node:test";
import { sumOf } from "../../../static/tablet/sums/book.js";
import { carrier, mostWords, percentWords } from "../../../static/tablet/sums/carry.js";
import { alone, inLine, withMargin } from "../../../static/tablet/sums/digits.js";
import { keyOf, measured, metersFor, metersOf, nameOf } from "../../../static/tablet/sums/meters.js";
import { prepared } from "../../../static/tablet/sums/reckon.js";
import { widthOf } from "../../../static/tablet/sums/widths.js";

const unit = (symbol, shown, factor, dimension, more = {}) => ({ symbol, shown, factor, offset: "0", dimension, absolute: false, ...more });
const VOLT = { kg: "1", m: "2", s: "-3", A: "-1" };
const UNITS = Object.fromEntries([
  unit("1", "", "1", {}), unit("%", "%", "0.01", {}), unit("dB", "dB", "1", { dB: "1" }), unit("dBm", "dBm", "1", { dB: "1" }), unit("V", "V", "1", VOLT), unit("kV", "kV", "1000", VOLT), unit("A", "A", "1", { A: "1" }),
  unit("kW", "kW", "1000", { kg: "1", m: "2", s: "-3" }), unit("A s", "A s", "1", { A: "1", s: "1" }), unit("K", "K", "1", { K: "1" }), unit("degC", "°C", "1", { K: "1" }, { offset: "273.15", absolute: true }),
].map((row) => [row.symbol, row]));
const argument = (name, symbol, meaning, more = {}) => ({ name, meaning, symbol, unit: UNITS[symbol].shown, factor: UNITS[symbol].factor, offset: UNITS[symbol].offset, any: "", low: null, high: null, whole: false, ...more });
const formula = (args, symbol, tree) => ({ subject: "beam", meaning: "", arguments: args, symbol, unit: UNITS[symbol].shown, factor: UNITS[symbol].factor, offset: UNITS[symbol].offset, any: "", digits: 6, tree, uses: [], reference: "", decides: "", cautions: [], plot: null, example: null, written: "" });
const call = (name, ...of) => ({ call: name, of }), n = (name) => ({ name });
const VOLTAGE = argument("voltage", "kV", "beam voltage", { low: "0", high: "60000" }), CURRENT = argument("current", "A", "beam current");
const BOOK = {
  subjects: [{ name: "beam", formulas: ["power", "root", "square"] }], pairs: {}, units: UNITS,
  formulas: { power: formula([VOLTAGE, CURRENT], "kW", call("mul", n("voltage"), n("current"))), root: formula([argument("x", "1", "number")], "1", call("sqrt", n("x"))), square: formula([argument("x", "1", "number")], "1", call("mul", n("x"), n("x"))) },
};

// ---- how it is shown

for (const [si, u, symbol, digits, is] of [
  // JCGM 100, 7.2.6: 10.05762 ohm with 27 milliohm is 10.058 ohm
  [10.05762, 0.027, "V", 12, "10.058 ± 0.027"], [41543.2, 1437, "kW", 4, "41.5 ± 1.4"], [298.15, 0.4, "degC", 6, "25.00 ± 0.40"], [-0.5, 12, "V", 6, "0 ± 12"], [0, 1, "V", 6, "0.0 ± 1.0"], [41543.2, 0.5, "kW", 4, "41.54 ± 0.01"],
  [41543.2, 2999, "V", 4, "41500 ± 3000"], [4.807e-19, 4.8e-21, "A s", 6, "(4.807 ± 0.048) × 10⁻¹⁹"], [-4.807e-19, 4.8e-21, "A s", 6, "(−4.807 ± 0.048) × 10⁻¹⁹"], [1e300, 1e300, "V", 6, "(1.0 ± 1.0) × 10³⁰⁰"], [1e-9, 0.5, "V", 6, "0.00 ± 0.50"],
]) test(`${si} with ${u} is shown ${is}`, () => assert.equal(inLine(withMargin(si, u, UNITS[symbol], digits)), is));

for (const [u, symbol, is] of [[0.346, "K", "0.35"], [5.8e-9, "A", "5.8 × 10⁻⁹"], [508, "kV", "0.51"], [0.346, "degC", "0.35"]]) test(`${u} alone is shown ${is}`, () => assert.equal(alone(u, UNITS[symbol]), is));

// ---- what was typed

const typed = (text, percent = false) => ({ text, percent, meter: null }), read = (text, percent, of = VOLTAGE, value = { state: "good", si: 34000 }, own = UNITS.kV) => widthOf(BOOK, of, value, own, typed(text, percent), "2026-07-31");
for (const [text, percent, state, u] of [["", false, "none", 0], ["0.5", false, "good", 500], ["0,5", false, "good", 500], ["2", true, "good", 680], ["0.", false, "unfinished", 0], ["-1", false, "wrong", 0], ["+1", true, "wrong", 0], ["a", false, "wrong", 0], ["1 0", false, "wrong", 0]]) {
  test(`${JSON.stringify(text)}${percent ? " %" : " kV"} after 34 kV is ${state}`, () => { const found = read(text, percent); assert.deepEqual([found.state, found.u], [state, u]); });
}
test("a temperature has its ± in kelvins, a level in dBm in dB", () => {
  assert.equal(read("0.4", false, argument("inlet", "degC", "inlet"), { state: "good", si: 308.15 }, UNITS.degC).u, 0.4);
  assert.equal(read("0.4", false, argument("level", "dBm", "level"), { state: "good", si: 76 }, UNITS.dBm).u, 0.4);
});
test("a percent of nothing is refused; a percent of what is not typed yet is none", () => {
  assert.equal(read("1", true, VOLTAGE, { state: "good", si: 0 }).says, "± of beam voltage: a percent of 0 is nothing. Give it in kV.");
  assert.equal(read("1", true, VOLTAGE, { state: "empty", si: 0 }).state, "none");
});
test("a wrong ± names its value", () => assert.equal(read("-1", false).says, "± of beam voltage is to both sides: no sign."));

// ---- what a meter makes of it

const range = (name, own, low, high, percent, digits, resolution, more = {}) => ({ name, unit: own, low, high, resolution, percent, digits, percent_of_range: "0", ...more });
const meter = (id, reads, ranges, more = {}) => ({ id, reads, certificate: "", calibrated_on: "2025-11-30", interval_months: 12, calibrated_to: null, temperature: null, ranges, ...more });
const KIT = [
  meter("HM-3", "hand multimeter", [range("1000 V", "V", "-1000", "1000", "0.1", "2", "0.1"), range("20 V", "V", "-20", "20", "0.05", "3", "0.001"), range("10 A", "A", "-10", "10", "0.8", "5", "0.001")]),
  meter("PV-2", "beam voltage", [range("40 kV", "kV", "0", "40", "1", "1", "0.1")]), meter("TI-2", "coolant inlet", [range("100 degC", "degC", "0", "100", "0", "3", "0.1")]),
  meter("KS-1", "proving unit", [range("600 V", "V", "0", "600", "0", "0", "1")]), meter("OLD-1", "gap voltage", undefined, { unit: "kV", low: "0", high: "50", resolution: "0.1", percent: "2", digits: "0", ranges: undefined, calibrated_on: null, interval_months: null }),
  meter("XX-1", "not known", [range("1 kV", "kV", "0", "1", null, null, null)]), meter("PR-2", "pressure of the air", [range("10 V", "V", "0", "10", "0", "0", "0.1", { percent_of_range: "2" })]),
];
const METERS = metersOf(KIT), by = (id, own) => METERS.find((one) => one.id === id && one.range === own);
test("ranges are offered from the smallest, those without an accuracy not at all, an older register's single one too", () =>
  assert.deepEqual(METERS.map(keyOf), ["HM-3/10 A", "HM-3/20 V", "HM-3/1000 V", "PV-2/40 kV", "TI-2/100 degC", "OLD-1/", "PR-2/10 V"]));
test("only what reads the kind of the value is offered, the likeliest first", () => {
  assert.deepEqual(metersFor(BOOK, VOLTAGE, { any: "", about: "" }, METERS).map((one) => one.id), ["PV-2", "OLD-1", "HM-3", "HM-3", "PR-2"]);
  assert.deepEqual(metersFor(BOOK, argument("inlet", "degC", "inlet"), { any: "", about: "" }, METERS).map((one) => one.id), ["TI-2"]);
  assert.deepEqual(metersFor(BOOK, argument("voltage", "V", "voltage"), { any: "", about: "gap_factor" }, METERS).map((one) => one.id)[0], "OLD-1");
  assert.deepEqual(metersFor(BOOK, argument("rise", "K", "rise"), { any: "", about: "" }, METERS), []);
  assert.deepEqual(metersFor(BOOK, { ...VOLTAGE, whole: true }, { any: "", about: "" }, METERS), []);
  assert.deepEqual(metersFor(BOOK, { ...VOLTAGE, any: "difference" }, { any: "V", about: "" }, METERS), []);
  assert.equal(metersFor(BOOK, { ...VOLTAGE, symbol: "", any: "any" }, { any: "A", about: "" }, METERS).length, 1);
  assert.equal(nameOf(by("TI-2", "100 degC")), "TI-2 coolant inlet, 100 °C");
});
const shows = (one, si, own, today = "2026-07-31T12:00:00+01:00") => measured(one, si, { of: UNITS[own], apart: own === "degC" ? UNITS.K : UNITS[own] }, today);
test("the accuracy is a half-width: U = 2 a / root 3", () => {
  // 1 % of 34 kV and one digit of 0.1 kV
  const found = shows(by("PV-2", "40 kV"), 34000, "kV");
  assert.ok(Math.abs(found.u - (2 * 440) / Math.sqrt(3)) < 1e-6);
  assert.equal(found.says, "PV-2: accuracy ±0.44 kV, which is ±0.51 kV with k\u00a0=\u00a02.");
  assert.equal(found.late, "");
  // three digits of 0.1, wherever on the scale; 2 % of a full scale of 10 V
  assert.ok(Math.abs(shows(by("TI-2", "100 degC"), 308.15, "degC").u - 0.6 / Math.sqrt(3)) < 1e-9);
  assert.ok(Math.abs(shows(by("PR-2", "10 V"), 1, "V").u - 0.4 / Math.sqrt(3)) < 1e-9);
});
test("a value beyond its range has no ±, and the range is said", () => {
  const found = shows(by("HM-3", "20 V"), 34000, "V");
  assert.deepEqual([found.u, found.says], [null, "HM-3 cannot show 34000 V: its range is −20 to 20 V."]);
  assert.equal(widthOf(BOOK, VOLTAGE, { state: "good", si: 34000 }, UNITS.kV, { text: "", percent: false, meter: by("HM-3", "20 V") }, "2026-07-31").state, "wrong");
});
test("a calibration is good to the end of its last day, then it is said; so is one that is not known", () => {
  assert.equal(shows(by("PV-2", "40 kV"), 34000, "kV", "2026-11-30T23:59:59+01:00").late, "");
  assert.equal(shows(by("PV-2", "40 kV"), 34000, "kV", "2026-12-01T00:00:01+01:00").late, "Its calibration ran out on 30 Nov 2026.");
  assert.equal(shows(by("OLD-1", ""), 34000, "kV").late, "Its calibration is not known.");
});

// ---- what comes of it

const carried = (name, values, widths) => {
  const sum = sumOf(BOOK, name), ready = prepared(sum, BOOK.formulas);
  return carrier(sum, BOOK.formulas, ready)(values, widths, ready.all(values));
};
test("the ± of a product is the root of the squares, and each value has its share", () => {
  const { results: [of], says } = carried("power", { voltage: 34000, current: 2.2 }, { voltage: 170, current: 0.022 });
  // 0.5 % and 1 %: root(1.25) % of 74.8 kW; shares 20 and 80 %
  assert.ok(Math.abs(of.u / 74800 - Math.sqrt(1.25) / 100) < 1e-12);
  assert.deepEqual(of.shares.map((s) => [s.argument.name, Math.round(s.percent)]), [["current", 80], ["voltage", 20]]);
  assert.equal(mostWords(of), "Most of it comes from beam current (80 %).");
  assert.deepEqual(says, []);
});
test("what has no ± counts as exact, and one alone makes all of it", () => {
  const { results: [of] } = carried("power", { voltage: 34000, current: 2.2 }, { current: 0.022 });
  assert.equal(mostWords(of), "All of it comes from beam current.");
});
test("a second one that counts is named too", () => {
  const { results: [of] } = carried("power", { voltage: 34000, current: 2.2 }, { voltage: 300, current: 0.02 });
  assert.match(mostWords(of), /^Most of it comes from beam current \(51 %\), then beam voltage \(49 %\)\.$/);
});
test("where the range ends within a ±, it is said", () => {
  const { results: [of], says } = carried("power", { voltage: 59900, current: 2 }, { voltage: 600 });
  assert.ok(of.u > 0);
  assert.deepEqual(says, ["The range ends within the ± of beam voltage: Voltage is 60.5 kV; the formula holds from 0 to 60 kV."]);
});
test("where a result bends or changes without bound within a ±, it is said", () => {
  assert.deepEqual(carried("square", { x: 0.2 }, { x: 0.5 }).says, ["The result bends within the ± of number: its own ± is only roughly right."]);
  const { results, says } = carried("root", { x: 0 }, { x: 1 });
  assert.deepEqual(results, [null]);
  assert.ok(says.some((one) => one.includes("changes without bound")) && says.some((one) => one.startsWith("There is no result everywhere within the ± of number")));
});
for (const [percent, is] of [[0, "0 %"], [0.02, "under 0.1 %"], [7.66, "7.7 %"], [9.97, "10 %"], [66.5, "67 %"], [100, "100 %"]]) test(`${percent} percent is said ${is}`, () => assert.equal(percentWords(percent), is));
