"""Plays a run of one of the shipped procedures up to a step, without a browser, so that a screen can be looked at there.

Everything is decided and folded by the run engine, on the demonstration station; only times, plausible readings and
the signatures' bytes are made up here. `Play(procedure, ...).to(step)` gives the events as the tablet would hold them.
"""

from __future__ import annotations

import copy
import json
from datetime import datetime, timedelta, timezone
from pathlib import Path
from typing import Any

from fieldkit import values
from fieldkit.formula import library
from fieldkit.procedure import compile as compiling
from fieldkit.run import decide, events, progress
from fieldkit.run import state as folding
from fieldkit.sheet import model

ROOT = Path(__file__).resolve().parents[2]
ZONE = timezone(timedelta(hours=1))
START = datetime(2026, 7, 31, 12, 58, 4, tzinfo=ZONE)
STATION: dict[str, Any] = json.loads((ROOT / "fieldkit/demo/station.json").read_text(encoding="utf-8"))
_SHEETS: dict[str, Any] = {}
#: readings that the middle of the limits would not give
TEXTS = {"sticks_home": "3", "plugs_home": "4", "sticks_back": "3", "ready_focus_volts": "26.0", "ready_focus": "22.60", "stop_kv": "18.0", "kv_10s": "5.2"}


def sheet_of(procedure: str) -> tuple[dict[str, Any], str]:
    """The compiled sheet as plain values, and its hash."""
    if procedure not in _SHEETS:
        made, problems = compiling.compile_file(
            ROOT / f"procedures/{procedure}.yaml", library.load(ROOT / "procedures/formulas")
        )
        assert made is not None, problems
        data = model.to_bytes(made)
        _SHEETS[procedure] = json.loads(data), model.digest(data)
    return _SHEETS[procedure]


class Play:
    """One run that goes on as long as it is asked to."""

    def __init__(
        self,
        procedure: str,
        cabinet: str = "B2",
        tube: str = "T-0417",
        present: tuple[str, ...] = ("vell", "arkle"),
        instruments: dict[str, Any] | None = None,
        controls: dict[str, Any] | None = None,
    ) -> None:
        """`instruments` changes entries of the register by id, `controls` what steps of the sheet ask, by step."""
        self.sheet, self.sha256 = sheet_of(procedure)
        self.instruments = {k: {**v, **(instruments or {}).get(k, {})} for k, v in STATION["instruments"].items()}
        if controls:
            self.sheet = copy.deepcopy(self.sheet)
            for step in self.sheet["steps"]:
                step["control"].update(controls.get(step["id"], {}))
        self.at = START
        self.texts: list[str] = []
        self.run = folding.begin(self.sheet)
        self.state = folding.new(self.sheet, f"0731-{cabinet}-2", "d1.e1", self.sha256)
        self.recorder = present[0]
        self.do(
            {
                "do": "run-started",
                "by": present[0],
                "facts": {"confirmed": True},
                **self._started(cabinet, tube, present),
            }
        )

    def _started(self, cabinet: str, tube: str, present: tuple[str, ...]) -> dict[str, Any]:
        at, site = STATION["cabinets"][cabinet], STATION["cabinets"][cabinet]["site"]
        held = {
            "tube": STATION["tubes"][tube]["givens"],
            "cabinet": at["givens"],
            "site": STATION["sites"][site]["givens"],
        }
        locked = [s for s, d in self.sheet["start"].items() if d["state"] == "locked"]
        locks = []
        for number, source in enumerate(locked, 41):
            point = next(p for p, q in at["points"].items() if source in q["sources"])
            locks.append({"point": point, "sources": [source], "lock": str(number), "tag": f"T{number}", "holder": present[0],
                          "holder_name": STATION["people"][present[0]]["name"], "run": "0730-B2-1", "since": "2026-07-30T16:02:11.000+01:00"})  # fmt: skip
        ended = (START - timedelta(hours=2)).isoformat(timespec="milliseconds")
        earlier = [
            {"procedure": a["procedure"], "run": "0731-B2-1", "ended": ended, "outcome": "done"}
            for a in self.sheet["after"]
        ]
        return {
            "sheet": self.sha256, "procedure": self.sheet["procedure"], "edition": self.sheet["edition"], "site": site,
            "site_name": STATION["sites"][site]["name"], "cabinet": cabinet, "tube": tube,
            "givens": {g["name"]: held[g["origin"]][g["name"]] for g in self.sheet["givens"]}, "meters": at["meters"],
            "instruments": self._aboard(at["meters"]), "places": at["places"],
            "people": [{"id": k, "name": p["name"], "roles": p["roles"]} for k, p in STATION["people"].items()],
            "present": list(present), "locks": locks, "earths": [], "earlier": earlier,
            "tablet": {"device": "d1", "name": "tablet 3", "installed": True, "persisted": True, "probe": "8 MB written and read back in 0.2 s"},
            "kit": "k" * 64,
        }  # fmt: skip

    def _aboard(self, meters: dict[str, str]) -> list[dict[str, Any]]:
        """What static/tablet/begin.js takes along: the sheet's instruments, and hand instruments that read the same."""
        asked = [s["control"].get(key) for s in self.sheet["steps"] for key in ("meter", "tester")]
        ids = {one["instrument"] or meters[one["role"]] for one in asked if one}
        built_in = {i for cabinet in STATION["cabinets"].values() for i in cabinet["meters"].values()}
        reads = {self.instruments[i]["reads"] for i in ids - built_in}
        ids |= {i for i, one in self.instruments.items() if i not in built_in and one["reads"] in reads}
        return [self.instruments[i] for i in sorted(ids)]

    def now(self) -> dict[str, str]:
        mono = (self.at - START) / timedelta(milliseconds=1)
        return {"wall": self.at.isoformat(timespec="milliseconds"), "mono": f"{mono:.1f}", "boot": "b1"}

    def wait(self, seconds: float) -> None:
        self.at += timedelta(seconds=seconds)

    def append(self, kind: str, body: dict[str, Any], by: str) -> None:
        text = events.to_text(events.next_event(self.state, kind, body, by, self.now(), "0.1.0"))
        self.texts.append(text)
        self.run = folding.apply(self.run, events.parse(text.encode()))
        self.state = self.run.state

    def do(self, command: dict[str, Any]) -> None:
        """A command that must be accepted, 7 s after the last."""
        self.wait(7)
        answer = decide.decide(self.sheet, self.state, command, self.now())
        assert "events" in answer, (command, answer)
        for one in answer["events"]:
            self.append(one["kind"], one["body"], command.get("by", self.state["recorder"] or self.recorder))
        due = self.state["unsigned"]
        if due:
            self.sign(due["person"], due["meaning"])

    def sign(self, person: str, meaning: str) -> None:
        self.append("signed", {"person": person, "meaning": meaning, "jws": "e30.e30.AAAA"}, person)

    def declare(self) -> None:
        """Everything as the sheet expects it."""
        names = [s["name"] for s in self.sheet["sources"] if s["isolable"] or s["name"] in self.sheet["start"]]
        states = {n: self.sheet["start"].get(n, {"state": "off"})["state"] for n in names}
        ages = {n: "7200" for n, d in self.sheet["start"].items() if d["least"]}
        self.do({"do": "states-declared", "states": states, "ages": ages, "board_seen": True})

    def to(self, step: str, picks: dict[str, str] | None = None, texts: dict[str, str] | None = None) -> Play:
        """Answer steps until `step` is the open one."""
        if self.state["phase"] == "declare":
            self.declare()
        for _ in range(400):
            if self.state["node"] == step and not self.state["pending"]:
                return self
            self._answer(picks or {}, {**TEXTS, **(texts or {})})
        raise AssertionError(f"{step} was not reached; the run stands at {self.state['node']}")

    def _answer(self, picks: dict[str, str], texts: dict[str, str]) -> None:
        told = progress.progress(self.sheet, self.state, self.now())
        if self.state["pending"]:
            ways = [m for m in told["moves"] if m["open"] and m["manner"] == "plain"]
            chosen = next((m for m in ways if m["move"] == picks.get(self.state["node"])), ways[0])
            self.do({"do": "went-on", "move": chosen["move"]})
            return
        left = [r["left"] for r in told["reasons"]]
        assert all(s is not None for s in left), (told["node"], told["reasons"])
        if left:
            self.wait(max(left) + 1)
        self.do(self._command(told, picks, texts))

    def _command(self, told: dict[str, Any], picks: dict[str, str], texts: dict[str, str]) -> dict[str, Any]:
        step = told["step"]
        control, ident = step["control"], step["id"]
        other = next(p for p in self.state["started"]["present"] if p != self.state["recorder"])
        match control["control"]:
            case "caution":
                return {"do": "acknowledged", "heard": self.state["started"]["present"]}
            case "number":
                return {"do": "read", "text": texts.get(ident) or plausible(told)}
            case "prove":
                return {
                    "do": "proved",
                    "before": "502",
                    "after": "501",
                    "points": [{"name": p["name"], "text": "3"} for p in control["points"]],
                }
            case "lock":
                return {
                    "do": "locked",
                    "lock": f"5{step['number']}",
                    "tag": f"T5{step['number']}",
                    "holder": self.state["recorder"],
                }
            case "unlock":
                lock = next(one for one in self.state["locks"] if one["point"] == control["point"])
                return {"do": "unlocked", "lock": lock["lock"], "who": lock["holder"]}
            case "choice":
                return {"do": "chosen", "value": picks.get(ident) or control["options"][0]["value"]}
            case "hold":
                return {"do": "released", "who": other}
            case "picture":
                return {
                    "do": "pictured",
                    "sha256": "0" * 64,
                    "media": "image/jpeg",
                    "width": 1600,
                    "height": 1200,
                    "size": 214000,
                }
            case "remark":
                return {"do": "remarked", "text": "Next: hv-bring-up. P. Arkle watches."}
            case "people":
                inside = self.state["hands"].get(control["place"], [])
                return {"do": "people-counted", "names": ["J. Vell"] if control["way"] == "in" else inside}
        return {
            "do": {
                "confirm": "confirmed",
                "earth": "earthed",
                "lift": "lifted",
                "result": "worked-out",
                "wait": "waited",
            }[control["control"]]
        }


def plausible(told: dict[str, Any]) -> str:
    """A reading that passes: the nameplate's, else the middle of the limits, in the meter's steps."""
    limits = told["limits"] or {}
    low, high = (limits.get(f"accept_{s}") or limits.get(s) for s in ("low", "high"))
    step = limits.get("resolution") or (told["instrument"] or {}).get("resolution") or "1"
    digits = values.decimals(step)
    if told["plate"]:
        wanted = float(told["plate"])
    elif low and high:
        wanted = (float(low) + float(high)) / 2
    elif low:
        wanted = float(low) * (1.2 if float(low) > 0 else 0.8)
    elif high:
        wanted = float(high) * (0.3 if float(high) > 0 else 1.2)
    else:
        wanted = 10.0
    size = float(step) or 1.0
    return f"{round(wanted / size) * size:.{digits}f}"

