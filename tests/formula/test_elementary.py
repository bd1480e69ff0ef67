"""exp, log, pow, sin, cos, atan, erf: the same bits in both languages, and within 2 units in the last place of mpmath.

Outside check: mpmath (arbitrary precision, 1400 bits here, so that even sin of 1e6 and erf near 6 are exact for the
purpose). The points of tests/vectors/elementary/points.json are mpmath's values rounded to the nearest double.
"""

from __future__ import annotations

import math
import random
from collections.abc import Callable, Iterator
from typing import Any

import mpmath
import pytest

from fieldkit.formula import elementary
from fieldkit.values import Fault

POINTS = 1000
REFERENCE: dict[str, Callable[..., Any]] = {
    "exp": mpmath.exp,
    "log": mpmath.log,
    "pow": mpmath.power,
    "sin": mpmath.sin,
    "cos": mpmath.cos,
    "atan": mpmath.atan,
    "erf": mpmath.erf,
}


def test_every_vector_holds_in_both_languages(twins: Any, vectors: Any) -> None:
    cases = vectors("elementary")
    assert {c["do"] for c in cases} == set(REFERENCE)
    assert twins.wrong(cases) == []


def _near_one(rnd: random.Random) -> float:
    while (x := 1 + rnd.uniform(-1, 1) * 10 ** rnd.uniform(-16, -1)) == 1:
        pass
    return x


def _points(name: str) -> Iterator[tuple[float, ...]]:
    """Ordinary and hard arguments: near 1, subnormal, near multiples of pi/2, near the ends of the range."""
    rnd = random.Random(name)
    for _ in range(POINTS):
        any_size = 10 ** rnd.uniform(-320, 300) * rnd.choice([-1, 1])
        turn = float(mpmath.pi / 2 * rnd.randint(-636_000, 636_000))
        if name == "exp":
            yield from ((rnd.uniform(-745.2, 709.79),), (rnd.uniform(-1, 1) * 10 ** rnd.uniform(-20, 0),))
        elif name == "log":
            yield from ((abs(any_size),), (_near_one(rnd),))
        elif name == "pow":
            x, near = math.exp(rnd.uniform(-700, 700)), _near_one(rnd)
            yield (x, rnd.uniform(-745, 709) / math.log(x))
            yield (near, rnd.uniform(-745, 709) / math.log(near))
            yield (float(rnd.randint(-9, -1)), float(rnd.randint(-200, 200)))
        elif name in ("sin", "cos"):
            yield from ((rnd.uniform(-1e6, 1e6),), (rnd.uniform(-7, 7),), (turn,))
        else:
            yield from ((any_size,), (rnd.uniform(-6, 6),))


@pytest.mark.parametrize("name", REFERENCE)
def test_within_two_units_in_the_last_place_of_mpmath(name: str) -> None:
    worst, count = 0.0, 0
    with mpmath.workprec(1400):
        for args in _points(name):
            got = getattr(elementary, name)(*args)
            if isinstance(got, Fault):
                assert abs(REFERENCE[name](*map(mpmath.mpf, args))) > 1.79e308
                continue
            want = REFERENCE[name](*map(mpmath.mpf, args))
            worst = max(worst, float(abs(mpmath.mpf(got) - want) / mpmath.mpf(math.ulp(got))))
            count += 1
    assert count > POINTS
    assert worst <= 2.0


def test_the_same_bits_in_both_languages(twins: Any) -> None:
    requests = [(name, list(args)) for name in REFERENCE for args in _points(name)]
    assert len(requests) > 15_000
    assert twins.python(requests) == twins.javascript(requests)


def test_symmetry_and_order() -> None:
    rnd = random.Random(3)
    for _ in range(200):
        x = rnd.uniform(-6, 6)
        assert elementary.sin(-x) == -elementary.sin(x)  # type: ignore[operator]
        assert elementary.cos(-x) == elementary.cos(x)
        assert elementary.atan(-x) == -elementary.atan(x)
        assert elementary.erf(-x) == -elementary.erf(x)
        assert elementary.pow(abs(x), 1.0) == abs(x)
