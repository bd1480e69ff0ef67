// Fits what standard input asks for, [{"fit", "args", "show"}], and prints the answers, every number as the bits of its
// double: for tests/fits. A number that JSON does not know comes as {"bits": ...}.
import { readFileSync } from "node:fs";
import { FITS } from "../../../static/core/fits.js";
import { round12 } from "../../../static/core/values.js";

const BITS = new DataView(new ArrayBuffer(8));

function read(x) {
  if (Array.isArray(x)) return x.map(read);
  if (typeof x !== "object" || x === null) return x;
  if ("bits" in x) {
    BITS.setBigUint64(0, BigInt(`0x${x.bits}`));
    return BITS.getFloat64(0);
  }
  return Object.fromEntries(Object.entries(x).map(([key, v]) => [key, read(v)]));
}

function write(x) {
  if (Array.isArray(x)) return x.map(write);
  if (typeof x === "object" && x !== null) return Object.fromEntries(Object.entries(x).map(([key, v]) => [key, write(v)]));
  if (typeof x !== "number") return x;
  BITS.setFloat64(0, x);
  return { bits: BITS.getBigUint64(0).toString(16).padStart(16, "0") };
}

const marked = (axis, value, u) => `<${axis} ${round12(value)}${u === null ? "" : ` ${round12(u)}`}>`;

const { names, asked } = JSON.parse(readFileSync(0, "utf8"));
const answers = asked.map(({ fit, args, show }) => {
  const call = FITS[fit];
  return write(show ? call(...read(args), marked) : call(...read(args)));
});
process.stdout.write(JSON.stringify(names ? Object.keys(FITS) : answers));
