// Marks: a verdict as a small scale, and the symbols of the run. Twin of fieldkit/drawing/marks.py.

import { paint, svg } from "./paint.js";

export const VERDICTS = ["pass", "conditional pass", "conditional fail", "fail", "not judged"];
const POSTS = "M14 3V31M70 3V31";
/** @type {Record<string, [number, number]>} */
export const SYMBOLS = {
  lock: [17, 21],
  proved: [17, 21],
  "lock-planned": [17, 21],
  "proved-planned": [17, 21],
  earth: [17, 21],
  "earth-planned": [17, 21],
  unknown: [17, 21],
  "make-safe": [44, 48],
  alert: [64, 58],
  backspace: [40, 30],
  camera: [30, 30],
  pen: [30, 30],
  hold: [30, 30],
  trip: [30, 30],
};
const SHACKLE = "M4.5 10V6.6a4 4 0 0 1 8 0V10";
const TICK = "M5 14.4l2.6 2.6 4.6-5";

/** @param {string} verdict @param {string} [ink] @param {string} [says] @returns {string} 84 by 34 */
export function mark(verdict, ink = "screen", says = "") {
  /** @param {string} d @param {string} width @param {string} [role] */
  const line = (d, width, role = "current") => `<path${paint(ink, "", role, width)} d="${d}"/>`;
  /** @param {number} cx */
  const dot = (cx) => line(POSTS, "5") + line("M14 17H70", "2") + `<circle${paint(ink, "current")} cx="${cx}" cy="17" r="8.5"/>`;
  let body = `<path${paint(ink, "", "current", "2.5", "7 5")} d="M14 5H70V29H14Z"/>`;
  if (verdict === "pass") body = dot(42);
  else if (verdict === "conditional pass") body = dot(59);
  else if (verdict === "conditional fail") {
    const ring = `<circle${paint(ink, "", "current", "3.5")} cx="72" cy="17" r="7"/>`;
    body = line("M14 3V31M61 3V31", "5") + line("M14 17H61", "2") + ring;
  } else if (verdict === "fail") {
    body = line("M8 3V31M48 3V31", "5") + line("M8 17H48", "2") + line("M65 9L79 25M79 9L65 25", "5", "cross");
  }
  return svg(ink, "mark", "84", "34", says, body);
}

/** @param {string} name @param {string} [ink] @param {string} [says] @returns {string} */
export function symbol(name, ink = "screen", says = "") {
  const [w, h] = SYMBOLS[name];
  return svg(ink, "symbol", String(w), String(h), says, figure(name, ink));
}

/** @param {string} name @param {string} ink @returns {string} the shapes, without the svg around them */
export function figure(name, ink) {
  /** @param {string} d @param {string} width @param {string} [dash] */
  const line = (d, width, dash = "") => `<path${paint(ink, "", "current", width, dash)} d="${d}"/>`;
  /** @param {string} d @param {string} [role] */
  const solid = (d, role = "current") => `<path${paint(ink, role)} d="${d}"/>`;
  const ground = solid("M0 0H17V21H0Z", "hole");
  switch (name) {
    case "lock":
      return ground + line(SHACKLE, "2.2") + `<path${paint(ink, "hole", "current", "2.2")} d="M2.1 9.6H14.9V19.2H2.1Z"/>`;
    case "proved":
      return ground + line(SHACKLE, "2.2") + solid("M1 8.6H16V20.2H1Z") + `<path${paint(ink, "", "hole", "2")} d="${TICK}"/>`;
    case "lock-planned":
      return ground + line(SHACKLE, "1.5") + line("M2.1 9.6H14.9V19.2H2.1Z", "1.5");
    case "proved-planned":
      return ground + line(SHACKLE, "1.5") + line("M1.6 9.2H15.4V19.8H1.6Z", "1.5") + line(TICK, "1.5");
    case "earth":
      return ground + line("M8.5 1V10", "2.2") + line("M1 10H16M3.8 14.5H13.2M6.4 19H10.6", "2.6");
    case "earth-planned":
      return ground + line("M8.5 1V10", "1.5") + line("M1 10H16M3.8 14.5H13.2M6.4 19H10.6", "1.5");
    case "unknown":
      return ground + line("M4.2 7.2a4.4 4.4 0 1 1 6.6 3.8c-1.6 1-2.3 1.8-2.3 3.6", "2.4") + solid("M7.1 17H9.9V19.8H7.1Z");
    case "make-safe": {
      const bars = solid("M9 0H13.5V25H9zM23 0H27.5V25H23zM37 0H41.5V25H37z");
      return line("M5 24H13M19 24H27M33 24H41", "2.5") + bars + line("M6 24V48M20 24V48M34 24V48", "2.5", "5 4");
    }
    case "alert": {
      const stroke = solid("M29 20h6l-1.3 19h-3.4z", "hole") + `<circle${paint(ink, "hole")} cx="32" cy="46.5" r="3.6"/>`;
      return solid("M32 2L62.5 56H1.5Z") + stroke;
    }
    case "backspace":
      return line("M13 3H37V27H13L2 15Z", "2.5") + line("M19 10L29 20M29 10L19 20", "2.5");
    case "camera": {
      const lens = `<circle${paint(ink, "", "current", "2.2")} cx="15" cy="16.5" r="5.5"/>`;
      return line("M2 8h7l2.5-4h7L21 8h7v18H2z", "2.2") + lens;
    }
    case "pen":
      return line("M4 26l1.5-6.5L21 4l5 5L10.5 24.5z M17.5 7.5l5 5", "2.2");
    case "hold": {
      const heads = `<circle${paint(ink, "current")} cx="10" cy="8" r="4"/><circle${paint(ink, "", "current", "2.2")} cx="21" cy="8" r="4"/>`;
      return heads + line("M3 26v-6a7 7 0 0 1 14 0v6M21 15a6 6 0 0 1 6 6v5", "2.2");
    }
    default:
      return line("M15 3V14M6.5 7.5a11 11 0 1 0 17 0", "2.5");
  }
}
