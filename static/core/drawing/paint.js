// Paint and text of drawings: colour roles as classes on screen, as attributes in print; hatching as plain lines.
// Twin of fieldkit/drawing/paint.py.

import { half, px } from "./number.js";

/** @type {Record<string, string>} */
export const PRINT = {
  ink: "#0D171C",
  "ink-2": "#2F3C43",
  line: "#6B787F",
  hair: "#B4BEC0",
  out: "#CDD3D3",
  key: "#FFFFFF",
  panel: "#FFFFFF",
  ground: "#FFFFFF",
  hole: "#FFFFFF",
  danger: "#B0101A",
  "on-danger": "#FFFFFF",
  caution: "#FFCF1A",
  "on-caution": "#0D171C",
  current: "#0D171C",
  cross: "#B0101A",
};

/**
 * Attributes for one shape, with a leading space. An empty fill is none; an empty stroke is left out.
 * @param {string} ink @param {string} [fill] @param {string} [stroke] @param {string} [width] @param {string} [dash]
 */
export function paint(ink, fill = "", stroke = "", width = "", dash = "") {
  let out = "";
  const classes = [];
  for (const [kind, letter, role] of [["fill", "f", fill], ["stroke", "s", stroke]]) {
    if (!role) out += kind === "fill" ? ' fill="none"' : "";
    else if (ink === "print") out += ` ${kind}="${PRINT[role]}"`;
    else if (role === "current" || role === "cross") out += ` ${kind}="currentColor"`;
    else classes.push(`${letter}-${role}`);
  }
  if (classes.length) out = ` class="${classes.join(" ")}"${out}`;
  if (width) out += ` stroke-width="${width}"`;
  if (dash) out += ` stroke-dasharray="${dash}"`;
  return out;
}

/** @param {string} ink @param {string} role @param {number} x @param {number} y @param {number} w @param {number} h */
export function rect(ink, role, x, y, w, h) {
  if (w <= 0 || h <= 0) return "";
  return `<rect${paint(ink, role)} x="${px(x)}" y="${px(y)}" width="${px(w)}" height="${px(h)}"/>`;
}

/**
 * @param {string} ink @param {string} d @param {string} [fill] @param {string} [stroke] @param {string} [width]
 * @param {string} [dash]
 */
export function path(ink, d, fill = "", stroke = "", width = "", dash = "") {
  return `<path${paint(ink, fill, stroke, width, dash)} d="${d}"/>`;
}

/**
 * @param {string} ink @param {number} x @param {number} y @param {number} size @param {string} text
 * @param {string} [anchor] @param {string} [weight] @param {string} [role]
 */
export function words(ink, x, y, size, text, anchor = "middle", weight = "", role = "ink") {
  const heavy = weight ? ` font-weight="${weight}"` : "";
  const at = `x="${px(x)}" y="${px(y)}" font-size="${size}" text-anchor="${anchor}"${heavy}`;
  return `<text${paint(ink, role)} ${at}>${escape(text)}</text>`;
}

/**
 * Path data of 45 degree lines clipped to a rectangle, on one grid for the whole drawing so that bands join.
 * @param {number} x0 @param {number} x1 @param {number} y0 @param {number} y1 @param {number} period
 * @param {boolean} [falling]
 */
export function hatch(x0, x1, y0, y1, period, falling = false) {
  let d = "";
  const high = y1 - y0;
  for (let c = half(x0, period) * period; c <= x1 + high; c += period) {
    const left = Math.max(x0, c - high);
    const right = Math.min(x1, c);
    if (left >= right) continue;
    const down = falling ? y1 - (c - left) : y0 + (c - left);
    const up = falling ? y1 - (c - right) : y0 + (c - right);
    d += `M${px(left)} ${px(down)}L${px(right)} ${px(up)}`;
  }
  return d;
}

/** @param {string} text for an attribute or a text node */
export function escape(text) {
  return text.replaceAll("&", "&amp;").replaceAll("<", "&lt;").replaceAll(">", "&gt;").replaceAll('"', "&quot;");
}

/**
 * The whole drawing: named by its sentence, or hidden from readers where the words stand beside it.
 * @param {string} ink @param {string} kind @param {string} w @param {string} h @param {string} says @param {string} body
 */
export function svg(ink, kind, w, h, says, body) {
  const label = says ? `role="img" aria-label="${escape(says)}"` : 'aria-hidden="true"';
  const font = ink === "print" ? ' font-family="Plex Sans"' : "";
  const name = ink === "print" ? "" : ` class="${kind}"`;
  const box = `viewBox="0 0 ${w} ${h}" width="${w}" height="${h}"`;
  return `<svg xmlns="http://www.w3.org/2000/svg"${name} ${box}${font} ${label}>${body}</svg>`;
}
