"""Plays a run against the engine as a tablet would: decide, envelope, text, parse, apply. No keys: signatures are empty."""

from __future__ import annotations

import json
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

from fieldkit.run import decide, events, progress, state
from fieldkit.sheet.model import Sheet

VECTORS = Path(__file__).parent.parent / "vectors"
BEGIN = datetime(2026, 7, 31, 9, 0, tzinfo=UTC)
SHEET_SHA = "5e" * 32


def tiny() -> Sheet:
    return frozen("tiny")


def frozen(name: str) -> Sheet:
    """A frozen sheet; metered.json is what metered.yaml beside it once compiled to."""
    return Sheet.model_validate_json((VECTORS / "sheets" / f"{name}.json").read_text())


def instrument(
    name: str, unit: str, resolution: str, percent: str, digits: str, low: str | None, high: str | None
) -> dict[str, Any]:
    return {
        "id": name, "reads": name, "unit": unit, "low": low, "high": high, "resolution": resolution, "percent": percent,
        "digits": digits, "calibrated_to": "2026-11-30", "certificate": "",
    }  # fmt: skip


def tiny_start() -> dict[str, Any]:
    def given(unit: str, *texts: str) -> dict[str, Any]:
        return {"texts": list(texts), "unit": unit, "source": "nameplate of T-1"}

    return {
        "do": "run-started",
        "by": "vell",
        "facts": {"confirmed": True},
        "sheet": SHEET_SHA,
        "procedure": "tiny",
        "edition": 1,
        "site": "fell",
        "site_name": "Fell",
        "cabinet": "B2",
        "tube": "T-1",
        "givens": {
            "heater_voltage": given("V", "6.30"),
            "heater_low": given("V", "6.10"),
            "heater_high": given("V", "6.50"),
            "heater_nominal": given("A", "0.42"),
            "safe_voltage": given("V", "50"),
            "discharge": given("s", "60"),
            "levels": given("kV", "18", "20", "22"),
            "polarity": given("", "probe +"),
        },
        "meters": {"heater_volts": "DM-04", "heater_amps": "DM-05", "ion_amps": "IP-2"},
        "instruments": [
            instrument("DM-04", "V", "0.01", "0.3", "1", "0", "20"),
            instrument("DM-05", "A", "0.01", "0.5", "2", "0", "30"),
            instrument("IP-2", "uA", "0.1", "3", "1", "0.1", "500"),
            instrument("HV-2", "V", "1", "2", "2", None, "999"),
        ],
        "places": {"deck": ["beam", "stored_charge"]},
        "people": [
            {"id": "vell", "name": "J. Vell", "roles": ["technician"]},
            {"id": "arkle", "name": "P. Arkle", "roles": ["technician"]},
            {"id": "quill", "name": "S. Quill", "roles": ["technician", "supervisor"]},
        ],
        "present": ["vell", "arkle"],
        "earlier": [
            {"procedure": "before-tiny", "run": "r0", "ended": "2026-07-30T16:00:00.000+00:00", "outcome": "done"}
        ],
        "tablet": {"device": "d1", "name": "Tablet 1", "installed": True, "persisted": True, "probe": "ok"},
        "kit": "c1" * 32,
    }  # fmt: skip


def ranged(name: str, reads: str, *ranges: tuple[str, ...], **more: Any) -> dict[str, Any]:
    """An instrument with ranges: (name, unit, low, high, resolution, percent, digits, percent of range)."""
    keys = ("name", "unit", "low", "high", "resolution", "percent", "digits", "percent_of_range")
    return {
        "id": name, "reads": reads, "certificate": "", "calibrated_on": "2026-01-31", "interval_months": 12, "calibrated_to": None,
        "temperature": {"low": "18", "high": "28"}, "ranges": [dict(zip(keys, r, strict=False)) for r in ranges], **more,
    }  # fmt: skip


def metered_start() -> dict[str, Any]:
    """The start of a run on the metered sheet: many ranges, one of percent of range, two overdue, one of the earlier form."""
    volts = [("2 V", "V", "-2", "2", "0.001", "0.1", "2"), ("200 V", "V", "-200", "200", "0.1", "0.1", "2"), ("20 V", "V", "-20", "20", "0.01", "0.1", "2")]  # fmt: skip
    return tiny_start() | {
        "procedure": "metered",
        "givens": {"leak_limit": {"texts": ["1"], "unit": "mW/cm2", "source": "station's own"}},
        "meters": {"coolant_pressure": "PR-2", "coolant_inlet": "TI-2", "ion_amps": "IP-2"},
        "instruments": [
            ranged("HM-3", "hand multimeter", *volts, ("10 A", "A", "-10", "10", "0.01", "0.5", "2")),
            ranged("RM-1", "leakage", ("20 mW/cm2", "mW/cm2", "0.01", "20", "0.01", "40", "0"), calibrated_on="2025-06-30"),
            ranged("RM-2", "leakage", ("20 mW/cm2", "mW/cm2", "0.01", "20", "0.01", "40", "0")),
            ranged("PR-2", "pressure", ("10 bar", "bar", "0", "10", "0.1", "0", "0", "1.6"), calibrated_on="2026-01-31", interval_months=6),
            ranged("IP-2", "ion current", ("500 uA", "uA", "0.1", "500", "0.1", "3", "1"), calibrated_on=None, calibrated_to="2026-07-30"),
            instrument("TI-2", "degC", "0.1", "0", "3", "0", "100"),
        ],
        "places": {},
        "earlier": [],
    }  # fmt: skip


class Driver:
    """One tablet, one run, a clock that the test moves."""

    def __init__(self, sheet: Sheet | dict[str, Any], sha: str = SHEET_SHA) -> None:
        self.sheet = sheet
        self.run = state.begin(sheet)
        self.first = state.new(sheet, "260731-B2-1a2b3", "d1.0", sha)
        self.texts: list[str] = []
        self.wall_ms = 0
        self.mono_ms = 5000
        self.boot = "b1"

    @property
    def state(self) -> dict[str, Any]:
        return self.run.state if self.texts else self.first

    @property
    def now(self) -> dict[str, str]:
        wall = (BEGIN + timedelta(milliseconds=self.wall_ms)).isoformat(timespec="milliseconds")
        return {"wall": wall, "mono": f"{self.mono_ms}.5", "boot": self.boot}

    def later(self, seconds: float, mono: float | None = None) -> None:
        self.wall_ms += round(seconds * 1000)
        self.mono_ms += round((seconds if mono is None else mono) * 1000)

    def reload(self, seconds: float) -> None:
        """The page was gone for a while: another boot, another running timer."""
        self.wall_ms += round(seconds * 1000)
        self.mono_ms, self.boot = 800, f"b{int(self.boot[1:]) + 1}"

    def ask(self, do: str, **more: Any) -> dict[str, Any]:
        """What decide says to a command; nothing is recorded."""
        return decide.decide(self.sheet, self.state, {"do": do, **more}, self.now)

    def do(self, do: str, **more: Any) -> dict[str, Any]:
        """Decide, record, sign where a signature is due; a refusal is an error of the script."""
        said = self.ask(do, **more)
        assert "events" in said, (do, more, said)
        for one in said["events"]:
            self.record(one["kind"], one["body"], more.get("by") or self.state["recorder"])
        due = self.state["unsigned"]
        if due:
            self.sign(due["person"], due["meaning"])
        return self.state

    def refused(self, do: str, **more: Any) -> str:
        """The code of the refusal."""
        said = self.ask(do, **more)
        assert "refused" in said, (do, more, said)
        assert said["refused"]["says"].strip()
        return str(said["refused"]["code"])

    def sign(self, person: str, meaning: str) -> None:
        self.record("signed", {"person": person, "meaning": meaning, "jws": "e30.e30.e30"}, person)

    def record(self, kind: str, body: dict[str, Any], by: str) -> None:
        """Append an event as it stands, whatever decide would say."""
        text = events.to_text(events.next_event(self.state, kind, body, by, self.now, "0.1.0"))
        self.texts.append(text)
        self.run = state.apply(self.run, events.parse(text.encode()))
        self.later(1)

    @property
    def progress(self) -> dict[str, Any]:
        return self.seen()

    def seen(self, using: dict[str, Any] | None = None) -> dict[str, Any]:
        """What progress says where another instrument or range is asked for."""
        return progress.progress(self.sheet, self.state, self.now, using)

    def dump(self) -> str:
        return json.dumps(self.state, sort_keys=True)


DECLARED = {"states": {"beam": "off", "heater": "off", "coolant": "on"}, "ages": {"coolant": "600"}, "board_seen": True}


HEATER_ON = {"states": {"heater": "on"}, "ages": {}, "board_seen": True}


def started() -> Driver:
    """A tiny run, started, the energy states declared."""
    d = Driver(tiny())
    d.do(**tiny_start())
    d.do("states-declared", **DECLARED)
    return d


def to_heater_volts(d: Driver) -> Driver:
    """On to the heater's voltage, by the short branch, everything in order."""
    d.do("acknowledged", heard=["vell", "arkle"])
    d.do("chosen", value="cold")
    d.do("locked", lock="L-21", tag="T-88")
    d.later(60)
    d.do("waited")
    points = [{"name": "rectifier", "text": "0"}, {"name": "capacitor", "text": "2"}]
    d.do("proved", before="502", after="501", points=points)
    d.do("earthed")
    d.do("people-counted", names=["J. Vell"])
    d.do("people-counted", names=["J. Vell"])
    d.do("lifted")
    d.do("released", who="arkle")
    d.do("unlocked")
    d.do("confirmed")
    d.do("confirmed")
    return d


def to_end(d: Driver) -> Driver:
    """From the heater's voltage to the end, everything in order."""
    d.do("read", text="6.30")
    d.do("read", text="0.58")
    d.do("worked-out")
    d.later(900)
    d.do("waited")
    for text in ("1.0", "1.5", "1.9"):
        d.do("read", text=text)
        if d.state["pending"]:
            d.do("went-on", move="m-up")
    d.do("remarked", text="")
    return d
