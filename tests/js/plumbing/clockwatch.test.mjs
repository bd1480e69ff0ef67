import assert from "node:assert/strict";
import { test } from "node:test";
import { between, isoWithOffset, now } from "../../../static/tablet/clockwatch.js";
import { compareVersions } from "../../../static/tablet/begin.js";
import * as clock from "../../../static/core/clock.js";

const at = (wall_s, mono_s) => ({ wall: 1e12 + wall_s * 1000, mono: mono_s * 1000 });

for (const [what, after, hidden, kind] of [
  ["ten seconds pass", at(10, 10), false, null],
  ["the clock drifts by under two seconds", at(11.9, 10), false, null],
  ["the clock is set forward while the page is in view", at(3610, 10), false, "clock-changed"],
  ["the clock is set back while the page is in view", at(-3590, 10), false, "clock-changed"],
  ["the clock is set back while the page is hidden", at(-3590, 10), true, "clock-changed"],
  ["the tablet sleeps and the running timer stops", at(1800, 10), true, "slept"],
  ["the tablet sleeps and the running timer goes on", at(600, 600), false, "slept"],
  ["the page is hidden for a minute", at(60, 60), true, null],
  ["a short sleep under the gap of a pause", at(100, 10), true, null],
]) {
  test(`${what}: ${kind ?? "nothing to say"}`, () => assert.equal(between(at(0, 0), after, hidden)?.kind ?? null, kind));
}

test("what is said of a gap is seconds as decimal strings", () => {
  assert.deepEqual(between(at(0, 0), at(-3590, 10), false), { kind: "clock-changed", wall_s: "-3590.000", mono_s: "10.000" });
});

for (const zone of ["Europe/London", "Asia/Kathmandu", "America/St_Johns", "UTC"]) {
  test(`wall time in ${zone} names the same moment, with its offset`, () => {
    const before = process.env.TZ;
    process.env.TZ = zone;
    try {
      for (const ms of [Date.UTC(2026, 6, 31, 13, 31, 7, 123), Date.UTC(2026, 11, 31, 23, 59, 59, 999), Date.UTC(2026, 2, 29, 0, 59, 59, 1)]) {
        const iso = isoWithOffset(ms);
        assert.match(iso, /^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.\d{3}[+-]\d\d:\d\d$/);
        assert.equal(Date.parse(iso), ms);
        assert.equal(clock.wall_ms(iso), ms);
      }
    } finally {
      if (before === undefined) delete process.env.TZ;
      else process.env.TZ = before;
    }
  });
}

test("the time of an event is one that the run's clock can read, of one boot", () => {
  const [a, b] = [now(), now()];
  assert.equal(a.boot, b.boot);
  assert.notEqual(clock.wall_ms(a.wall), null);
  assert.ok(clock.mono_ms(b.mono) >= clock.mono_ms(a.mono));
});

test("versions compare by number, not by letter", () => {
  assert.ok(compareVersions("0.9.0", "0.10.0") < 0);
  assert.ok(compareVersions("1.0", "0.99.99") > 0);
  assert.equal(compareVersions("1.2", "1.2.0"), 0);
});
