"""Walks a compiled procedure on the run engine, as a tablet of the invented station would: the sheet is what is tried.

Every step is answered with the value that `values` has for it (a text, or a list of them for successive visits), else
with one inside its limits; a closed step waits until its reasons say it opens. Not here: what the engine does.
"""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import dataclass, field
from datetime import UTC, datetime, timedelta
from decimal import Decimal
from pathlib import Path
from typing import Any

from fieldkit.files import folder
from fieldkit.formula import library
from fieldkit.procedure.compile import compile_file
from fieldkit.run import decide, events, progress, state
from fieldkit.sheet import model
from fieldkit.sheet.model import Sheet

#: what the meters of the invented station show (its model), where the middle of the limits will not do
WARM = {"dew_point": "12.0", "coolant_inlet": "24.0", "heater_amps_10": "9.82", "heater_amps_warm": "9.80"}
HIGH = {
    "dew_point": "12.0", "ready_inlet": "24.0", "ready_outlet": "29.0", "ready_focus_volts": "27.0", "top_kv": "32.0",
    "stop_kv": "18.0", "kv_10s": "5.2", "panel_zero": "0.0",
}  # fmt: skip

BEGIN = datetime(2026, 7, 31, 9, 0, tzinfo=UTC)
STATION = Path(__file__).resolve().parents[2] / "fieldkit" / "demo" / "station.json"


def shipped(name: str) -> Sheet:
    """The sheet of a procedure that comes with fieldkit."""
    sheet, problems = compile_file(
        folder("procedures") / f"{name}.yaml", library.load(folder("procedures") / "formulas")
    )
    assert sheet is not None, problems
    return sheet


def start_of(sheet: Sheet, cabinet: str, tube: str, present: tuple[str, ...]) -> dict[str, Any]:
    """The command that starts a run on the invented station."""
    station = json.loads(STATION.read_text())
    home = station["cabinets"][cabinet]
    known = home["givens"] | station["tubes"][tube]["givens"]
    return {
        "do": "run-started", "by": present[0], "facts": {"confirmed": True},
        "sheet": model.digest(model.to_bytes(sheet)),
        "procedure": sheet.procedure, "edition": sheet.edition,
        "site": home["site"], "site_name": "Skarrow Fell",
        "cabinet": cabinet, "tube": tube, "givens": {g.name: known[g.name] for g in sheet.givens},
        "meters": home["meters"], "instruments": list(station["instruments"].values()), "places": home["places"],
        "people": [{"id": i, "name": p["name"], "roles": p["roles"]} for i, p in station["people"].items()],
        "present": list(present), "locks": [lock("Q1", ["beam_supply"]), lock("S4", ["rf_drive"])], "earths": [],
        "earlier": [{"procedure": a.procedure, "run": "r0", "ended": "2026-07-31T08:00:00.000+00:00", "outcome": "done"}
                    for a in sheet.after],
        "tablet": {"device": "d1", "name": "Tablet 1", "installed": True, "persisted": True, "probe": "ok"},
        "kit": "c1" * 32,
    }  # fmt: skip


def lock(point: str, sources: list[str]) -> dict[str, Any]:
    """A lock on the board, put there by an earlier run."""
    return {
        "point": point, "sources": sources, "lock": f"L-{point}", "tag": f"T-{point}", "holder": "vell",
        "holder_name": "J. Vell", "run": "r0", "since": "2026-07-30T16:00:00.000+00:00",
    }  # fmt: skip


@dataclass
class Walk:
    sheet: Sheet
    values: dict[str, Any] = field(default_factory=dict)
    cabinet: str = "B2"
    tube: str = "T-0417"
    present: tuple[str, ...] = ("vell", "arkle")
    visited: list[str] = field(default_factory=list)
    seconds: float = 0.0
    prefer: Callable[[dict[str, Any]], bool] = lambda move: move["manner"] == "plain"

    def __post_init__(self) -> None:
        self.run = state.begin(self.sheet)
        self.first = state.new(self.sheet, "260731-B2-1a2b3", "d1.0", model.digest(model.to_bytes(self.sheet)))
        self.begun = False
        self.do(**start_of(self.sheet, self.cabinet, self.tube, self.present))
        states = {s: d.state for s, d in self.sheet.start.items()}
        if self.values.get("history") == "standby" and "standby" in self.sheet.start["heater"].accepts:
            states["heater"] = "standby"
        self.do("states-declared", states=states, ages={s: "36000" for s in states}, board_seen=True)

    @property
    def state(self) -> dict[str, Any]:
        return self.run.state if self.begun else self.first

    @property
    def now(self) -> dict[str, str]:
        wall = (BEGIN + timedelta(seconds=self.seconds)).isoformat(timespec="milliseconds")
        return {"wall": wall, "mono": f"{5000 + self.seconds * 1000:.1f}", "boot": "b1"}

    def do(self, do: str, **more: Any) -> None:
        """Decide, record, and sign where a signature is due."""
        said = decide.decide(self.sheet, self.state, {"do": do, **more}, self.now)
        assert "events" in said, (do, more, said, self.visited[-3:])
        for one in said["events"]:
            self.record(one["kind"], one["body"], more.get("by") or self.state["recorder"])
        due = self.state["unsigned"]
        if due:
            body = {"person": due["person"], "meaning": due["meaning"], "jws": "e30.e30.e30"}
            self.record("signed", body, due["person"])

    def record(self, kind: str, body: dict[str, Any], by: str) -> None:
        text = events.to_text(events.next_event(self.state, kind, body, by, self.now, "0.1.0"))
        self.run = state.apply(self.run, events.parse(text.encode()))
        self.begun = True
        self.seconds += 2

    def look(self) -> dict[str, Any]:
        return progress.progress(self.sheet, self.state, self.now)

    def to(self, node: str, most: int = 600) -> Walk:
        """Goes on until the run stands at `node`, or has stopped."""
        for _ in range(most):
            if self.state["node"] == node or self.state["phase"] != "going":
                return self
            self.step()
        raise AssertionError(f"{node} was not reached; the last steps were {self.visited[-12:]}")

    def step(self) -> None:
        """Answers the step where the run stands, waiting for it to open."""
        seen = self.look()
        if self.state["pending"]:
            ways = [m for m in seen["moves"] if m["open"]]
            way = next((m for m in ways if self.prefer(m)), ways[0])
            self.do("went-on", move=way["move"], reason="as the test asks", **self.authority(way))
            return
        if not seen["open"]:
            left = [r["left"] for r in seen["reasons"]]
            assert all(r is not None for r in left), (self.state["node"], seen["reasons"])
            self.seconds += max(left)
            seen = self.look()
            assert seen["open"], (self.state["node"], seen["reasons"])
        step = seen["step"]
        self.visited.append(step["id"])
        self.do(**ANSWERS[step["control"]["control"]](self, step, seen))

    def authority(self, way: dict[str, Any]) -> dict[str, str]:
        return {"authority": "quill", "under": "station's rule 12"} if way["manner"] == "deviation" else {}

    def value(self, step: dict[str, Any], default: str) -> str:
        given = self.values.get(step["id"], default)
        if isinstance(given, list):
            visits = self.visited.count(step["id"]) - 1
            given = given[min(visits, len(given) - 1)]
        return str(given)


def inside(step: dict[str, Any], seen: dict[str, Any]) -> str:
    """A value well inside the limits: the nameplate's, else the middle; beside a lone limit, on its good side."""
    limits = seen["limits"] or {}
    low, high, plate = limits.get("low"), limits.get("high"), seen["plate"]
    if plate is not None:
        return str(plate)
    if low is not None and high is not None:
        middle = (Decimal(low) + Decimal(high)) / 2
        return low if low == high else format(middle.quantize(Decimal(limits.get("resolution") or "0.01")), "f")
    if low is not None:
        resolution = Decimal(limits.get("resolution") or "0.1")
        return format((Decimal(low) * Decimal("1.2")).quantize(resolution) if Decimal(low) > 0 else Decimal(1), "f")
    if high is not None:
        return format((Decimal(high) / 4).quantize(Decimal(limits.get("resolution") or "0.01")), "f")
    return "14"


def _number(walk: Walk, step: dict[str, Any], seen: dict[str, Any]) -> dict[str, Any]:
    return {"do": "read", "text": walk.value(step, inside(step, seen))}


def _prove(walk: Walk, step: dict[str, Any], seen: dict[str, Any]) -> dict[str, Any]:
    points = [{"name": p["name"], "text": walk.value(step, "2")} for p in step["control"]["points"]]
    return {"do": "proved", "before": "502", "after": "501", "points": points}


def _choice(walk: Walk, step: dict[str, Any], seen: dict[str, Any]) -> dict[str, Any]:
    return {"do": "chosen", "value": walk.value(step, step["control"]["options"][0]["value"])}


ANSWERS: dict[str, Callable[[Walk, dict[str, Any], dict[str, Any]], dict[str, Any]]] = {
    "caution": lambda w, s, p: {"do": "acknowledged", "heard": list(w.present)},
    "confirm": lambda w, s, p: {"do": "confirmed"},
    "number": _number,
    "prove": _prove,
    "lock": lambda w, s, p: {"do": "locked", "lock": f"L-2{len(w.visited)}", "tag": "T-88"},
    "unlock": lambda w, s, p: {"do": "unlocked"},
    "earth": lambda w, s, p: {"do": "earthed"},
    "lift": lambda w, s, p: {"do": "lifted"},
    "choice": _choice,
    "hold": lambda w, s, p: {"do": "released", "who": "arkle"},
    "picture": lambda w, s, p: {
        "do": "pictured", "sha256": "ab" * 32, "media": "image/jpeg", "width": 640, "height": 480, "size": 20000
    },
    "remark": lambda w, s, p: {"do": "remarked", "text": "As it should be."},
    "result": lambda w, s, p: {"do": "worked-out"},
    "wait": lambda w, s, p: {"do": "waited"},
    "people": lambda w, s, p: {"do": "people-counted", "names": ["J. Vell"]},
}  # fmt: skip
