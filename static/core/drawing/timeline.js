// Energy over a run: lanes with time to scale, and numbered balloons. Twin of fieldkit/drawing/timeline.py.

import { half, px, ratio, wide } from "./number.js";
import { escape, paint, path, rect, svg, words } from "./paint.js";
import { LIVE } from "./rails.js";
import * as says from "./says.js";

/**
 * @typedef {{at: number, state: string, warming?: boolean, decay?: boolean}} Span
 * @typedef {{at: number, lane: number, n: number}} Ball
 * @typedef {object} Model
 * @property {number} from @property {number} to @property {{short: string, title: string, spans: Span[]}[]} lanes
 * @property {Ball[]} [balls] @property {number} [width] @property {number} [height] @property {number} [lane]
 * @property {string} [ink]
 */

const [LEFT, FONT] = [480, 14];
const STEPS = [60, 300, 600, 900, 1800, 3600, 7200, 10800, 21600, 43200, 86400];

/** @param {Model} model @returns {string} */
export function timeline(model) {
  const ink = model.ink ?? "screen";
  const { lanes } = model;
  const width = Math.trunc(model.width || 218) * 10;
  const height = Math.trunc(model.height || 534) * 10;
  const lane = model.lane ? Math.trunc(model.lane) * 10 : Math.min(190, half(width - LEFT - 450, Math.max(1, lanes.length)));
  const top = Math.max(...lanes.map((one) => wide(one.short, FONT)), 200) + 140;
  const start = model.from;
  const end = Math.max(model.to, model.from + 60);
  /** @param {number} at */
  const y = (at) => top + Number(ratio(BigInt((Math.max(start, Math.min(end, at)) - start) * (height - top - 80)), BigInt(end - start)));
  const right = LEFT + lane * lanes.length;
  let body = grid(ink, start, end, right, y);
  lanes.forEach((one, k) => {
    const x = LEFT + lane * k + half(lane) + 20;
    const turn = `transform="translate(${px(x + 45)} ${px(top - 70)}) rotate(-90)"`;
    body += `<text${paint(ink, "ink")} ${turn} font-size="${FONT}">${escape(one.short)}</text>`;
    body += draw(ink, x, one.spans, end, y);
  });
  body += balloons(ink, model.balls || [], lane, right, height, y);
  return svg(ink, "timeline", px(width), px(height), says.timeline(model), body);
}

/** @param {string} ink @param {number} start @param {number} end @param {number} right @param {(at: number) => number} y */
function grid(ink, start, end, right, y) {
  const high = y(end) - y(start);
  const last = STEPS[STEPS.length - 1];
  const step = STEPS.find((s) => high * s >= 260 * (end - start)) ?? last;
  const named = STEPS.find((s) => s % step === 0 && high * s >= 480 * (end - start)) ?? last;
  let out = "";
  for (let t = Math.ceil(start / step) * step; t <= end; t += step) {
    const full = t % named === 0;
    out += path(ink, `M${px(LEFT - (full ? 60 : 30))} ${px(y(t))}H${px(right + 60)}`, "", "hair", full ? "1" : "0.6");
    if (full) out += words(ink, LEFT - 90, y(t) + 49, FONT, says.hour(t), "end", "", "ink-2");
  }
  return out;
}

/** @param {string} ink @param {number} x @param {Span[]} spans @param {number} end @param {(at: number) => number} y */
function draw(ink, x, spans, end, y) {
  const on = x + 30;
  const off = x - 40;
  let [out, marks] = ["", ""];
  spans.forEach((span, k) => {
    if (span.at >= end) return;
    const next = spans[k + 1];
    const y0 = y(span.at);
    const y1 = y(next ? next.at : end);
    const before = k ? spans[k - 1].state : span.state;
    out += stretch(ink, on, off, y0, y1, span);
    if (LIVE.includes(span.state) !== LIVE.includes(before)) {
      out += path(ink, `M${px(off - 7)} ${px(y0)}H${px(on + 25)}`, "", "ink", "1.6");
    }
    const covered = next && ["proved", "earthed"].includes(next.state) && y1 - y0 < 160;
    if (["locked", "proved", "earthed", "unknown"].includes(span.state) && !covered && (before !== span.state || !k)) {
      // at the very start the mark stands below the lane's head, not on it
      marks += drawn(ink, off, k ? y0 : y0 + 90, span.state);
    }
  });
  return out + marks;
}

/** @param {string} ink @param {number} on @param {number} off @param {number} y0 @param {number} y1 @param {Span} span */
function stretch(ink, on, off, y0, y1, span) {
  if (y1 <= y0) return "";
  if (span.warming) return path(ink, `M${px(on - 25)} ${px(y0)}h1.2L${px(on + 25)} ${px(y1)}h-5z`, "ink");
  if (span.decay) return path(ink, `M${px(off - 25)} ${px(y0)}h5L${px(off + 7)} ${px(y1)}h-1.4z`, "ink");
  if (span.state === "standby") return rect(ink, "ink", on - 25, y0, 25, y1 - y0);
  if (LIVE.includes(span.state)) {
    const teeth = span.state === "cut-off" ? path(ink, `M${px(on - 40)} ${px(y0)}V${px(y1)}`, "", "ink", "3", "1.5 6") : "";
    return teeth + rect(ink, "ink", on - 25, y0, 50, y1 - y0);
  }
  if (span.state === "off") return path(ink, `M${px(off)} ${px(y0)}V${px(y1)}`, "", "ink-2", "1.4");
  if (span.state === "unknown") {
    return path(ink, `M${px(off)} ${px(y0)}V${px(y1)}M${px(on)} ${px(y0)}V${px(y1)}`, "", "ink-2", "1.4", "1.5 4");
  }
  return path(ink, `M${px(off)} ${px(y0)}V${px(y1)}`, "", "ink", "2", "3.5 3.5");
}

/** @param {string} ink @param {number} off @param {number} y @param {string} state */
function drawn(ink, off, y, state) {
  const shift = `<g transform="translate(${px(off - 55)} ${px(y - 70)})"><path${paint(ink, "ground")} d="M-1 -1H12V14H-1Z"/>`;
  if (state === "earthed") {
    return `${shift}${path(ink, "M5.5 0V6.5M0.5 6.5H10.5M2.5 9.7H8.5M4.3 12.9H6.7", "", "ink", "1.6")}</g>`;
  }
  if (state === "unknown") return `${shift}${words(ink, 55, 120, 13, "?", "middle", "600")}</g>`;
  const body = path(ink, "M2.8 6V4.2a2.7 2.7 0 0 1 5.4 0V6", "", "ink", "1.5");
  return `${shift}${body}${path(ink, "M1 6H10V13H1Z", state === "proved" ? "ink" : "panel", "ink", "1.5")}</g>`;
}

/**
 * @param {string} ink @param {Ball[]} balls @param {number} lane @param {number} right @param {number} height
 * @param {(at: number) => number} y
 */
function balloons(ink, balls, lane, right, height, y) {
  const order = [...balls].sort((a, b) => a.at - b.at || a.n - b.n);
  /** @type {number[]} */
  const places = [];
  for (const one of order) places.push(Math.max(y(one.at), places.length ? places[places.length - 1] + 260 : 0));
  let floor = height - 120;
  for (let k = places.length - 1; k >= 0; k--) {
    places[k] = Math.min(places[k], floor);
    floor = places[k] - 260;
  }
  const bx = right + 280;
  return order.map((one, k) => {
    const x = LEFT + lane * one.lane + half(lane) + 50;
    const here = y(one.at);
    return path(ink, `M${px(x + 30)} ${px(here)}H${px(right + 20)}L${px(bx - 110)} ${px(places[k])}`, "", "ink", "1.1")
      + `<circle${paint(ink, "panel", "ink", "1.5")} cx="${px(x + 10)}" cy="${px(here)}" r="3.2"/>`
      + `<circle${paint(ink, "panel", "ink", "1.7")} cx="${px(bx)}" cy="${px(places[k])}" r="11.5"/>`
      + words(ink, bx, places[k] + 48, 13, String(one.n), "middle", "600");
  }).join("");
}
