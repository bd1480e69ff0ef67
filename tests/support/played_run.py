"""A small sheet with one step of every control, and a pen that writes events for it: for the tests of records and desk.

Invented values. The pen checks nothing: what it writes is what a tablet could have written, right or wrong.
"""

from __future__ import annotations

import base64
import datetime as dt
import hashlib
import json
from collections.abc import Callable
from typing import Any

from fieldkit.run import events, state
from fieldkit.run.events import Event
from fieldkit.sheet import model
from fieldkit.sheet.model import Sheet

VOLT = {"symbol": "V", "factor": "1", "offset": "0"}
MICRO = {"symbol": "uA", "shown": "µA", "factor": "0.000001", "offset": "0"}
WATT = {"symbol": "W", "factor": "1", "offset": "0"}


def number(text: str) -> dict[str, Any]:
    return {"number": text}


def name(text: str) -> dict[str, Any]:
    return {"name": text}


def call(function: str, *of: dict[str, Any]) -> dict[str, Any]:
    return {"call": function, "of": list(of)}


def _step(id_: str, n: int, title: str, control: dict[str, Any], **more: Any) -> dict[str, Any]:
    return {"id": id_, "number": str(n), "kind": control["control"], "title": title, "control": control, **more}


def _steps() -> list[dict[str, Any]]:
    hv = {"instrument": "HV-2", "hand_at": "deck"}
    heater = {
        "control": "number", "unit": VOLT, "meter": {"role": "heater_volts"}, "plate": name("heater_voltage"),
        "limits": {
            "low": number("6.1"), "high": number("6.5"), "low_name": "lower limit", "high_name": "upper limit",
            "caution_low": number("6.17"), "caution_high": number("6.43"), "guarded": True,
        },
        "typical": {"low": number("5"), "high": number("6.45")},
    }  # fmt: skip
    ion = {
        "control": "number", "unit": MICRO, "meter": {"role": "ion_amps"},
        "limits": {"high": number("0.000005"), "high_name": "inhibit / 4", "caution_high": number("0.000004")},
        "typical": {"high": number("0.000003")},
    }  # fmt: skip
    prove = {
        "control": "prove", "unit": VOLT, "tester": hv, "known_source": "proving unit KS-1",
        "known": {"low": number("450")},
        "points": [{"name": "deck", "title": "Deck bus",
                    "limits": {"high": number("50"), "high_name": "safe voltage"}}],
        "resolution": "1",
    }  # fmt: skip
    power = {"control": "result", "unit": WATT, "resolution": "0.1", "formulas": ["twice"],
             "value": call("mul", name("heater"), number("10")), "limits": {"high": number("66")}}  # fmt: skip
    return [
        _step("caution", 1, "High voltage", {"control": "caution", "signal": "DANGER", "hazard": "High voltage.",
              "consequence": "It kills.", "avoid": ["Stay out."]}),
        _step("lock", 2, "Lock the beam supply", {"control": "lock", "point": "B2-Q1", "sources": ["beam_supply"]}),
        _step("prove", 3, "Prove the deck dead", prove),
        _step("earth", 4, "Earth the deck",
              {"control": "earth", "stick": "E2", "point": "deck bus", "source": "beam_supply"}),
        _step("in", 5, "Hands in at the deck", {"control": "people", "place": "deck", "way": "in"}),
        _step("out", 6, "Everyone out", {"control": "people", "place": "deck", "way": "out"}),
        _step("lift", 7, "Lift the earth",
              {"control": "lift", "stick": "E2", "point": "deck bus", "source": "beam_supply"}),
        _step("unlock", 8, "Take off the lock", {"control": "unlock", "point": "B2-Q1", "sources": ["beam_supply"]}),
        _step("which", 9, "Cold or stored", {"control": "choice", "options": [
              {"value": "cold", "label": "From cold"}, {"value": "stored", "label": "From store"}]}),
        _step("heat", 10, "Heater on", {"control": "confirm"}),
        _step("warm", 11, "Heater warm-up", {"control": "wait", "clock": "age:heater", "least": number("900"),
              "depends": "heater"}),
        _step("heater", 12, "Heater voltage, warm", heater),
        _step("ion", 13, "Ion pump current", ion),
        _step("power", 14, "Heater power", power),
        _step("hold", 15, "Second person says the doors are shut", {"control": "hold", "statement": "Doors are shut."}),
        _step("picture", 16, "Picture of the panel", {"control": "picture", "of": "Meter panel"}),
        _step("remark", 17, "Anything odd", {"control": "remark"}),
    ]  # fmt: skip


def _moves() -> list[dict[str, Any]]:
    order = [s["id"] for s in _steps()]
    effects = {
        "lock": {"sets": {"beam_supply": "locked"}},
        "prove": {"sets": {"beam_supply": "proved"}},
        "earth": {"sets": {"beam_supply": "earthed"}},
        "lift": {"sets": {"beam_supply": "locked"}},
        "unlock": {"sets": {"beam_supply": "off"}},
        "heat": {"sets": {"heater": "on"}},
        "in": {"hands": {"deck": "in"}},
        "out": {"hands": {"deck": "out"}},
    }
    judged, moves = ("prove", "heater", "ion", "power"), []
    for k, origin in enumerate(order):
        to = order[k + 1] if k + 1 < len(order) else "@end"
        on = "pass" if origin in judged else "option" if origin == "which" else "done"
        moves.append({"id": f"{origin}.on", "origin": origin, "to": to, "on": on, "effects": effects.get(origin, {})})
        if origin in judged:
            again = {"id": f"{origin}.again", "origin": origin, "to": origin, "on": "fail", "manner": "again"}
            moves.append({**again, "effects": {"counts": [{"counter": f"again:{origin}", "by": 1}]}})
            moves.append({"id": f"{origin}.deviate", "origin": origin, "to": to, "on": "fail", "manner": "deviation"})
            moves.append({"id": f"{origin}.stop", "origin": origin, "to": "@safe", "on": "fail", "manner": "stop"})
    return moves


#: stands for the procedure that the sheet was compiled from
YAML = b"procedure: played\nedition: 3\n"


def sheet(**change: Any) -> Sheet:
    sources = [
        ("beam_supply", "beam supply", "Beam"),
        ("heater", "heater", "Heater"),
        ("ion_pump", "ion pump", "Ion pump"),
    ]
    data = {
        "procedure": "played", "edition": 3, "title": "Played procedure", "purpose": "To be tested.",
        "source_sha256": hashlib.sha256(YAML).hexdigest(), "tubes": ["inductive-output-tube"], "crew": 2,
        "givens": [{"name": "heater_voltage", "origin": "tube", "kind": "number", "unit": VOLT,
                    "meaning": "rated heater voltage"}],
        "sources": [{"name": n, "title": t, "short": s} for n, t, s in sources],
        "start": {n: {"state": "on" if n == "ion_pump" else "off"} for n, _, _ in sources},
        "ends": {}, "first": "caution", "steps": _steps(), "moves": _moves(), "counters": {},
        "make_safe": [{"id": "beam", "text": "Beam supply off.", "sets": {"beam_supply": "off"}}],
        "formulas": {"twice": {"name": "twice", "meaning": "ten times the volts", "arguments": [], "result_unit": "W",
                     "tree": number("1"), "reference": "invented for this test"}},
        "next_person": "Leave the heater on.",
        **change,
    }  # fmt: skip
    return Sheet.model_validate(data)


PEOPLE = [
    {"id": "vell", "name": "J. Vell", "roles": ["technician"]},
    {"id": "arkle", "name": "P. Arkle", "roles": ["technician"]},
    {"id": "quill", "name": "S. Quill", "roles": ["supervisor"]},
    {"id": "orme", "name": "K. Orme", "roles": ["supervisor"]},
]
INSTRUMENTS = [
    {"id": "DM-04", "reads": "heater volts", "unit": "V", "low": "0", "high": "20", "resolution": "0.01",
     "percent": "0.3", "digits": "1", "calibrated_to": "2031-11-30", "certificate": "C-1"},
    {"id": "IP-2", "reads": "ion-pump current", "unit": "uA", "low": "0.1", "high": "500", "resolution": "0.1",
     "percent": "3", "digits": "1", "calibrated_to": "2032-01-31", "certificate": "C-2"},
    {"id": "HV-2", "reads": "volts, hand", "unit": "V", "low": "1", "high": "999", "resolution": "1", "percent": "2",
     "digits": "2", "calibrated_to": "2032-03-31", "certificate": "C-3"},
]  # fmt: skip
STARTED: dict[str, Any] = {
    "procedure": "played", "edition": 3, "site": "skarrow-fell", "site_name": "Skarrow Fell", "cabinet": "B2",
    "tube": "T-0417",
    "givens": {"heater_voltage": {"texts": ["6.30"], "unit": "V", "source": "nameplate"}},
    "meters": {"heater_volts": "DM-04", "ion_amps": "IP-2"}, "instruments": INSTRUMENTS,
    "places": {"deck": ["beam_supply"]},
    "people": PEOPLE, "present": ["vell", "arkle"], "kit": "k" * 64,
    "tablet": {"device": "tab3", "name": "tablet 3", "installed": True, "persisted": True, "probe": "ok"},
}  # fmt: skip
PICTURE = hashlib.sha256(b"picture").hexdigest()

BEGINS = dt.datetime(2026, 7, 31, 12, 58, tzinfo=dt.timezone(dt.timedelta(hours=1)))

#: signs an event: (person id, claims) -> compact JWS
Signer = Callable[[str, dict[str, Any]], str]


def unsigned(_person: str, claims: dict[str, Any]) -> str:
    """The form of a JWS whose signature is none."""
    parts = [json.dumps({"alg": "ES256"}), json.dumps(claims), "none"]
    return ".".join(base64.urlsafe_b64encode(p.encode()).decode().rstrip("=") for p in parts)


class Pen:
    """Writes the events of one run, one after another, on a clock that the test moves."""

    def __init__(
        self,
        on: Sheet,
        sign: Signer = unsigned,
        run: str = "0731-B2-2",
        chain: str = "tab3.1",
        begins: dt.datetime = BEGINS,
        **started: Any,
    ) -> None:
        self.sheet, self.sign, self.by = on, sign, "vell"
        self.digest = model.digest(model.to_bytes(on))
        self.state = state.new(on, run, chain, self.digest)
        self.texts: list[str] = []
        self.events: list[Event] = []
        self.wall = begins
        self.mono = 1_000_000
        self.write("run-started", {**STARTED, "sheet": self.digest, **started})
        self.write(
            "states-declared", {"states": {"beam_supply": "off", "heater": "off", "ion_pump": "on"}, "board_seen": True}
        )

    def wait(self, seconds: float, wall: float | None = None) -> Pen:
        """Time passes: by the running timer, and by the wall clock (the same unless said)."""
        self.mono += int(seconds * 1000)
        self.wall += dt.timedelta(seconds=seconds if wall is None else wall)
        return self

    def write(self, kind: str, body: dict[str, Any], by: str | None = None) -> Pen:
        self.wait(20)
        at = {"wall": self.wall.isoformat(timespec="milliseconds"), "mono": str(self.mono), "boot": "b1"}
        text = events.to_text(events.next_event(self.state, kind, body, by or self.by, at, "0.1.0"))
        event = events.parse(text.encode())
        self.texts.append(text)
        self.events.append(event)
        self.state = {**self.state, "seq": event.head.seq, "head": event.sha256}
        return self

    def answer(self, kind: str, step: str, move: str | None = "on", **body: Any) -> Pen:
        return self.write(kind, {"step": step, "move": f"{step}.{move}" if move else None, **body})

    def signed(self, person: str, meaning: str) -> Pen:
        names = {p["id"]: p["name"] for p in PEOPLE}
        claims = {
            "run": self.state["run"], "chain": self.state["chain"], "seq": self.state["seq"],
            "head": self.state["head"],
            "sheet": self.digest, "meaning": meaning, "person": person, "name": names[person],
            "time": self.wall.isoformat(timespec="seconds"), "statement": f"I {meaning} this.",
            "pictures": [e.body.sha256 for e in self.events if e.head.kind == "pictured"],
        }  # fmt: skip
        return self.write("signed", {"person": person, "meaning": meaning, "jws": self.sign(person, claims)})

    # ---- stretches of the run ----

    def isolate(self) -> Pen:
        self.answer("acknowledged", "caution", heard=["vell", "arkle"])
        self.answer("locked", "lock", point="B2-Q1", lock="41", tag="tag 7", holder="vell")
        points = [{"name": "deck", "text": "3"}]
        self.answer("proved", "prove", instrument="HV-2", before="502", points=points, after="501")
        return self.answer("earthed", "earth", stick="E2", point="deck bus")

    def release(self) -> Pen:
        self.answer("people-counted", "in", place="deck", way="in", names=["vell"])
        self.answer("people-counted", "out", place="deck", way="out", names=["vell"])
        self.answer("lifted", "lift", stick="E2", point="deck bus")
        return self.answer("unlocked", "unlock", point="B2-Q1", lock="41", who="vell").signed("vell", "unlocked")

    def warm(self, seconds: float = 930) -> Pen:
        self.answer("chosen", "which", value="cold").answer("confirmed", "heat").wait(seconds)
        return self.answer("waited", "warm")

    def read(self, step: str, text: str, move: str | None = "on") -> Pen:
        unit, meter = ("V", "DM-04") if step == "heater" else ("uA", "IP-2")
        return self.answer("read", step, move, text=text, unit=unit, instrument=meter)

    def went(self, step: str, move: str, reason: str, **more: Any) -> Pen:
        return self.write("went-on", {"step": step, "move": f"{step}.{move}", "reason": reason, **more})

    def finish(self, power: str = "63", picture: str = PICTURE) -> Pen:
        self.answer("worked-out", "power", value=power)
        self.answer("released", "hold", who="arkle", statement="Doors are shut.").signed("arkle", "released")
        shot = {"sha256": picture, "media": "image/jpeg", "width": 640, "height": 480, "size": 9000}
        self.answer("pictured", "picture", **shot, note="panel")
        self.answer("remarked", "remark", text="Nothing odd.")
        return self.end()

    def end(self, outcome: str = "done", reason: str = "", **more: Any) -> Pen:
        states = {"beam_supply": "off", "heater": "on", "ion_pump": "on"}
        self.write("ended", {"outcome": outcome, "reason": reason, "states": states, "locks": [], "earths": [], **more})
        return self.signed("vell", "performed")


def clean(pen: Pen | None = None, picture: str = PICTURE) -> Pen:
    """A run with nothing wrong."""
    pen = (pen or Pen(sheet())).isolate().release().warm()
    return pen.read("heater", "6.30").read("ion", "0.4").finish(picture=picture)


def eventful(pen: Pen | None = None, picture: str = PICTURE) -> Pen:
    """A run with a failing reading taken again, a correction, a deviation, a conditional pass and a changed clock."""
    pen = (pen or Pen(sheet())).isolate().release().warm()
    pen.read("heater", "6.62", None).went("heater", "again", "Meter not settled.").read("heater", "6.48")
    pen.write("clock-changed", {"wall_s": "212.000", "mono_s": "20.000"})
    pen.read("ion", "52", None)
    pen.write(
        "corrected", {"seq": pen.state["seq"], "field": "text", "text": "5.2", "reason": "point in the wrong place"}
    )
    pen.went("ion", "deviate", "Maker's letter allows 6.", authority="quill", under="maker's letter").signed(
        "quill", "allowed"
    )
    return pen.finish(power="64.8", picture=picture)
