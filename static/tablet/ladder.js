/**
 * The rungs of a ladder so far: one row a level, highest at the top, each with its last reading as a small scale, so that rows
 * compare by place. Shown where a step has a level; the readings are the run's own rows, nothing is worked out here.
 */
import { h } from "./dom.js";
import { smallScale } from "./scale.js";
import { verdictMark } from "./icons.js";
import { minus, pretty } from "./words.js";

/** Readings of the ladder that the step belongs to: [title, [level, row][]]. @param {any} ctx */
function readings(ctx) {
  const columns = /** @type {Map<string, Map<string, any>>} */ (new Map());
  for (const row of ctx.state.log ?? []) {
    if (row.number !== ctx.step.number || row.kind !== "read" || !row.level) continue;
    const column = columns.get(row.title) ?? new Map();
    column.set(row.level, row);
    columns.set(row.title, column);
  }
  return columns;
}

/** The ladder, or null where nothing was read on it. @param {any} ctx */
export function ladder(ctx) {
  if (!ctx.step.level) return null;
  const columns = [...readings(ctx)].filter(([, rows]) => [...rows.values()].some((r) => r.limits)).slice(-2), levels = new Set(columns.flatMap(([, rows]) => [...rows.keys()]));
  if (!levels.size) return null;
  if (ctx.progress.level) levels.add(ctx.progress.level);
  const order = [...levels].sort((a, b) => Number.parseFloat(b) - Number.parseFloat(a));
  const cell = (/** @type {any} */ row) => (row ? [h("span", { class: "num" }, minus(row.text)), smallScale({ limits: row.limits ?? {}, unit: row.unit, text: row.text, found: row }), row.verdict && row.verdict !== "pass" ? [verdictMark(row.verdict), h("span", { class: "seen-by-reader" }, row.verdict)] : null] : "");
  return h("table", { class: "ladder", "data-ladder": true }, h("thead", {}, h("tr", {}, h("th", { scope: "col" }, "Level"), columns.map(([title, rows]) => h("th", { scope: "col" }, `${title}, ${pretty([...rows.values()][0].unit)}`)))),
    h("tbody", {}, order.map((level) => h("tr", { class: level === ctx.progress.level ? "open" : null }, h("th", { scope: "row" }, level), columns.map(([, rows]) => h("td", {}, h("span", { class: "cell" }, cell(rows.get(level)))))))));
}
