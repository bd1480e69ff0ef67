"""Both twins give what tests/vectors/fits/ says, and the same bits and sentences for seeded random columns, good and bad.

`FIELDKIT_REWRITE=1 pytest tests/fits` writes the answers in the vectors again from the Python twin; look at them.
"""

from __future__ import annotations

import inspect
import json
import math
import os
import random
from pathlib import Path
from typing import Any

import curves
import pytest
from fits_twin import bits, javascript, python

from fieldkit import fits

VECTORS = Path(__file__).parents[1] / "vectors" / "fits"
FILES = sorted(VECTORS.glob("*.json"))
#: random inputs for each fit; fewer where one may take a thousand steps
MANY = dict.fromkeys(fits.FITS, 1000) | {"curve": 400}


def test_both_languages_have_the_same_fits_and_each_has_vectors() -> None:
    assert javascript([], names=True) == list(fits.FITS)
    assert {f.stem for f in FILES} == set(fits.FITS)


@pytest.mark.parametrize("file", FILES, ids=lambda f: f.stem)
def test_both_languages_give_the_vectors(file: Path) -> None:
    vectors = json.loads(file.read_text())
    asked = [{"fit": file.stem, "args": v["args"]} for v in vectors]
    if os.environ.get("FIELDKIT_REWRITE"):
        for v, got in zip(vectors, python(asked), strict=True):
            v["expect"] = got
        lines = ",\n".join(json.dumps(v, ensure_ascii=False) for v in vectors)
        file.write_text(f"[\n{lines}\n]\n")
    assert len({v["name"] for v in vectors}) == len(vectors) >= 5
    assert None in [v["expect"]["refused"] for v in vectors]
    for v, one, other in zip(vectors, python(asked), javascript(asked), strict=True):
        assert bits(one) == bits(v["expect"]), v["name"]
        assert other == bits(v["expect"]), v["name"]


def _columns(r: random.Random, shape: str) -> tuple[list[float], list[float]]:
    n = r.choice([1, 2, 3, 4, 5, 8, 12, 17, 24, 24, 40])
    start, step = r.uniform(0.1, 30), r.uniform(0.01, 2)
    x = [start + step * (k + r.choice([0, 0, 0.2]) * r.random()) for k in range(n)]
    scatter = r.choice([0.0, 1e-4, 1e-2, 0.1])
    power = r.choice([0.7, 1.0])
    middle, rate = start + step * n * r.random(), r.uniform(0.01, 2) / (step * n)
    ys = {
        "line": lambda v: 2 + 3 * v,
        "parabola": lambda v: 1 + (v - middle) ** 2,
        "exponential": lambda v: 8e-5 * math.exp(-3 * rate * v),
        "power": lambda v: 8e-5 * v**-power,
        "knee": lambda v: (1 + (1.1 * middle / v) ** 9) ** -0.5,
        "flat": lambda v: 0.3,
    }
    y = [ys[shape](v) * (1 + r.gauss(0, scatter)) for v in x]
    if shape == "exponential":
        y = [v * (r.uniform(2, 9) if r.random() < 0.1 else 1) for v in y]
    return x, y


_BAD: list[Any] = [
    0,
    -1,
    1.5e308,
    -1.5e308,
    5e-324,
    1e-31,
    2**70,
    10**400,
    math.inf,
    -math.inf,
    math.nan,
    None,
    "3",
    True,
    [],
    {},
]
SHAPES = ("line", "parabola", "exponential", "power", "knee", "flat")


def _spoilt(r: random.Random, x: list[Any], y: list[Any]) -> tuple[Any, Any]:
    """Hostile columns: wrong numbers, wrong lengths, other scales, ties, no column at all."""
    how = r.randrange(12)
    if how == 0:
        return r.choice([None, [], "abc", {}, 3, [[]]]), y
    if how == 1:
        return [], []
    if how == 2:
        return x, y[: r.randrange(len(y) + 1)]
    if how == 3:
        return x, [r.choice(_BAD) if r.random() < 0.2 else v for v in y]
    if how == 4:
        return [r.choice(_BAD) if r.random() < 0.2 else v for v in x], y
    if how == 5:
        return [x[0]] * len(x), y
    if how == 6:
        return [r.choice(x[:3]) for _ in x], y
    if how == 7:
        return [v * 10.0 ** r.choice([-29, -12, 12, 28]) for v in x], [v * 10.0 ** r.choice([-29, 25]) for v in y]
    if how == 8:
        return [1e9 + 1e-6 * v for v in x], y
    if how == 9:
        return x, [v if r.random() < 0.7 else 0.0 for v in y]
    if how == 10:
        return [-v for v in x], [-v for v in y]
    return x[::-1], [10.0 ** r.uniform(-30, 30) for _ in y]


def _or_bad(r: random.Random, good: Any, rate: float = 0.04) -> Any:
    return r.choice(_BAD) if r.random() < rate else good


def _uncertainty(r: random.Random, y: Any) -> Any:
    if r.random() < 0.5 or not isinstance(y, list):
        return None
    if r.random() < 0.5:
        return _or_bad(r, 10.0 ** r.uniform(-7, -1))
    return [_or_bad(r, 10.0 ** r.uniform(-7, -1), 0.01) for _ in y]


def _inhibits(r: random.Random) -> Any:
    if r.random() < 0.7:
        return None
    one = {
        "name": "ion pump",
        "reading": _or_bad(r, r.uniform(0, 12)),
        "inhibit": _or_bad(r, 10.0),
        "near": _or_bad(r, 0.8),
    }
    if r.random() < 0.1:
        del one[r.choice(list(one))]
    return r.choice([[one], [one], [one], [one, one], one, [3], []])


def _asked(r: random.Random, fit: str) -> dict[str, Any]:
    likely = {"line": "line", "parabola_vertex": "parabola", "knee_crossing": "knee", "bounded_secant": "line"}
    shape = likely.get(fit, r.choice(["exponential", "power"])) if r.random() < 0.7 else r.choice(SHAPES)
    x, y = _columns(r, shape) if r.random() < 0.75 else _spoilt(r, *_columns(r, shape))
    u, show = _uncertainty(r, y), r.random() < 0.3
    last = y[-1] if isinstance(y, list) and y and isinstance(y[-1], float) else 1.0
    more: list[Any] = [u]
    if fit == "parabola_vertex":
        more = [u, _or_bad(r, r.choice([None, 3.0])), _or_bad(r, r.choice([None, 3.5, 20.0]))]
    elif fit.endswith("time_to"):
        more = [_or_bad(r, last * r.choice([0.1, 0.5, 0.9, 1.5])), u]
    elif fit == "knee_crossing":
        more = [
            _or_bad(r, r.choice([0.05, 0.1, 0.3])),
            u,
            _or_bad(r, r.choice([3, 3, 5])),
            _or_bad(r, r.choice([None, 180])),
        ]
    elif fit == "curve":
        more = curves.asked(r, u, _or_bad)
    elif fit == "bursts":
        more = [_or_bad(r, r.choice([None, 1e-4])), u]
    elif fit == "bounded_secant":
        ends = [_or_bad(r, -1.0), _or_bad(r, r.choice([5.0, 60.0]))]
        tail = [_or_bad(r, r.choice([None, 1, -1])), _inhibits(r), _or_bad(r, r.choice([None, 0.1]))]
        more = [
            _or_bad(r, last + r.choice([0.0, 1e-6, 1.0, -40.0])),
            _or_bad(r, r.choice([0.5, 100.0])),
            *ends,
            u,
            *tail,
        ]
    return {"fit": fit, "args": [x, y, *more], "show": show}


def _finite(x: Any) -> bool:
    if isinstance(x, dict):
        return all(_finite(v) for v in x.values())
    if isinstance(x, list):
        return all(_finite(v) for v in x)
    if isinstance(x, float):
        return math.isfinite(x) and math.copysign(1.0, x + 0.0) == math.copysign(1.0, x)
    return x is None or isinstance(x, str | bool | int)


@pytest.mark.parametrize("fit", fits.FITS)
def test_the_same_bits_and_words_for_whatever_is_put_in(fit: str) -> None:
    """Both languages answer, alike, with the fit's own keys, finite numbers (no -0) and a sentence."""
    r = random.Random(f"fits {fit}")
    asked = [_asked(r, fit) for _ in range(MANY[fit])]
    answers = python(asked)
    for one, answer, other in zip(asked, answers, javascript(asked), strict=True):
        assert other == bits(answer), one
        assert _finite(answer) and answer["says"], one
        assert answer["refused"] is None or answer["refused"]["says"] == answer["says"]
    keys = {tuple(sorted(a)) for a in answers}
    assert len(keys) == 1
    codes = [a["refused"] and a["refused"]["code"] for a in answers]
    assert codes.count(None) > MANY[fit] / 20
    assert len(set(codes)) > 5
    assert any(one["show"] and "<" in a["says"] for one, a in zip(asked, answers, strict=True))


@pytest.mark.parametrize("fit", fits.FITS)
def test_both_signatures_are_the_same(fit: str) -> None:
    """JavaScript has no named arguments, so a caller counts on the order."""
    text = (VECTORS.parents[2] / "static" / "core" / "fits" / f"{fit}.js").read_text()
    head = text[text.index(f"export function {fit}(") :]
    names = [part.split("=")[0].strip() for part in head[head.index("(") + 1 : head.index(") {")].split(",")]
    assert [n for n in names if n] == list(inspect.signature(fits.FITS[fit]).parameters)
