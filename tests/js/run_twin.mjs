/**
 * The run engine of the tablet, asked by tests: one process, one JSON request a line, one JSON answer a line.
 *
 *   {"sheet": name, "body": sheet}                                  keeps a sheet
 *   {"walk": name, "run", "chain", "sha256", "steps": [...]}        plays a walk; a step is one of
 *       {"text": event text, "whole": bool, "digest": of the state after, brief or whole}
 *       {"now": at, "using": {"instrument", "range"} or nothing, "digest": of progress}
 *       {"command": {...}, "now": at, "digest": of the decision}
 *   {"play": name, "run", "chain", "sha256", "steps": [...]}        the same without digests; gives what every step says
 *   {"fold": name, "texts": [...]}                                  the whole state
 *   {"judge": case of tests/vectors/judge}, {"read": event text}
 *   {"call": "judge.judge", "args": [...]}                          one function of clock, judge, events, worth
 *
 * A walk answers {"ok": n} or the first step that differs with what was got. Digests are SHA-256 of `canonical`.
 */
import { createHash } from "node:crypto";
import { createInterface } from "node:readline";
import * as clock from "../../static/core/clock.js";
import { decide } from "../../static/core/decide.js";
import { evaluate } from "../../static/core/evaluate.js";
import * as events from "../../static/core/events.js";
import * as judge from "../../static/core/judge.js";
import { progress } from "../../static/core/progress.js";
import * as state from "../../static/core/state.js";
import * as worth from "../../static/core/worth.js";

const sheets = new Map();
const MODULES = { clock, judge, events, worth };
const sha256 = (text) => createHash("sha256").update(text).digest("hex");

/** JSON that both languages write alike: keys sorted, whole numbers plain, others as seconds with three decimals. */
function canonical(part) {
  if (Array.isArray(part)) return `[${part.map(canonical).join(",")}]`;
  if (typeof part === "object" && part !== null) {
    const keys = Object.keys(part).sort();
    return `{${keys.map((key) => `${JSON.stringify(key)}:${canonical(part[key])}`).join(",")}}`;
  }
  if (typeof part === "number" && !Number.isInteger(part)) return JSON.stringify(clock.seconds(Math.round(part * 1000)));
  return JSON.stringify(part);
}

/** A state twice over: the fold of frozen copies must leave every earlier state as it was. */
function deep_freeze(part) {
  if (typeof part === "object" && part !== null && !Object.isFrozen(part)) {
    Object.freeze(part);
    Object.values(part).forEach(deep_freeze);
  }
  return part;
}

/** A state without what seldom changes: the start, and all but the last rows of the log. */
function brief(found) {
  const { started, log, ...rest } = found;
  return { ...rest, log: log.slice(-2) };
}

/** The decision on a command, or progress. */
function said(sheet, now, step) {
  return "command" in step ? decide(sheet, now, step.command, step.now) : progress(sheet, now, step.now, step.using ?? null);
}

function walk(request) {
  const sheet = sheets.get(request.walk);
  let run = state.begin(sheet);
  let now = state.make(sheet, request.run, request.chain, request.sha256);
  for (const [i, step] of request.steps.entries()) {
    let got;
    if ("text" in step) {
      run = state.apply(run, events.read(step.text, sha256(step.text)));
      now = deep_freeze(run.state);
      got = step.whole ? now : brief(now);
    } else got = said(sheet, now, step);
    if (step.digest && sha256(canonical(got)) !== step.digest) return { step: i, got };
  }
  return { ok: request.steps.length };
}

/** Plays like a walk, and gives what every step without a text says, and the last state. */
function play(request) {
  const sheet = sheets.get(request.play);
  let run = state.begin(sheet);
  let now = state.make(sheet, request.run, request.chain, request.sha256);
  const all = [];
  for (const step of request.steps) {
    if ("text" in step) {
      run = state.apply(run, events.read(step.text, sha256(step.text)));
      now = deep_freeze(run.state);
    } else all.push(said(sheet, now, step));
  }
  return { said: all, state: now };
}

/** Limits and judgement of one case of tests/vectors/judge. */
function judged({ limits, typical, unit, resolution, instrument, text, protects, day }) {
  const bounds = judge.bounds(limits, typical, unit, resolution, instrument, (tree) => evaluate(tree));
  return { bounds, judged: judge.judge(text, unit.symbol, bounds, resolution, instrument, protects, day) };
}

function answer(request) {
  if ("sheet" in request) return { kept: Boolean(sheets.set(request.sheet, request.body)) };
  if ("walk" in request) return walk(request);
  if ("play" in request) return play(request);
  if ("fold" in request) return state.fold(sheets.get(request.fold), request.texts.map((t) => events.read(t, sha256(t))));
  if ("judge" in request) return judged(request.judge);
  if ("read" in request) return events.read(request.read, sha256(request.read));
  const [module, name] = request.call.split(".");
  const found = MODULES[module][name];
  return { value: typeof found === "function" ? found(...request.args) : found };
}

for await (const line of createInterface({ input: process.stdin })) {
  let reply;
  try {
    reply = answer(JSON.parse(line));
  } catch (problem) {
    reply = { failed: String(problem.stack ?? problem) };
  }
  process.stdout.write(`${JSON.stringify(reply)}\n`);
}
