"""Ranges where the register is odd: figures that are no numbers, names twice, units that do not fit; both engines alike."""

from __future__ import annotations

import random
from typing import Any

import pytest
import run_driver as drive
from run_twin import Twin

from fieldkit.run import names, ranges, readings, worth

ODD = ("abc", "", "1e3", "-1", "-0", "12345678901234567890.5", "5.")
EVEN = ("0", "00.10", "1", "2", "20", "0.000000000001")


def started(**more: Any) -> drive.Driver:
    d = drive.Driver(drive.frozen("metered"))
    d.do(**{**drive.metered_start(), **more})
    d.do("states-declared", **drive.HEATER_ON)
    return d


def odd_meter(rng: random.Random) -> dict[str, Any]:
    """An instrument whose register entry nobody looked at."""

    def one(name: str) -> tuple[str, ...]:
        return (
            name,
            rng.choice(("V", "V", "mV")),
            *(rng.choice(ODD if rng.random() < 0.1 else EVEN) for _ in range(6)),
        )

    names = rng.choice(
        (("2 V", "20 V"), ("20 V", "20 V"), ("", "20 V"), ("20 V",), ("",), ("__proto__", "constructor"))
    )
    dates = ("2026-01-31", "31.1.2026", "", "2026-02-30", None)
    more = {
        "calibrated_on": rng.choice(dates),
        "interval_months": rng.choice((12, 0, None)),
        "calibrated_to": rng.choice(dates),
    }
    return drive.ranged("HM-3", "hand multimeter", *(one(name) for name in names), **more)


def test_both_engines_say_the_same_of_a_register_that_nobody_looked_at(twin: Twin) -> None:
    rng = random.Random(6)
    sheet = drive.frozen("metered")
    twin.keep("metered", sheet.model_dump(mode="json"))
    judged = 0
    for _ in range(120):
        rest = drive.metered_start()["instruments"][1:]
        d = started(instruments=[odd_meter(rng), *rest])
        name = rng.choice(("", "2 V", "20 V", "none"))
        body = {
            "step": "volts",
            "move": None,
            "text": rng.choice(("6.30", "0", "-2")),
            "unit": "V",
            "instrument": "HM-3",
            "range": name,
        }
        using, now = {"range": name}, d.now
        here = [d.ask("read", text=body["text"], range=name), d.seen(using)]
        d.record("read", body, "vell")
        asked = {"do": "read", "text": body["text"], "range": name}
        steps = [{"text": t} for t in d.texts[:-1]]
        steps += [{"command": asked, "now": now}, {"now": now, "using": using}, {"text": d.texts[-1]}]
        there = twin.ask(
            play="metered", run=d.first["run"], chain=d.first["chain"], sha256=drive.SHEET_SHA, steps=steps
        )
        assert there["said"] == here
        assert there["state"] == d.state
        judged += d.state["log"][-1]["u"] is not None
    assert 5 < judged < 115


def test_the_worth_of_a_reading_is_the_same_in_both(twin: Twin) -> None:
    rng = random.Random(9)
    for _ in range(400):
        meter: dict[str, Any] = {
            "unit": rng.choice(("V", "V", "V", "A")),
            "resolution": rng.choice(("0.001", "0.1", "100", "x")),
            "percent": f"{rng.uniform(0, 5):.3f}",
            "digits": str(rng.randrange(5)),
            "percent_of_range": rng.choice(("0", "1.5", "0.02")),
            "low": rng.choice((None, "-20", "0")),
            "high": rng.choice((None, "2", "50")),
        }
        reading, unit = (
            f"{rng.uniform(-100, 100):.3f}",
            {"symbol": "V", "factor": rng.choice(("1", "0.001", "1000")), "offset": "0"},
        )
        assert twin.call("worth.expanded", reading, meter, "V") == worth.expanded(reading, meter, "V")
        assert twin.call("worth.standard", reading, meter, unit) == worth.standard(reading, meter, unit)


@pytest.mark.parametrize(
    ("used", "limits", "proposal"),
    [
        ((), ("6.1", "6.5"), "20 V"),
        ((), (None, "0.005"), "2 V"),
        ((), (None, "150"), "200 V"),
        ((), (None, "1500"), "200 V"),
        ((), (None, None), "200 V"),
        (("2 V",), ("6.1", "6.5"), "2 V"),
        (("2 V", "20 V"), ("6.1", "6.5"), "20 V"),
        (("10 A",), ("6.1", "6.5"), "20 V"),
    ],
)
def test_what_is_proposed(used: tuple[str, ...], limits: tuple[str | None, str | None], proposal: str) -> None:
    d = started()
    rows = [{**d.state["log"][0], "instrument": "HM-3", "range": name} for name in used]
    low, high = (side and {"number": side} for side in limits)
    step = d.run.ctx.steps["volts"]
    own = {"low": low, "high": high, "guarded": False} if low or high else None
    asked = {**step, "control": {**step["control"], "limits": own}}
    where = names.scope(d.run.ctx, d.state)
    one = readings.aboard(d.state, "HM-3")
    assert one is not None
    found = ranges.proposed(d.run.ctx, {**d.state, "log": [*d.state["log"], *rows]}, where, asked, one)
    assert found is not None and found["name"] == proposal


def test_an_instrument_of_the_earlier_form_has_one_range_without_a_name() -> None:
    d = started()
    flat = readings.instrument(d.state, "TI-2")
    assert flat is not None
    assert (flat["range"], flat["unit"], flat["high"], flat["percent_of_range"]) == ("", "degC", "100", "0")
    assert ranges.offers(d.state, d.run.ctx.steps["inlet"], flat)["ranges"] == [""]
