/**
 * The setting at which readings fell by a stated part from their plateau: the knee of emission by heater voltage.
 * Twin of fieldkit/fits/knee_crossing.py, which says what is given and refused.
 * @module
 */

import { answer, nulls } from "./answer.js";
import * as columns from "./columns.js";
import * as robust from "./robust.js";
import * as words from "./words.js";

const { Refused } = columns;

/** @typedef {import("./answer.js").Answer} Answer */
/** @typedef {import("./columns.js").Columns} Columns */

export const PLATEAU = 3;
const HALF_PI = 1.5707963267948966;

/**
 * @param {unknown} settings @param {unknown} readings @param {unknown} fall @param {unknown} [u]
 * @param {unknown} [plateau] @param {unknown} [hold] @param {words.Show} [show]
 */
export function knee_crossing(settings, readings, fall, u = null, plateau = PLATEAU, hold = null, show = words.plain) {
  show = words.guarded(show);
  /** @type {Answer} */
  const numbers = {
    n: columns.count(readings),
    ...nulls("value", "u", "reference", "level", "between", "step", "slope", "fallen", "fall", "plateau", "hold"),
  };
  const part = part_of(fall);
  const count = columns.whole("The number of readings of the plateau", plateau, PLATEAU);
  const held = hold === null || hold === undefined ? null : columns.positive("The holding time", hold, "bad-hold");
  const given = columns.read(["settings", "readings"], settings, readings, u, (count instanceof Refused ? 0 : count) + 1);
  if (part instanceof Refused) return answer("knee-crossing", numbers, part, String);
  if (count instanceof Refused) return answer("knee-crossing", numbers, count, String);
  if (held instanceof Refused) return answer("knee-crossing", numbers, held, String);
  if (given instanceof Refused) return answer("knee-crossing", numbers, given, String);
  Object.assign(numbers, { fall: part, plateau: count, hold: held });
  const order = [...given.x.keys()].sort((i, j) => (given.x[i] > given.x[j] ? -1 : given.x[i] < given.x[j] ? 1 : i - j));
  const top = order.slice(0, count).map((i) => given.y[i]);
  const reference = robust.median(top);
  Object.assign(numbers, { reference, level: (1 - part) * reference });
  let refused = no_plateau(top, reference, part);
  if (refused === null) {
    numbers.fallen = 1 - least(given.y) / reference;
    refused = cross(numbers, given, order, show);
  }
  return answer("knee-crossing", numbers, refused, () => sentence(numbers, show));
}

/** @param {unknown} fall */
function part_of(fall) {
  const part = columns.parameter("The fall looked for", fall);
  if (part instanceof Refused) return new Refused("bad-fall", part.says);
  if (0 < part && part < 1) return part;
  return new Refused("bad-fall", "The fall looked for is a part between 0 and 1: 0.05 for 5 %.");
}

/** @param {number[]} y */
function least(y) {
  let found = y[0];
  for (const value of y) found = value < found ? value : found;
  return found;
}

/** @param {number[]} top @param {number} reference @param {number} part */
function no_plateau(top, reference, part) {
  if (reference <= 0) return new Refused("no-plateau", "The readings at the highest settings are not above zero.");
  const [low, high] = [least(top), -least(top.map((v) => -v))];
  if (high - low > (part / 2) * reference) {
    return new Refused(
      "no-plateau",
      `No plateau: the ${top.length} readings at the highest settings differ by ` +
        `${words.brief((100 * (high - low)) / reference, 2)} %, more than half of the fall looked for. ` +
        "Start from a higher setting, or wait until the reading has settled.",
    );
  }
  return null;
}

/**
 * Puts the first crossing from the plateau down into `numbers`.
 * @param {Answer} numbers @param {Columns} given @param {number[]} order @param {words.Show} show
 */
function cross(numbers, given, order, show) {
  const { level } = numbers;
  const { u } = given;
  const after = order.findIndex((i) => given.y[i] <= level);
  if (after < 0) {
    return new Refused(
      "no-crossing",
      `No knee found: the greatest fall seen is ${words.brief(100 * numbers.fallen, 2)} %, of ` +
        `${percent(numbers.fall)} looked for.`,
    );
  }
  const [i, j] = [order[after - 1], order[after]];
  const [high, low, above, below] = [given.x[i], given.x[j], given.y[i], given.y[j]];
  Object.assign(numbers, { between: [low, high], step: high - low });
  if (high === low) {
    return new Refused(
      "equal-settings",
      `The readings on both sides of the fall were taken at one setting, ${show("x", low, null)}.`,
      [i, j],
    );
  }
  const slope = (above - below) / (high - low);
  const share = (above - level) / (above - below);
  Object.assign(numbers, { slope, value: high + share * (low - high) });
  if (u !== null) {
    const parts = [(1 - share) * u[i], share * u[j], (1 - numbers.fall) * of_reference(numbers, u, order)];
    numbers.u = Math.sqrt(parts[0] * parts[0] + parts[1] * parts[1] + parts[2] * parts[2]) / slope;
  }
  const again = order.slice(after + 1).filter((k) => given.y[k] > level + (u === null ? 0 : words.K * u[k]));
  if (again.length) {
    return new Refused(
      "rises-again",
      `Below ${show("x", low, null)} the reading rises again over the level looked for: there is more than one ` +
        "crossing. Wait at each setting until the reading has settled.",
      again,
    );
  }
  return null;
}

/** The standard uncertainty of the plateau's median: of the worst of its readings. @param {Answer} numbers @param {number[]} u @param {number[]} order */
function of_reference(numbers, u, order) {
  const worst = -least(order.slice(0, numbers.plateau).map((i) => -u[i]));
  return worst * Math.sqrt(HALF_PI / numbers.plateau);
}

/** @param {number} part */
function percent(part) {
  return `${words.brief(100 * part, 3)} %`;
}

/** @param {Answer} numbers @param {words.Show} show */
function sentence(numbers, show) {
  const [low, high] = numbers.between;
  const { hold } = numbers;
  const held =
    hold === null
      ? "How long each setting was held is not told: a fast sweep makes the knee look lower than it is."
      : `Each setting was held ${words.brief(hold)} s; a faster sweep makes the knee look lower than it is.`;
  const known = numbers.u !== null ? "" : " The readings came without an uncertainty, so this has none.";
  return (
    `Down by ${percent(numbers.fall)} at ${show("x", numbers.value, numbers.u)}, on a straight line ` +
    `between ${show("x", high, null)} and ${show("x", low, null)}. The plateau is ` +
    `${show("y", numbers.reference, null)}, the median of ${numbers.plateau} readings at the highest settings.` +
    `${known} ${held}`
  );
}
