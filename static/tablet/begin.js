// @ts-check
/**
 * Beginning a run: the first event's body, gathered from the kit's registers, from runs still on this tablet, and from
 * the tablet's health. Whether the run may begin is decided in core/decide.js; here only what cannot be gathered is refused.
 */

import { text } from "./bytes.js";
import { all, get } from "./db.js";
import * as health from "./health.js";
import { Refused } from "./refusal.js";

/** @typedef {import("./db.js").Store} Store */
/** @typedef {import("./sentinel.js").RunRow} RunRow */

/** phases in which a run on this tablet is over */
export const OVER = ["ended", "voided"];

/** @param {string} what @param {string} name @param {any} found */
function known(what, name, found) {
  if (!found) throw new Refused("not-in-register", `${what} ${name} is not in the registers of this kit. Fetch the kit again, or ask at the desk.`);
  return found;
}

/**
 * The givens of a sheet as the registers have them.
 * @param {any} sheet @param {any} site @param {any} cabinet @param {any} tube
 */
function givens(sheet, site, cabinet, tube) {
  const from = { site: site.givens ?? {}, cabinet: cabinet.givens ?? {}, tube: tube.givens ?? {} };
  const missing = [];
  /** @type {Record<string, any>} */
  const out = {};
  for (const given of sheet.givens) {
    const value = from[/** @type {"site"|"cabinet"|"tube"} */ (given.origin)][given.name];
    if (value) out[given.name] = { texts: value.texts, unit: value.unit ?? "", source: value.source };
    else missing.push(`${given.name.replaceAll("_", " ")} (${given.origin})`);
  }
  if (missing.length) throw new Refused("given-missing", `The registers do not have: ${missing.join(", ")}. Have them entered at the desk, then fetch the kit.`);
  return out;
}

/**
 * Every meter that the sheet's controls name, as role or as instrument.
 * @param {any} sheet
 */
function metersOf(sheet) {
  const roles = new Set();
  const names = new Set();
  for (const { control } of sheet.steps) {
    for (const meter of [control.meter, control.tester]) {
      if (meter?.role) roles.add(meter.role);
      if (meter?.instrument) names.add(meter.instrument);
    }
  }
  return { roles: [...roles], names: [...names] };
}

/**
 * Hand instruments that read the same as one that the sheet names: taken along, should that one be overdue.
 * @param {string[]} names @param {any} registers
 */
function spare(names, registers) {
  const built_in = Object.values(registers.cabinets).flatMap((/** @type {any} */ one) => Object.values(one.meters));
  const reads = names.filter((id) => !built_in.includes(id)).map((id) => registers.instruments[id]?.reads);
  return Object.keys(registers.instruments).filter((id) => !built_in.includes(id) && reads.includes(registers.instruments[id].reads));
}

/** @param {any} sheet @param {any} cabinet @param {any} registers */
function instruments(sheet, cabinet, registers) {
  const { roles, names } = metersOf(sheet);
  const missing = roles.filter((role) => !cabinet.meters[role]);
  const ids = new Set([...roles.map((role) => cabinet.meters[role]).filter(Boolean), ...names]);
  const lacking = [...missing, ...[...ids].filter((id) => !registers.instruments[id])];
  if (lacking.length) throw new Refused("meter-missing", `The registers have no instrument for: ${lacking.join(", ")}. Have it entered at the desk, then fetch the kit.`);
  for (const id of spare(names, registers)) ids.add(id);
  return [...ids].sort().map((id) => ({ ...registers.instruments[id], id }));
}

/**
 * What the last event of a run on this tablet says, if that run is over.
 * @param {Store} store @param {RunRow} row
 */
async function endOf(store, row) {
  for (let seq = row.seq; seq > 0; seq -= 1) {
    const kept = await get(store, "events", [row.run, row.chain, seq]);
    if (!kept) return null;
    const event = JSON.parse(text(kept.bytes));
    if (event.kind === "ended") return event;
  }
  return null;
}

/**
 * The lock board and the earlier runs: the kit's, made newer by what ended on this tablet after the kit was made.
 * @param {Store} store @param {any} kit as kit.view gives it @param {string} cabinet @param {string} tube
 */
async function boardAndEarlier(store, kit, cabinet, tube) {
  let { locks = [], earths = [] } = kit.registers.board?.[cabinet] ?? {};
  const earlier = [...(kit.registers.earlier?.[tube] ?? [])];
  const rows = /** @type {RunRow[]} */ (await all(store, "runs")).sort((a, b) => Date.parse(a.updated) - Date.parse(b.updated));
  for (const row of rows) {
    const end = await endOf(store, row);
    if (!end) continue;
    if (row.cabinet === cabinet && Date.parse(end.at.wall) > Date.parse(kit.made)) ({ locks, earths } = end.body);
    if (row.tube === tube && !earlier.some((e) => e.run === row.run)) {
      earlier.push({ procedure: row.procedure, run: row.run, ended: end.at.wall, outcome: end.body.outcome });
    }
  }
  return { locks, earths, earlier };
}

/**
 * The tablet's part of the first event.
 * @param {Store} store
 */
async function tablet(store) {
  const mine = await get(store, "meta", "device");
  return {
    device: mine.device,
    name: mine.name,
    installed: health.installed(),
    persisted: await health.persist(),
    probe: await health.probe(store),
    agent: navigator.userAgent,
  };
}

/** Compares "0.10.2" with "0.9": negative when `a` is older. @param {string} a @param {string} b */
export function compareVersions(a, b) {
  const [left, right] = [a, b].map((v) => v.split(".").map((n) => Number.parseInt(n, 10) || 0));
  for (let i = 0; i < Math.max(left.length, right.length); i += 1) {
    const by = (left[i] ?? 0) - (right[i] ?? 0);
    if (by) return by;
  }
  return 0;
}

/**
 * Refuses what must not even be tried: an old page, a browser tab that forgets, another run open on the cabinet.
 * @param {any} kit @param {RunRow[]} rows @param {string} cabinet @param {string} app
 */
export function mayBegin(kit, rows, cabinet, app) {
  if (kit.min_app && compareVersions(app, kit.min_app) < 0) {
    throw new Refused("app-too-old", `This page is version ${app}; the server asks for ${kit.min_app} before a new run. Connect, take the update, then begin. What is recorded can still be sent.`);
  }
  if (health.mustBeInstalled()) {
    throw new Refused("not-installed", "In a browser tab this tablet may delete what is recorded after some days. Add fieldkit to the home screen, open it from there and begin the run in it.");
  }
  const open = rows.find((row) => row.cabinet === cabinet && !OVER.includes(row.phase) && !row.broken);
  if (open) throw new Refused("cabinet-has-run", `Run ${open.run} on this cabinet is still open on this tablet. End it first: its locks and earths are not on the board yet.`);
}

/**
 * The body of `run-started`.
 * Throws Refused not-in-register, given-missing, meter-missing or nameplate-not-confirmed.
 * @param {Store} store @param {any} kit @param {any} sheet @param {string} sheetSha
 * @param {{cabinet: string, tube: string, present: string[]}} asked
 */
export async function body(store, kit, sheet, sheetSha, asked) {
  const { registers } = kit;
  const cabinet = known("Cabinet", asked.cabinet, registers.cabinets?.[asked.cabinet]);
  const site = known("Site", cabinet.site, registers.sites?.[cabinet.site]);
  const tube = known("Tube", asked.tube, registers.tubes?.[asked.tube]);
  if (!tube.confirmed) {
    throw new Refused("nameplate-not-confirmed", `The nameplate of ${asked.tube} has not been entered a second time by another person. Have that done at the desk first: every limit comes from it.`);
  }
  const { locks, earths, earlier } = await boardAndEarlier(store, kit, asked.cabinet, asked.tube);
  return {
    sheet: sheetSha,
    procedure: sheet.procedure,
    edition: sheet.edition,
    site: cabinet.site,
    site_name: site.name,
    cabinet: asked.cabinet,
    tube: asked.tube,
    givens: givens(sheet, site, cabinet, tube),
    meters: cabinet.meters,
    instruments: instruments(sheet, cabinet, registers),
    places: cabinet.places,
    people: Object.entries(registers.people).map(([id, person]) => ({ id, name: /** @type {any} */ (person).name, roles: /** @type {any} */ (person).roles })),
    present: asked.present,
    locks,
    earths,
    earlier,
    tablet: await tablet(store),
    kit: kit.kit,
    rehearsal: false,
  };
}
