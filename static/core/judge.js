/**
 * The judgement of a reading: rounded limits, the meter's uncertainty, the verdict and its sentence.
 * Twin of fieldkit/run/judge.py, which says what it means; held by tests/vectors/judge and runs.
 * @module
 */

import { day as day_of } from "./clock.js";
import { Dec, Fault, Refusal, add, compare, dec, decimals, fixed, inward, magnitude, sub, to_float, to_text, typed } from "./values.js";
import * as values from "./values.js";
import * as worth from "./worth.js";

/** @typedef {{symbol: string, factor: string, offset: string}} Unit */
/** @typedef {Record<string, any>} Bounds */
/** @typedef {Record<string, any>} Instrument */
/** @typedef {(tree: any) => unknown} Value */

export const VERDICTS = Object.freeze(["pass", "conditional pass", "not judged", "conditional fail", "fail"]);

/** Why a reading is not judged that stands at the end of its range, short of a limit. */
export const AT_ITS_END = "the meter stands at the end of this range, and the limit lies beyond it";

/** @type {Record<string, string>} */
const NAMES = { low: "lower", high: "upper" };
const SIDES = Object.freeze(["low", "high"]);

/**
 * The limits in the unit, as decimal texts; null where nothing bounds the reading.
 * @param {any} limits @param {any} typical @param {Unit} unit @param {string | null} resolution
 * @param {Instrument | null} instrument @param {Value} value @returns {Bounds | null}
 */
export function bounds(limits, typical, unit, resolution, instrument, value) {
  if (limits === null && typical === null) return null;
  const given = limits || {};
  /** @type {Bounds} */
  const out = {
    low: null,
    high: null,
    caution_low: null,
    caution_high: null,
    accept_low: null,
    accept_high: null,
    guard_low: null,
    guard_high: null,
    typical_low: null,
    typical_high: null,
    typical_note: typical ? typical.note : "",
    low_name: given.low_name ?? "",
    high_name: given.high_name ?? "",
    resolution,
    guarded: given.guarded ?? false,
    fault: "",
    coarse: "",
    reach: "",
  };
  for (const key of ["low", "high", "caution_low", "caution_high"]) {
    const side = key.endsWith("low") ? "low" : "high";
    const [text, fault] = shown(given[key] ?? null, unit, value);
    if (text !== null) out[key] = inward(text, resolution, side);
    if (key !== side) continue;
    if (fault) out.fault = `the ${NAMES[key]} limit has no value (${fault})`;
    if (text !== null && lost(text, out[key], key)) {
      out.coarse = `${whose(instrument)} steps of ${resolution} ${unit.symbol} are too coarse for this limit`;
    }
  }
  if (typical !== null) {
    out.typical_low = shown(typical.low ?? null, unit, value)[0];
    out.typical_high = shown(typical.high ?? null, unit, value)[0];
  }
  if (out.low !== null && out.high !== null && less(out.high, out.low)) {
    out.coarse = "no reading of this meter lies between the limits";
  }
  out.reach = beyond_range(out, unit, instrument);
  if (out.guarded && !out.fault && !out.coarse) guard(out, unit, instrument);
  return out;
}

/** @param {Instrument | null} meter */
function whose(meter) {
  return meter !== null && "u" in meter ? "its" : "the meter's";
}

/** Why no reading on this range can keep the limits; empty where one can.
 * @param {Bounds} out @param {Unit} unit @param {Instrument | null} meter */
function beyond_range(out, unit, meter) {
  if (meter === null || !meter.range || meter.unit !== unit.symbol) return "";
  const { low, high } = out;
  const tail = ` ${unit.symbol}`.trimEnd();
  if (low !== null && meter.high !== null && less(meter.high, low)) {
    return `this range ends at ${meter.high}${tail}, below the limit of ${low}${tail}`;
  }
  if (high !== null && meter.low !== null && less(high, meter.low)) {
    return `this range begins at ${meter.low}${tail}, above the limit of ${high}${tail}`;
  }
  return "";
}

/** @param {any} tree @param {Unit} unit @param {Value} value @returns {[string | null, string]} */
function shown(tree, unit, value) {
  if (tree === null) return [null, ""];
  const si = value(tree);
  if (si instanceof Fault) return [null, si.says];
  if (typeof si !== "number") return [null, "It is no number."];
  return [values.to_shown(si, unit), ""];
}

/** A plain decimal text in the unit as SI. @param {string} text @param {Unit} unit */
export function to_si(text, unit) {
  return values.to_si(text, unit);
}

/** An SI value in the unit, 12 digits. @param {number} si @param {Unit} unit */
export function to_shown(si, unit) {
  return values.to_shown(si, unit);
}

/** @param {string} a @param {string} b */
function less(a, b) {
  return compare(dec(a), dec(b)) < 0;
}

/** @param {string} text @param {string} rounded @param {string} side */
function lost(text, rounded, side) {
  const zero = dec("0");
  const before = compare(dec(text), zero);
  const after = compare(dec(rounded), zero);
  return side === "high" ? before > 0 && after <= 0 : before < 0 && after >= 0;
}

/** @param {Bounds} out @param {Unit} unit @param {Instrument | null} instrument */
function guard(out, unit, instrument) {
  const zero = dec("0");
  for (const side of SIDES) {
    if (out[side] === null) continue;
    const u = worth.expanded(out[side], instrument, unit.symbol);
    if (u === null) {
      const what = whose(instrument) === "its" ? "its uncertainty" : "the meter's accuracy";
      out.coarse = `${what} is not known, and the limits are guarded`;
      return;
    }
    const limit = dec(out[side]);
    const pulled = side === "low" ? add(limit, dec(u)) : sub(limit, dec(u));
    out[`guard_${side}`] = u;
    out[`accept_${side}`] = inward(to_text(pulled), out.resolution, side);
    const was = compare(limit, zero);
    const now = compare(dec(out[`accept_${side}`]), zero);
    if (side === "high" ? was > 0 && now <= 0 : was < 0 && now >= 0) {
      out.coarse = `${whose(instrument)} uncertainty is as large as the limit`;
    }
  }
  if (out.accept_low !== null && out.accept_high !== null && less(out.accept_high, out.accept_low)) {
    out.coarse = `${whose(instrument)} uncertainty is wider than the limits`;
  }
}

/**
 * The judgement of a reading as typed; `{refused}` where the text is no number.
 * @param {string} text @param {string} unit @param {Bounds | null} limits @param {string | null} resolution
 * @param {Instrument | null} instrument @param {boolean} protects @param {string} [day]
 * @returns {Record<string, any>}
 */
export function judge(text, unit, limits, resolution, instrument, protects, day = "") {
  const number = typed(text);
  if (number instanceof Refusal) return { refused: { code: number.code, says: number.sentence } };
  const plain = to_text(number);
  const [verdict, reason] = verdict_of(number, limits, instrument);
  const [side, margin] = margin_of(number, limits);
  const u = worth.expanded(plain, instrument, unit);
  const bounded = limits || {};
  const inside = verdict === "pass" || verdict === "conditional pass";
  const out = {
    verdict,
    outcome: outcome(verdict, protects, Boolean(bounded.fault) || reason === AT_ITS_END),
    reason,
    margin: margin === null ? null : to_text(margin),
    nearest: side,
    u,
    near: inside && beyond(number, bounded.caution_low ?? null, bounded.caution_high ?? null),
    untypical: beyond(number, bounded.typical_low ?? null, bounded.typical_high ?? null),
    overdue: overdue(instrument, day),
    words: "",
  };
  out.words = words(plain, unit, out, bounded, resolution, instrument);
  return out;
}

/** What the move graph sees of a verdict. @param {string} verdict @param {boolean} protects @param {boolean} [fault] */
export function outcome(verdict, protects, fault = false) {
  if (verdict === "pass") return "pass";
  return (verdict === "conditional pass" || verdict === "not judged") && !protects && !fault ? "pass" : "fail";
}

/** @param {Instrument | null} instrument @param {string} day */
export function overdue(instrument, day) {
  const due = instrument === null ? null : instrument.calibrated_to;
  return Boolean(due) && day_of(day) > due;
}

/** @param {Dec} x @param {Bounds | null} limits @param {Instrument | null} meter @returns {[string, string]} */
function verdict_of(x, limits, meter) {
  if (limits === null || (limits.low === null && limits.high === null && !limits.fault)) return ["not judged", "no limit is set"];
  if (limits.fault) return ["not judged", limits.fault];
  if (limits.coarse) return ["not judged", limits.coarse];
  if (at_its_end(x, limits, meter)) return ["not judged", AT_ITS_END];
  for (const side of SIDES) {
    if (limits[side] === null) continue;
    const limit = dec(limits[side]);
    if (compare(x, limit) * (side === "low" ? 1 : -1) < 0) {
      const over = magnitude(sub(x, limit));
      const width = limits[`guard_${side}`];
      return [width !== null && compare(over, dec(width)) <= 0 ? "conditional fail" : "fail", ""];
    }
  }
  return [limits.guarded && beyond(x, limits.accept_low, limits.accept_high) ? "conditional pass" : "pass", ""];
}

/** The range ends before a limit, and the meter stands there: what it would show beyond, nobody knows.
 * @param {Dec} x @param {Bounds} limits @param {Instrument | null} meter */
function at_its_end(x, limits, meter) {
  if (meter === null || !meter.range) return false;
  return SIDES.some((side) => {
    const sign = side === "low" ? -1 : 1;
    if (limits[side] === null || meter[side] === null) return false;
    const end = dec(meter[side]);
    const short = compare(dec(limits[side]), end) * sign > 0;
    return short && end.digits !== 0n && compare(x, end) * sign >= 0;
  });
}

/** @param {Dec} x @param {string | null} low @param {string | null} high */
function beyond(x, low, high) {
  if (low !== null && compare(x, dec(low)) < 0) return true;
  return high !== null && compare(x, dec(high)) > 0;
}

/** @param {Dec} x @param {Bounds | null} limits @returns {[string | null, Dec | null]} */
function margin_of(x, limits) {
  /** @type {string | null} */
  let side = null;
  /** @type {Dec | null} */
  let least = null;
  for (const name of SIDES) {
    const limit = limits === null ? null : limits[name];
    if (limit === null) continue;
    const far = name === "low" ? sub(x, dec(limit)) : sub(dec(limit), x);
    if (least === null || compare(far, least) < 0) [side, least] = [name, far];
  }
  return [side, least];
}

/** @param {string} plain @param {string} unit @param {any} out @param {Bounds} limits
 * @param {string | null} resolution @param {Instrument | null} instrument */
function words(plain, unit, out, limits, resolution, instrument) {
  const tail = unit ? ` ${unit}` : "";
  const own = instrument !== null && "u" in instrument;
  const u = own ? own_words(out.u, resolution, tail) : meter_words(out.u, resolution || plain, tail);
  const said = u ? `, ${own ? "uncertainty" : "meter"} ${u}` : "";
  const within = own ? `its uncertainty of ${u}` : `the meter's ${u}`;
  let body;
  if (out.verdict === "not judged") body = `not judged, ${out.reason}${said}`;
  else {
    const limit = limits[out.nearest];
    const size = to_text(magnitude(dec(out.margin)));
    const where = out.nearest === "high" ? "above" : "below";
    if (out.verdict === "pass") body = `${inside_words(limits, tail)}, margin ${size}${tail}${said}`;
    else if (out.verdict === "conditional pass") body = `${inside_words(limits, tail)}, but within ${within} of ${limit}${tail}`;
    else if (out.verdict === "conditional fail") body = `${where} ${limit}${tail} by ${size}${tail}, within ${within}`;
    else body = `${where} ${limit}${tail} by ${size}${tail}${said}`;
  }
  return `${plain}${tail}: ${body.replace(/\.$/, "")}.${remarks(out, limits, tail, instrument)}`;
}

/** @param {Bounds} limits @param {string} tail */
function inside_words(limits, tail) {
  if (limits.low === null) return `at most ${limits.high}${tail} is allowed`;
  if (limits.high === null) return `at least ${limits.low}${tail} is needed`;
  return limits.low === limits.high ? `exactly ${limits.low}${tail}` : `inside ${limits.low} to ${limits.high}${tail}`;
}

/** @param {string | null} u @param {string} like @param {string} tail */
function meter_words(u, like, tail) {
  if (u === null) return "";
  const places = decimals(like);
  let text = fixed(to_float(dec(u)), places);
  if (dec(text).digits === 0n && dec(u).digits !== 0n) text = to_text(new Dec(1n, places));
  return `±${text}${tail}`;
}

/** ±U of a result, with two digits at most. @param {string | null} u @param {string | null} resolution @param {string} tail */
function own_words(u, resolution, tail) {
  return u === null ? "" : `±${worth.rounded(u, resolution)}${tail}`;
}

/** @param {any} out @param {Bounds} limits @param {string} tail @param {Instrument | null} instrument */
function remarks(out, limits, tail, instrument) {
  let said = "";
  if (limits.reach) said += ` ${limits.reach[0].toUpperCase()}${limits.reach.slice(1)}.`;
  if (out.near) said += " It lies in the caution band.";
  if (out.untypical) {
    const { typical_low: low, typical_high: high } = limits;
    const span = high === null ? `at least ${low}` : low === null ? `at most ${high}` : `${low} to ${high}`;
    said += ` Usual is ${span}${tail} (${limits.typical_note}).`;
  }
  if (out.overdue && instrument !== null) {
    said += ` The calibration of ${instrument.id} ran out on ${instrument.calibrated_to}.`;
  }
  return said;
}
