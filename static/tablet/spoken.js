/** A typed number in words, so that a point in the wrong place is heard: "six point three zero". English only, and no judgement. */

const SMALL = ["zero", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve", "thirteen",
  "fourteen", "fifteen", "sixteen", "seventeen", "eighteen", "nineteen"];
const TENS = ["", "", "twenty", "thirty", "forty", "fifty", "sixty", "seventy", "eighty", "ninety"];

/** @param {number} n below a thousand @returns {string} */
function hundreds(n) {
  if (n < 20) return SMALL[n];
  if (n < 100) return TENS[Math.floor(n / 10)] + (n % 10 ? `-${SMALL[n % 10]}` : "");
  return `${SMALL[Math.floor(n / 100)]} hundred${n % 100 ? ` and ${hundreds(n % 100)}` : ""}`;
}

/** @param {string} digits @returns {string} */
function whole(digits) {
  if (digits.length > 1 && digits.startsWith("0") || digits.length > 6) return [...digits].map((d) => SMALL[Number(d)]).join(" ");
  const n = Number(digits);
  if (n < 1000) return hundreds(n);
  const rest = n % 1000;
  return `${hundreds(Math.floor(n / 1000))} thousand${rest ? `${rest < 100 ? " and" : ""} ${hundreds(rest)}` : ""}`;
}

/** The words for what was typed; empty for what is no plain number. @param {string} text @returns {string} */
export function spoken(text) {
  const found = /^([-−+]?)(\d*)(?:[.,](\d*))?$/.exec(text.trim());
  if (!found || !(found[2] || found[3])) return "";
  const after = found[3] ? ` point ${[...found[3]].map((d) => SMALL[Number(d)]).join(" ")}` : "";
  return `${found[1] && found[1] !== "+" ? "minus " : ""}${whole(found[2] || "0")}${after}`;
}
