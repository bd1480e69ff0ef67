"""A small station for the browser tests, and its server: `small_station.py build DIR`, `small_station.py serve DIR PORT`.

One cabinet, one tube, a procedure of a few controls made by hand (no YAML), people, everything through the operations
that the product uses. The server is a process of its own, so that a test can really stop it.
"""

from __future__ import annotations

import hashlib
import io
import sys
from pathlib import Path
from typing import Any

PASSPHRASE = "authority for browser tests"
PASSWORD = "a long password for tests"
SOURCE = b"procedure: short-look\nedition: 1\n"
PEOPLE = {
    "vell": ("J. Vell", ("technician",)),
    "arkle": ("P. Arkle", ("technician",)),
    "quill": ("S. Quill", ("supervisor",)),
    "head": ("The head", ("administrator", "writer")),
}
PLATE = {"heater_voltage": {"texts": ["6.30"], "unit": "V"}}
SEED: dict[str, Any] = {
    "sites": {
        "fell": {
            "name": "Small Fell",
            "card": {
                "emergency_off": [{"name": "EO-1", "where": "hall door"}],
                "telephone": [{"who": "Emergency services", "number": "112"}],
                "first_aid": ["hall door"],
                "nearest_help": "in the valley",
            },
        }
    },
    "cabinets": {
        name: {
            "site": "fell",
            "title": f"Cabinet {name}",
            "sources": ["heater", "beam_supply"],
            "places": {"deck": ["heater", "beam_supply"]},
            "points": {},
            "sticks": {},
            "meters": {"heater_volts": "DM-04"},
        }
        for name in ("B1", "B2")
    },
    "tubes": {
        f"T-0{n}": {
            "kind": "inductive-output-tube",
            "cabinet": f"B{n}",
            "hours": "100",
            "givens": {"heater_voltage": {"texts": ["6.30"], "unit": "V", "source": f"nameplate of T-0{n}"}},
        }
        for n in (1, 2)
    },
    "instruments": {
        "DM-04": {
            "id": "DM-04",
            "reads": "heater voltage",
            "unit": "V",
            "resolution": "0.01",
            "calibrated_to": "2099-01-01",
        }
    },
}


def sheet():
    """A short procedure: an act, a reading with limits that may be taken again, a picture, a remark, a hold point."""
    from fieldkit.formula import ast
    from fieldkit.sheet import controls as c
    from fieldkit.sheet.model import Declared, SafeStep, Sheet, Step
    from fieldkit.sheet.moves import Move
    from fieldkit.sheet.parts import Given, Limits, Meter, Source, Unit

    volt = Unit(symbol="V")

    def literal(text: str) -> dict[str, Any]:
        return ast.to_json(ast.Literal("number", text))

    def step(id: str, number: str, title: str, control: Any) -> Step:
        return Step(id=id, number=number, kind=control.control, title=title, control=control)

    def move(origin: str, to: str, on: str = "done", **more: Any) -> Move:
        return Move(id=f"{origin}-{to}-{on}".replace("@", ""), origin=origin, to=to, on=on, **more)

    return Sheet(
        procedure="short-look",
        edition=1,
        title="Short look at the heater",
        purpose="Something short to record.",
        source_sha256=hashlib.sha256(SOURCE).hexdigest(),
        tubes=("inductive-output-tube",),
        crew=1,
        givens=(Given(name="heater_voltage", origin="tube", kind="number", unit=volt),),
        sources=(
            Source(name="heater", title="Heater", short="HT"),
            Source(name="beam_supply", title="Beam supply", short="BM"),
        ),
        start={"heater": Declared(state="on"), "beam_supply": Declared(state="off")},
        ends={"heater": ("on", "off"), "beam_supply": ("off",)},
        first="look",
        steps=(
            step("look", "1", "Look at the cabinet.", c.Confirm()),
            step(
                "volts",
                "2",
                "Heater voltage",
                c.Number(
                    unit=volt,
                    meter=Meter(role="heater_volts"),
                    limits=Limits(low=literal("6.1"), high=literal("6.5"), low_name="low", high_name="high"),
                ),
            ),
            step("photo", "3", "Take a picture of the meter.", c.Picture(of="the meter", required=False)),
            step("said", "4", "Anything to say?", c.Remark()),
            step("hold", "5", "Let somebody else look.", c.Hold(statement="I have looked at the meter.")),
        ),
        moves=(
            move("look", "volts"),
            move("volts", "photo", "pass"),
            move("volts", "volts", "fail", manner="again", label="Take it again"),
            move("volts", "@safe", "fail", manner="stop", label="Stop"),
            move("photo", "said"),
            move("said", "hold"),
            move("hold", "@end"),
        ),
        make_safe=(SafeStep(id="off", text="Heater off.", sets={"heater": "off"}),),
    )


def build(folder: Path) -> None:
    from PIL import Image

    from fieldkit.operations import people, pictures, procedures, registers, station
    from fieldkit.operations.actor import HOUSE, Actor
    from fieldkit.store.db import writing
    from fieldkit.web.app import create_app, here

    app = create_app(folder, plain_http=True)
    with app.app_context():
        station.set_up(HOUSE, here(), "Small station", PASSPHRASE)
        for login, (name, roles) in PEOPLE.items():
            people.add(HOUSE, login, name, roles, PASSWORD)
        registers.load(HOUSE, SEED)
        data = io.BytesIO()
        Image.new("RGB", (80, 60), (120, 120, 110)).save(data, "JPEG")
        made = pictures.prepare(data.getvalue())
        with writing() as session:
            pictures.add(session, made, "head")
        for serial in SEED["tubes"]:
            registers.enter_nameplate(Actor("vell", "J. Vell", ("technician",)), serial, PLATE, made.sha256)
            registers.confirm_nameplate(Actor("arkle", "P. Arkle", ("technician",)), serial, PLATE)
        procedures.release(HOUSE, sheet(), SOURCE)


def serve(folder: Path, port: int) -> None:
    from werkzeug.serving import make_server

    from fieldkit.web.app import create_app

    make_server("127.0.0.1", port, create_app(folder, plain_http=True), threaded=True).serve_forever()


if __name__ == "__main__":
    if sys.argv[1] == "build":
        build(Path(sys.argv[2]))
    else:
        serve(Path(sys.argv[2]), int(sys.argv[3]))
