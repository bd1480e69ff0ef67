"""Both twins draw what tests/vectors/drawing/ says, character for character, and agree on seeded random models.

`FIELDKIT_REWRITE=1 pytest tests/drawing` writes the drawings in the vectors again from the Python twin; look at them.
"""

from __future__ import annotations

import json
import os
import random
import subprocess
from pathlib import Path
from typing import Any

import pytest

from fieldkit import drawing

ROOT = Path(__file__).parents[2]
VECTORS = ROOT / "tests" / "vectors" / "drawing"
FILES = sorted(VECTORS.glob("*.json"))


def python(draw: str, args: list[Any]) -> dict[str, str]:
    said = getattr(drawing.says, "scale" if draw == "tiny" else draw, None)
    return {"svg": drawing.DRAWINGS[draw](*args), "says": said(*args) if said else ""}


def javascript(asked: list[dict[str, Any]]) -> list[dict[str, str]]:
    script = ROOT / "tests" / "js" / "core" / "drawing.mjs"
    done = subprocess.run(
        ["node", "--no-warnings", str(script)], input=json.dumps(asked), capture_output=True, text=True, check=True
    )
    return json.loads(done.stdout)


def test_every_drawing_has_its_vectors() -> None:
    assert {f.stem for f in FILES} == set(drawing.DRAWINGS)


@pytest.mark.parametrize("file", FILES, ids=lambda f: f.stem)
def test_python_draws_the_vectors(file: Path) -> None:
    vectors = json.loads(file.read_text())
    if os.environ.get("FIELDKIT_REWRITE"):
        for v in vectors:
            v.update(python(file.stem, v["args"]))
        file.write_text(json.dumps(vectors, ensure_ascii=False, indent=1) + "\n")
    assert len(vectors) >= 5
    for v in vectors:
        assert python(file.stem, v["args"]) == {"svg": v["svg"], "says": v["says"]}, v["name"]


@pytest.mark.parametrize("file", FILES, ids=lambda f: f.stem)
def test_javascript_draws_the_vectors(file: Path) -> None:
    vectors = json.loads(file.read_text())
    answers = javascript([{"draw": file.stem, "args": v["args"]} for v in vectors])
    for v, answer in zip(vectors, answers, strict=True):
        assert answer == {"svg": v["svg"], "says": v["says"]}, v["name"]


def _number(r: random.Random) -> str:
    return f"{r.uniform(-1, 1) * 10 ** r.randint(-3, 5):.{r.randint(0, 4)}f}"


def _scale(r: random.Random) -> dict[str, Any]:
    model: dict[str, Any] = {"unit": r.choice(["V", "L/min", "µA", ""]), "ink": r.choice(["screen", "print"])}
    fields = ["value", "low", "high", "plate", "caution_low", "caution_high", "accept_low", "accept_high"]
    for name in fields:
        if r.random() < 0.6:
            model[name] = _number(r) if r.random() < 0.9 else r.choice(["−0.5", "1,25", "3e-2", "text", "0"])
    if r.random() < 0.6:
        model["u"] = _number(r).lstrip("-")
    if r.random() < 0.4:
        model["olds"] = [{"value": _number(r), "name": "last run"} for _ in range(r.randint(1, 3))]
    model["verdict"] = r.choice(["pass", "fail", "not judged", None])
    model["width"] = r.choice([120, 190, 240, 362, 572, 800])
    return model


def _rails(r: random.Random) -> dict[str, Any]:
    states = list(drawing.says.STATES)
    lanes = [
        {
            "title": f"source {k}",
            "before": r.choice(states),
            "after": r.choice([*states, None]),
            "warming": r.random() < 0.2,
            "decay": r.random() < 0.2,
        }
        for k in range(r.randint(1, 14))
    ]
    return {"lanes": lanes, "at": r.choice([0, 33, 50, 90, 100]), "planned": r.random() < 0.5, "named": True}


def _timeline(r: random.Random) -> dict[str, Any]:
    start, states = r.randint(0, 90000), list(drawing.says.STATES)
    end = start + r.randint(1, 100000)
    lanes = []
    for k in range(r.randint(1, 14)):
        at = sorted({start, *(r.randint(start, end + 50) for _ in range(r.randint(0, 5)))})
        spans = [{"at": t, "state": r.choice(states), "decay": r.random() < 0.1} for t in at]
        lanes.append({"short": f"S{k}", "title": f"source {k}", "spans": spans})
    balls = [{"at": r.randint(start, end), "lane": r.randrange(len(lanes)), "n": n} for n in range(1, r.randint(1, 9))]
    return {"from": start, "to": end, "lanes": lanes, "balls": balls, "width": r.choice([218, 320])}


def test_twins_agree_on_random_models() -> None:
    r = random.Random(417)
    asked: list[dict[str, Any]] = []
    for _ in range(400):
        model = _scale(r)
        asked += [{"draw": "scale", "args": [model]}, {"draw": "tiny", "args": [model]}]
    for _ in range(60):
        asked.append({"draw": "rails", "args": [_rails(r)]})
        asked.append({"draw": "timeline", "args": [_timeline(r)]})
        elapsed, least = f"{r.uniform(0, 9000):.3f}", f"{r.uniform(1, 9000):.1f}"
        asked.append({"draw": "wait", "args": [{"elapsed": elapsed, "least": least, "width": r.choice([362, 572])}]})
    for one, answer in zip(asked, javascript(asked), strict=True):
        assert answer == python(one["draw"], one["args"]), json.dumps(one, ensure_ascii=False)
