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

from fieldkit.formula import elementary, pairs, quick
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


def _off(got: float, want: Any) -> float:
    """How far a double is from mpmath's value, in units of its last place."""
    return float(abs(mpmath.mpf(got) - want) / mpmath.mpf(math.ulp(got)))


def test_the_short_way_gives_the_nearest_double_or_nothing() -> None:
    """Outside check: mpmath. The long way gives the same double, so that it never shows which way was taken."""
    rnd, doubtful = random.Random(8), 0
    with mpmath.workprec(400):
        for _ in range(4000):
            x = rnd.uniform(-1, 1) * 10 ** rnd.uniform(-12, 2.84)
            got = quick.exp(x)
            e, k = pairs.exp((x, 0.0))
            if got == got:
                assert _off(got, mpmath.exp(x)) <= 0.5
                assert got == pairs.scale(e[0], k) == elementary.exp(x)
            doubtful += got != got
    assert 0 < doubtful < 80


def test_the_short_way_to_a_logarithm_is_as_near_as_it_says() -> None:
    """Outside check: mpmath. Far and near numbers, and those about 1, where the first digits cancel."""
    rnd = random.Random(9)
    with mpmath.workprec(400):
        for k in range(4000):
            x = math.exp(rnd.uniform(-700, 700)) if k % 2 else _near_one(rnd)
            value, rest = quick.log(x)
            assert abs(mpmath.mpf(value) + mpmath.mpf(rest) - mpmath.log(mpmath.mpf(x))) <= quick.LOG_DOUBT
            assert elementary.log(x) == pairs.log(x)[0]


def test_a_power_is_the_nearest_double() -> None:
    """Outside check: mpmath. Exponents as formulas have them, and any."""
    rnd = random.Random(10)
    with mpmath.workprec(400):
        for k in range(4000):
            x = 10 ** rnd.uniform(-12, 12)
            y = rnd.choice([0.5, 1.5, 2.0, 3.0, 4.0, -1.0, -2.0, 0.57, 0.1]) if k % 2 else rnd.uniform(-20, 20)
            got = elementary.pow(x, y)
            assert isinstance(got, float)
            assert _off(got, mpmath.power(mpmath.mpf(x), mpmath.mpf(y))) <= 0.5


def test_symmetry_and_order() -> None:
    rnd = random.Random(3)
    for _ in range(200):
        x = rnd.uniform(-6, 6)
        assert elementary.sin(-x) == -elementary.sin(x)  # type: ignore[operator]
        assert elementary.cos(-x) == elementary.cos(x)
        assert elementary.atan(-x) == -elementary.atan(x)
        assert elementary.erf(-x) == -elementary.erf(x)
        assert elementary.pow(abs(x), 1.0) == abs(x)
