/**
 * What a reading is taken with: the meter and its range, what else may be chosen, and what is to be known of them before
 * anyone reads. Choosing judges again at once and records nothing. Not here: what is proposed, what a range is worth (core).
 */
import * as readings from "../core/readings.js";
import * as worth from "../core/worth.js";
import { say } from "./announce.js";
import { h, picks, put } from "./dom.js";
import { meterWords } from "./judging.js";
import { verdictMark } from "./icons.js";
import { dated, day, minus, pretty } from "./words.js";

/** @typedef {{kind: "refused" | "overdue" | "not judged", bold: string, rest: string}} Note */

/** What is to be known before anyone reads, the weightiest first. @param {any} progress @returns {Note[]} */
export function beforehand(progress) {
  const { judgeable, instrument, instruments, step } = progress;
  if (!judgeable) return [];
  const says = judgeable.says.map((/** @type {string} */ one) => dated(pretty(one))), notes = /** @type {Note[]} */ ([]);
  if (judgeable.refused) {
    const way = instruments.length > 1 ? "" : " None of this run reads the same: end the run, have another meter entered at the desk, take the kit and begin again.";
    notes.push({ kind: "refused", bold: `No reading of ${instrument?.id} is taken here.`, rest: ` ${says.shift()}${way}` });
  } else if (judgeable.overdue) notes.push(parted("overdue", says.shift() ?? "", ". "));
  const strict = step?.control.protects || step?.control.control === "prove";
  for (const one of says) {
    const unjudged = one.includes(" cannot be judged: ");
    notes.push(parted("not judged", `${one}${unjudged && strict ? " This step guards people: what is not judged counts as failed." : ""}`, ": "));
  }
  return notes;
}

/** @param {Note["kind"]} kind @param {string} says @param {string} at where its bold beginning ends @returns {Note} */
function parted(kind, says, at) {
  const cut = says.indexOf(at) + 1;
  return { kind, bold: says.slice(0, cut), rest: says.slice(cut) };
}

/** @param {Note} note */
function noteNode({ kind, bold, rest }) {
  const words = h("p", {}, h("b", {}, bold), rest);
  if (kind === "not judged") return h("div", { class: "fore unjudged", "data-note": kind }, verdictMark(kind), words);
  return h("div", { class: kind === "refused" ? "fore refused" : "fore warned", "data-note": kind }, words);
}

/** The place for these notes; it is filled anew only where they change. @returns {{node: HTMLElement, update: (progress: any) => void}} */
export function notesPart() {
  const node = h("div", { class: "notes", "data-beforehand": true });
  let drawn = "[]";
  return { node, update: (progress) => {
    const notes = beforehand(progress), key = JSON.stringify(notes);
    if (key !== drawn) put(node, notes.map(noteNode));
    drawn = key;
  } };
}

/** What a range is worth where the step needs it: "±0.03", or why it does not serve. @param {any} told progress on that range @param {any} control */
export function rangeWords(told, control) {
  const limits = [told.limits, ...(told.points ?? []).map((/** @type {any} */ p) => p.limits)].filter(Boolean);
  if (limits.some((one) => one.coarse)) return { serves: false, small: "not judged" };
  const short = limits.map((one) => one.reach).find(Boolean);
  if (short) return { serves: false, small: short.includes(" ends ") ? "too low" : "too high" };
  const at = told.plate ?? limits.flatMap((one) => [one.low, one.high]).filter(Boolean).reduce((a, b) => (a === null || Math.abs(Number(b)) > Math.abs(Number(a)) ? b : a), /** @type {string | null} */ (null));
  const u = at === null ? null : worth.expanded(at, told.instrument, control.unit.symbol);
  return { serves: true, small: u === null ? "" : `±${worth.rounded(u, told.instrument.resolution)}` };
}

/**
 * @param {HTMLElement} line the template's line for the meter @param {any} ctx @param {{asked: any, changed: () => void}} spec
 * @returns {{update: () => void, refused: () => boolean}}
 */
export function meterPart(line, ctx, { asked, changed }) {
  const ranges = h("div", { class: "ranges", "data-ranges": true }), others = h("div", { class: "others", "data-others": true }), list = h("div", { class: "others" }), notes = notesPart();
  const box = h("div", { class: "using" });
  line.replaceWith(box);
  box.append(line, ranges, others, notes.node, list);
  let drawn = "", keys = "", open = false;

  /** @param {{instrument?: string | null, range?: string | null}} using */
  function choose(using) {
    ctx.use(using);
    update();
    const { instrument } = ctx.progress, [note] = beforehand(ctx.progress);
    say(note ? note.bold + note.rest : `${instrument.id}${instrument.range ? `, ${pretty(instrument.range)} range` : ""}`);
    changed();
    ctx.settle();
  }

  /** The ranges as keys; what each is worth is told after the page stands. @param {any} instrument @param {string[]} names */
  function rangeKeys(instrument, names) {
    const { control } = ctx.step;
    const chosen = picks({
      legend: `Range of ${instrument.id}`, quiet: true, chosen: [instrument.range], onchange: () => choose({ instrument: instrument.id, range: chosen.values()[0] }),
      options: names.map((name) => ({ value: name, label: pretty(name) || "only range", small: "\u00a0" })),
    });
    put(ranges, chosen.node);
    ranges.classList.toggle("many", names.length > 4);
    setTimeout(() => {
      for (const label of chosen.node.querySelectorAll("label")) {
        const input = /** @type {HTMLInputElement} */ (label.querySelector("input")), said = rangeWords(ctx.run.progress({ instrument: instrument.id, range: input.value }), control);
        label.classList.toggle("unfit", !said.serves);
        put(/** @type {Element} */ (label.querySelector("small")), minus(said.small) || "\u00a0");
      }
    });
  }

  /** @param {any} progress */
  function otherMeters({ instrument, instruments }) {
    if (instruments.length < 2) { put(others); put(list); return; }
    const one = (/** @type {string} */ id) => h("button", { type: "button", class: "way", "data-meter-id": id, "aria-pressed": String(id === instrument.id),
      on: { click: () => { open = false; choose({ instrument: id }); others.querySelector("button")?.focus({ preventScroll: true }); } } }, h("b", { class: "id" }, id), h("span", {}, calibration(id)));
    const choice = h("div", { class: "picks", role: "group", "aria-label": "Read with" }, instruments.map(one));
    const toggle = h("button", { type: "button", class: "close", "data-another-meter": true, on: { click: () => { open = !open; show(); ctx.settle(); } } }, "Another meter");
    const show = () => { choice.hidden = !open; toggle.setAttribute("aria-expanded", String(open)); };
    show();
    put(others, toggle);
    put(list, choice);
  }

  /** @param {string} id */
  function calibration(id) {
    const due = readings.instrument(ctx.state, id)?.calibrated_to, today = ctx.run.now().wall.slice(0, 10);
    if (!due) return "calibration not known";
    return due < today ? `calibration ran out on ${day(due)}` : `calibrated to ${day(due)}`;
  }

  function update() {
    const { progress } = ctx, { instrument, instruments = [], ranges: names = [], judgeable } = progress, today = ctx.run.now().wall.slice(0, 10);
    const key = JSON.stringify([instrument?.id, instrument?.range, instruments, names, judgeable, today]);
    if (key === drawn) return;
    drawn = key;
    const words = meterWords(instrument, asked, today);
    line.hidden = !words;
    if (words) {
      put(line, `${words.kind} `, h("span", { class: "id" }, words.id), instruments.length && instrument.id !== instruments[0] ? h("b", {}, ` instead of ${instruments[0]}`) : null,
        words.accuracy ? `, ${words.accuracy}` : "", words.calibrated ? h(words.overdue ? "b" : "span", { class: words.overdue ? null : "roomy" }, `, ${words.calibrated}`) : null);
    }
    const now = JSON.stringify([instrument?.id, names]);
    if (names.length < 2) put(ranges);
    else if (now !== keys) rangeKeys(instrument, names);
    for (const input of ranges.querySelectorAll("input")) input.checked = input.value === instrument.range;
    keys = now;
    open ||= Boolean(judgeable?.refused);
    otherMeters({ instrument, instruments });
    notes.update(progress);
  }
  update();
  return { update, refused: () => Boolean(ctx.progress.judgeable?.refused) };
}
