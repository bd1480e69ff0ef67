/** A past row, read in full; and the correction of what was typed in it. The old value stays, struck through, for ever. */
import { field, h, picks, put } from "../dom.js";
import { keypad } from "../keypad.js";
import { limitScale } from "../scale.js";
import { rowTitle } from "../strip.js";
import { day, limitWords, minus, personName, pretty, time } from "../words.js";
import { overHead, overWork } from "./over_parts.js";

/** What of a row was typed and can be corrected: [field, name, text]. @param {any} row @param {any} body */
function typedFields(row, body) {
  const titleOf = (/** @type {string} */ field) => (row.points ?? []).find((/** @type {any} */ p) => p.field === field)?.title;
  if (row.kind === "read" || row.kind === "remarked") return [["text", row.kind === "read" ? "The reading" : "The remark", row.text ?? body?.text ?? ""]];
  if (row.kind === "proved") return [["before", "Tester before", body?.before], ...(body?.points ?? []).map((/** @type {any} */ p) => [`points.${p.name}`, titleOf(`points.${p.name}`) ?? p.name, p.text]), ["after", "Tester after", body?.after]];
  if (row.kind === "locked") return [["lock", "Number on the lock", body?.lock]];
  return [];
}

/** The body of the event with this number. @param {any} ctx @param {number} seq */
function bodyOf(ctx, seq) {
  const found = (ctx.run.events ?? []).find((/** @type {any} */ e) => (e.head?.seq ?? e.seq) === seq);
  return found?.body ?? null;
}

/** @param {any} ctx @param {{row: any}} args */
export function pastPage(ctx, { row: shown }) {
  const row = ctx.state.log.find((/** @type {any} */ r) => r.seq === shown.seq) ?? shown, body = bodyOf(ctx, row.seq), fields = typedFields(row, body);
  const rows = /** @type {[string, any][]} */ ([["When", `${day(row.wall)} ${time(row.wall)}`], ["By", personName(ctx.state, row.by)], ["Event", String(row.seq)]]);
  if (row.text && row.unit) rows.push(["Reading", h("span", {}, (row.old ?? []).map((/** @type {any} */ o) => [h("s", { class: "num" }, minus(o.text)), " "]), h("span", { class: "num" }, minus(row.text)), ` ${pretty(row.unit)}`)]);
  if (row.verdict) rows.push(["Verdict", row.verdict]);
  if (row.limits) rows.push(["Limits", `${limitWords(row.limits, row.unit ?? "") || "none"}${row.limits.low_name || row.limits.high_name ? ` (${[...new Set([row.limits.low_name, row.limits.high_name].filter(Boolean))].join(", ")})` : ""}`]);
  if (row.instrument) rows.push(["Meter", h("span", {}, h("span", { class: "id" }, row.instrument), row.range ? `, ${pretty(row.range)} range` : "", row.overdue ? ", calibration overdue" : "")]);
  for (const old of row.old ?? []) rows.push(["Corrected", `was ${minus(old.text)}: ${old.reason}`]);
  for (const [name, label, text] of fields) if (name !== "text" || row.kind !== "read") rows.push([label, text ?? ""]);
  if (body?.heard) rows.push(["Heard by", body.heard.map((/** @type {string} */ id) => personName(ctx.state, id)).join(", ")]);
  if (row.reason || body?.reason) rows.push(["Reason", row.reason || body.reason]);
  if (row.note || body?.note) rows.push(["Note", row.note || body.note]);
  const scale = row.limits && row.text && row.unit ? limitScale({ limits: row.limits, found: { u: row.u, margin: row.margin, verdict: row.verdict, words: row.words }, text: String(row.text), unit: row.unit }) : null;
  const may = fields.length && !ctx.run.readonly && (ctx.progress.may ?? ["correct"]).includes("correct");
  const form = h("div", { "data-correction": true });
  const open = h("button", { type: "button", class: "act", "data-correct": true, on: { click: () => { put(form, correction(ctx, row, fields)); open.remove(); /** @type {HTMLElement | null} */ (form.querySelector("input, textarea"))?.focus(); } } }, "Correct it");
  const node = overWork([overHead(ctx, rowTitle(row), row.number ? `Step ${row.number}, read only` : "Read only"), h("dl", { class: "facts" }, rows.map(([k, v]) => h("div", {}, h("dt", {}, k), h("dd", {}, v)))), scale ? h("div", { class: "scalebox" }, scale) : null, body?.sha256 ? pictureOf(ctx, body.sha256) : null],
    [form, may ? h("div", { class: "buttons" }, open) : fields.length ? h("p", { class: "note" }, "It cannot be corrected now.") : null]);
  return { node };
}

/** The picture of a row, from this tablet's own store. @param {any} ctx @param {string} sha */
function pictureOf(ctx, sha) {
  const holder = h("div", { class: "shot" });
  void Promise.resolve(ctx.run.pictureBytes?.(sha)).then((bytes) => {
    if (!bytes) return;
    const reader = new FileReader();
    reader.onload = () => put(holder, h("img", { src: String(reader.result), alt: "Picture of this row" }));
    reader.readAsDataURL(new Blob([bytes], { type: "image/jpeg" }));
  }).catch((/** @type {any} */ problem) => put(holder, h("p", { class: "refused" }, problem.says ?? "This picture cannot be read on this tablet.")));
  return holder;
}

/** @param {any} ctx @param {any} row @param {any[][]} fields */
function correction(ctx, row, fields) {
  const which = fields.length > 1 ? picks({ legend: "What was wrong", options: fields.map(([name, label, text]) => ({ value: name, label, small: text })), chosen: [fields[0][0]] }) : null;
  const text = field({ label: `Right is${row.unit ? `, in ${pretty(row.unit)}` : ""}`, code: true, rows: row.kind === "remarked", attributes: row.kind === "read" || row.kind === "proved" ? { inputmode: "none", "data-right": true } : { "data-right": true } });
  const reason = field({ label: "Why it was wrong", attributes: { "data-reason": true } });
  const go = async () => {
    if (!text.input.value.trim()) { text.wrong("Write what it should have been."); return; }
    if (!reason.input.value.trim()) { reason.wrong("Give the reason in a few words; it stands in the record."); return; }
    const r = await ctx.send({ do: "corrected", seq: row.seq, field: which?.values()[0] ?? fields[0][0], text: text.input.value.trim(), reason: reason.input.value.trim() });
    if (r.refused) { text.wrong(r.refused.says); return; }
    ctx.shut();
  };
  const numeric = row.kind === "read" || row.kind === "proved";
  return h("div", { class: "fields" }, h("h2", { class: "part" }, "Correction. The old value stays visible, and everything after it is judged again."), which?.node, text.node, numeric ? keypad(() => text.input) : null, reason.node,
    h("div", { class: "acts one" }, h("button", { type: "button", class: "act first", "data-record-correction": true, on: { click: () => void go() } }, "Record the correction")));
}
