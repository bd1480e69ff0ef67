/** Sums without a page: how numbers are shown, what a sum is found by, its units, what was typed, its picture. */
import assert from "node:assert/strict";
import { test } from "node:test";
import * as book from "../../../static/tablet/sums/book.js";
import { Fault } from "../../../static/core/values.js";
import { end, rangeWords, shown, significant, withUnit, written } from "../../../static/tablet/sums/digits.js";
import { says, scaleOf, span, stops, svg, ticks, upright } from "../../../static/tablet/sums/plot.js";
import { faultWords, prepared, read, reckon } from "../../../static/tablet/sums/reckon.js";

// ---- digits

for (const [text, most, is] of [
  ["41.5433021", 6, "41.5433"], ["50.05400000", 6, "50.054"], ["0.5", 6, "0.5"], ["1234567.89", 6, "1234568"], ["12.5", 2, "12"], ["13.5", 2, "14"], ["-0.0000123456789", 3, "-0.0000123"], ["9.9999996", 6, "10"],
]) test(`${text} has ${most} digits as ${is}`, () => assert.equal(significant(text, most), is));

test("rounding agrees with the language's own toPrecision over many numbers", () => {
  let seed = 7;
  const next = () => (seed = (seed * 48271) % 2147483647) / 2147483647;
  for (let k = 0; k < 500; k += 1) {
    const text = (next() * 10 ** Math.floor(next() * 5)).toFixed(11);
    // a tie would round to even here and up there; eleven decimals at random make none
    if (Number(text) >= 0.001) assert.equal(Number(significant(text, 6)), Number(Number(text).toPrecision(6)), text);
  }
});
test("a range is rounded inwards, so that what is shown is allowed", () => {
  assert.equal(significant("264.172052358", 6, "down"), "264.172");
  assert.equal(significant("264.172052358", 6, "up"), "264.173");
  assert.equal(significant("-264.172052358", 6, "down"), "-264.173");
  assert.equal(significant("-264.172052358", 6, "up"), "-264.172");
});
for (const [text, is] of [["0", "0"], ["-0.120", "−0.12"], ["0.0001", "0.0001"], ["0.0000999999", "9.99999 × 10⁻⁵"], ["299792458", "299792458"], ["12345678901.5", "1.23457 × 10¹⁰"], ["-0.00000000999999999", "−1 × 10⁻⁸"]]) {
  test(`${text} is written ${is}`, () => assert.equal(written(text), is));
}
test("a constant of physics is written with its power of ten", () => assert.equal(shown(9.1093837139e-31, UNITS.kg), "9.10938 × 10⁻³¹"));

// ---- a book of a few sums

/** @param {string} factor @param {Record<string, string>} dimension */
const unit = (shown_, factor, dimension, more = {}) => ({ shown: shown_, factor, offset: "0", dimension, absolute: false, ...more });
const UNITS = Object.fromEntries(Object.entries({
  1: unit("", "1", {}), "%": unit("%", "0.01", {}), deg: unit("°", "0.0174532925199432957692369076849", {}), rad: unit("rad", "1", {}), dB: unit("dB", "1", { dB: "1" }), dBm: unit("dBm", "1", { dB: "1" }),
  V: unit("V", "1", { kg: "1", m: "2", s: "-3", A: "-1" }), kV: unit("kV", "1000", { A: "-1", kg: "1", m: "2", s: "-3" }), A: unit("A", "1", { A: "1" }), W: unit("W", "1", { kg: "1", m: "2", s: "-3" }), kW: unit("kW", "1000", { kg: "1", m: "2", s: "-3" }),
  K: unit("K", "1", { K: "1" }), degC: unit("°C", "1", { K: "1" }, { offset: "273.15", absolute: true }), kg: unit("kg", "1", { kg: "1" }),
}).map(([symbol, row]) => [symbol, { symbol, ...row }]));
const measured = (symbol) => ({ symbol, unit: UNITS[symbol].shown, factor: UNITS[symbol].factor, offset: UNITS[symbol].offset, any: "" });
const argument = (name, symbol, meaning, low, high, more = {}) => ({ name, meaning, ...measured(symbol), low, high, whole: false, ...more });
const any = { symbol: "", unit: "", factor: "1", offset: "0" };
const product = { call: "mul", of: [{ name: "voltage" }, { name: "current" }] };
const formula = (subject, meaning, args, symbol, tree, more = {}) => ({ subject, meaning, arguments: args, ...measured(symbol), tree, written: "", uses: [], reference: "", decides: "", cautions: [], plot: null, example: null, ...more });
const BOOK = {
  subjects: [{ name: "beam", formulas: ["beam_power"] }, { name: "rf power", formulas: ["both", "low", "high"] }, { name: "channels", formulas: ["twice"] }],
  formulas: {
    beam_power: formula("beam", "Power that the beam takes from its supply.", [argument("voltage", "kV", "Beam voltage.", "0", "60000"), argument("current", "A", "beam current", "0", null)], "kW", product, { plot: { along: "current" }, example: { with: { voltage: "34 kV", current: "2.2e0 A" }, gives: "74.8 kW" } }),
    low: formula("rf power", "the least", [argument("level", "dB", "level", null, null)], "dB", { name: "level" }),
    high: formula("rf power", "the greatest", [argument("level", "dB", "level", null, null)], "dB", { call: "add", of: [{ name: "level" }, { number: "1" }] }),
    twice: formula("channels", "twice a channel", [argument("channel", "1", "channel", "14", "36", { whole: true })], "1", { call: "mul", of: [{ number: "2" }, { name: "channel" }] }),
  },
  pairs: { both: { subject: "rf power", meaning: "Both of them.", of: ["low", "high"], reference: "", decides: "", cautions: [] } },
  units: UNITS,
};
const POWER = book.sumOf(BOOK, "beam_power"), own = (sum) => Object.fromEntries(sum.arguments.map((a) => [a.name, UNITS[a.symbol]]));

for (const [name, title] of [["coolant_heat_water", "Coolant heat water"], ["watts_from_dbm", "Watts from dBm"], ["dbm_from_watts", "dBm from watts"], ["vswr", "VSWR"], ["rf exposure", "RF exposure"], ["loaded_q", "Loaded Q"]]) {
  test(`${name} is called ${title}`, () => assert.equal(book.titleOf(name), title));
}
for (const [asked, names] of [["", ["beam_power", "both", "low", "high", "twice"]], ["BEAM", ["beam_power"]], ["beam_power", ["beam_power"]], ["takes supply", ["beam_power"]], ["rf", ["both", "low", "high"]], ["kw", ["beam_power"]], ["greatest", ["high"]], ["moon", []]]) {
  test(`${JSON.stringify(asked)} finds ${names.length} sums`, () => assert.deepEqual(book.found(BOOK, asked).flatMap((s) => s.formulas), names));
}
test("a pair gives the two results of its formulas, under its own words", () => {
  const pair = book.sumOf(BOOK, "both");
  assert.deepEqual([pair.meaning, pair.results.map((r) => r.name)], ["Both of them.", ["low", "high"]]);
  assert.deepEqual(reckon(pair, prepared(pair, BOOK.formulas), { level: "26" }, own(pair)).results, [26, 27]);
});
test("a name that the kit does not hold is no sum, nor is one of the language's own", () => {
  assert.equal(book.sumOf(BOOK, "gone"), null);
  assert.equal(book.sumOf(BOOK, "toString"), null);
});

const symbols = (units) => units.map((u) => u.symbol);
test("units are those of one dimension, the formula's own first, however its powers are ordered", () => assert.deepEqual(symbols(book.sameKind(BOOK, "kV")), ["kV", "V"]));
for (const [symbol, is] of [["%", ["%", "1"]], ["1", ["1"]], ["deg", ["deg", "rad"]], ["dB", ["dB"]], ["dBm", ["dBm"]], ["degC", ["degC", "K"]], ["K", ["K"]]]) {
  test(`a value in ${symbol} is asked in ${is.join(" or ")}`, () => assert.deepEqual(symbols(book.sameKind(BOOK, symbol)), is));
}
test("a channel is asked in no unit", () => assert.deepEqual(symbols(book.unitsFor(BOOK, BOOK.formulas.twice.arguments[0], "")), ["1"]));
test("a value that takes any unit may have each; its difference is in kelvins where it is in degrees", () => {
  assert.equal(book.unitsFor(BOOK, { ...any, any: "any" }, "V").length, Object.keys(UNITS).length);
  assert.deepEqual(symbols(book.unitsFor(BOOK, { ...any, any: "difference" }, "degC")), ["K"]);
  assert.deepEqual(symbols(book.unitsFor(BOOK, { ...any, any: "difference" }, "kV")), ["kV"]);
  assert.deepEqual(symbols(book.resultUnits(BOOK, { ...any, any: "any" }, "kV")), ["kV", "V"]);
});
for (const [text, is] of [["60 kV", ["60", "kV"]], ["0.5", ["0.5", "1"]], ["35 degC", ["35", "degC"]], ["35 °C", ["35", "degC"]], ["1.2e-3 A", ["0.0012", "A"]], ["2e3 V", ["2000", "V"]], ["-3.00 dBm", ["-3.00", "dBm"]]]) {
  test(`the example ${text} is filled in as ${is[0]}`, () => assert.deepEqual(Object.values(book.quantity(BOOK, text)), is));
}

// ---- what was typed

const VOLTAGE = POWER.arguments[0];
for (const [text, state] of [["", "empty"], ["34", "good"], ["34,5", "good"], ["34.", "unfinished"], ["-", "unfinished"], ["1 000", "wrong"], ["1e3", "wrong"], ["61", "wrong"], ["-1", "wrong"], ["60", "good"], ["abc", "wrong"]]) {
  test(`${JSON.stringify(text)} is ${state}`, () => assert.equal(read(VOLTAGE, text, UNITS.kV).state, state));
}
test("a refusal names the argument and the range, in the unit that was chosen", () => {
  assert.equal(read(VOLTAGE, "61", UNITS.kV).says, "Beam voltage is 61 kV; the formula holds for 0 to 60 kV.");
  assert.equal(read(VOLTAGE, "61000", UNITS.V).says, "Beam voltage is 61000 V; the formula holds for 0 to 60000 V.");
  assert.equal(rangeWords(POWER.arguments[1], UNITS.A), "at least 0 A");
});
test("a whole number is asked for", () => {
  const [channel] = BOOK.formulas.twice.arguments;
  assert.equal(read(channel, "14.5", UNITS["1"]).says, "Channel is 14.5; only whole numbers.");
  assert.equal(rangeWords(channel, UNITS["1"]), "14 to 36, whole numbers");
});
test("results come when all is typed; until then the words name what is missing", () => {
  const ready = prepared(POWER, BOOK.formulas), asked = (texts, units = own(POWER)) => reckon(POWER, ready, texts, units);
  assert.equal(asked({}).says, "Still to type: beam voltage and beam current.");
  assert.equal(asked({ voltage: "34." , current: "2" }).says, "Still to type: beam voltage.");
  assert.deepEqual(asked({ voltage: "34", current: "2.2" }).results, [34000 * 2.2]);
  assert.deepEqual(asked({ voltage: "34000", current: "2.2" }, { voltage: UNITS.V, current: UNITS.A }).results, [34000 * 2.2]);
  assert.match(asked({ voltage: "x", current: "2" }).says, /^Beam voltage: this is no number/);
});
test("a fault is said without the name of the sum that one sees, and with that of another", () => {
  assert.equal(faultWords(new Fault("out-of-range", "vswr: the reflected power must be below the forward power."), "vswr"), "The reflected power must be below the forward power.");
  assert.equal(faultWords(new Fault("out-of-range", "water_density: temperature is 101 °C."), "vswr"), "Water density: temperature is 101 °C.");
});

// ---- the picture

test("a picture runs from the low end or 0 to twice the value, within the range", () => {
  const ends = (at, low, high) => { const s = span(at, low, high); return [s.from, s.to, s.cutLow, s.cutHigh]; };
  assert.deepEqual(ends(60, 0, 1000), [0, 120, false, false]);
  assert.deepEqual(ends(60, 0, 100), [0, 100, false, true]);
  assert.deepEqual(ends(60, 20, null), [20, 120, true, false]);
  assert.deepEqual(ends(-100, -1000, 500), [-200, 0, false, false]);
  assert.deepEqual(ends(0, 0, 50), [0, 50, false, true]);
  assert.deepEqual(ends(0, null, null), [0, 1, false, false]);
});
test("it is asked evenly, and at the value itself", () => {
  const at = stops({ from: 0, to: 120 }, 33.3);
  assert.ok(at.includes(33.3) && at[0] === 0 && at.at(-1) === 120 && at.length === 122);
});
for (const [from, to, most, step] of [[0, 120, 6, 20], [0, 1, 5, 0.2], [-200, 0, 4, 50], [0, 0.07, 6, 0.02]]) {
  test(`from ${from} to ${to} the steps are ${step}`, () => assert.ok(Math.abs(ticks(from, to, most).step - step) < 1e-12));
}
test("figures of an axis stay short by a power of ten", () => assert.deepEqual([40, 35000, 2.5e6, 3e-6, 0].map(scaleOf), [0, 0, 6, -6, 0]));
test("what falls by more than two hundred is drawn in steps of ten, three below the value at most", () => {
  const falls = upright([35000, 50, 0.07], 50), even = upright([80, 40, 1], 40), zero = upright([80, 40, 0], 40);
  assert.deepEqual([falls.byTens, even.byTens, zero.byTens], [true, false, false]);
  assert.deepEqual(falls.marks.map((m) => m.text), ["0.1", "1", "10", "100", "1000", "10000"]);
  assert.equal(upright([35000, 50, 1e-20], 50).part(0.04), null);
});
const PICTURE = { width: 560, along: { title: "flow", unit: "L/min", at: 60, shown: "60", from: 0, to: 120, cutLow: false, cutHigh: false }, result: { unit: "kW" }, lines: [{ title: "Heat", points: [[0, 0], [60, 41.5], [90, null], [120, 83]], at: 41.5, shown: "41.5" }] };
test("the picture is said in a sentence, which is its name", () => {
  assert.equal(says(PICTURE), "Along flow, from 0 to 120\u00a0L/min: Heat rises from 0 to 83\u00a0kW; at 60\u00a0L/min it is 41.5\u00a0kW.");
  assert.ok(svg(PICTURE).includes(`aria-label="${says(PICTURE)}"`));
});
test("the line is broken where the formula gives nothing, and a script in a name stays text", () => {
  assert.match(svg(PICTURE), /d="M[\d.]+ [\d.]+L[\d.]+ [\d.]+M[\d.]+ [\d.]+"/);
  assert.ok(!svg({ ...PICTURE, along: { ...PICTURE.along, title: "<script>" } }).includes("<script>"));
});
test("no line, no picture", () => assert.equal(svg({ ...PICTURE, lines: [{ ...PICTURE.lines[0], points: [[0, null]] }] }), ""));
test("units stand after their figure, a degree without a space", () => assert.deepEqual([withUnit("5", UNITS.kV), withUnit("5", UNITS.deg), withUnit("5", UNITS["1"])], ["5 kV", "5°", "5"]));
test("the end of a range is null where there is none", () => assert.deepEqual([end(null, UNITS.V, "low"), end("373.15", UNITS.degC, "high")], [null, "100"]));
