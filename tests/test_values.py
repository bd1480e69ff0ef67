"""Numbers as typed, rounded and printed: every vector in both languages, and against outside arithmetic.

Outside checks: Python's decimal module (an independent implementation of exact decimal arithmetic) for round12, fixed
and conversions. The typed texts are those that people are known to enter, and more of the kind.
"""

from __future__ import annotations

import random
import struct
from decimal import ROUND_CEILING, ROUND_FLOOR, ROUND_HALF_EVEN, Context, Decimal
from typing import Any

import pytest

from fieldkit import values
from fieldkit.errors import Refusal


def test_every_vector_holds_in_both_languages(twins: Any, vectors: Any) -> None:
    cases = vectors("values")
    assert len(cases) > 150
    assert twins.wrong(cases) == []


def test_sentences_are_the_same_in_both_languages(twins: Any, vectors: Any) -> None:
    requests = [(c["do"], twins.decode(c["args"])) for c in vectors("values") if c["do"] in ("typed", "number")]
    assert twins.python(requests) == twins.javascript(requests)


def test_every_refusal_says_what_to_write(vectors: Any) -> None:
    seen = set()
    for case in vectors("values"):
        if case["do"] == "typed" and "refused" in case["expect"]:
            refusal = values.typed(case["args"][0])
            assert isinstance(refusal, Refusal)
            assert "Write" in refusal.sentence and refusal.sentence.endswith(".")
            seen.add(refusal.code)
    assert len(seen) == 11


def _doubles(count: int) -> list[float]:
    """Doubles of every magnitude, and near ties, from a fixed seed."""
    rnd = random.Random(20260801)
    found: list[float] = []
    while len(found) < count:
        bits = struct.unpack(">d", rnd.randbytes(8))[0]
        near = rnd.uniform(-1, 1) * 10 ** rnd.randint(-12, 12)
        tie = rnd.randint(1, 10**12) + 0.5
        found += [x for x in (bits, near, tie, round(near, 3)) if x == x and abs(x) != float("inf")]
    return found[:count]


def test_a_value_beside_its_uncertainty_equals_the_decimal_module_and_the_twin(twins: Any) -> None:
    """Two digits of the uncertainty by the module's own rounding, and the value quantized to the same place."""
    rnd = random.Random(20261204)
    requests = []
    for _ in range(3000):
        u, x = (
            f"{rnd.uniform(0.1, 1) * 10 ** rnd.randint(-9, 7):.12f}",
            f"{rnd.uniform(-1, 1) * 10 ** rnd.randint(-6, 8):.9f}",
        )
        if Decimal(u) == 0:
            continue
        want_u = Context(prec=2, rounding=ROUND_HALF_EVEN).create_decimal(Decimal(u))
        want = Decimal(x).quantize(Decimal(1).scaleb(want_u.adjusted() - 1), ROUND_HALF_EVEN, Context(prec=40))
        shown = values.beside(x, u, None)
        assert [Decimal(s) for s in shown] == [want, want_u]
        places = [len(s.partition(".")[2]) for s in shown]
        assert places == [max(0, 1 - want_u.adjusted())] * 2
        requests.append(("beside", [x, u, None]))
    assert twins.python(requests) == twins.javascript(requests)


def test_round12_and_fixed_equal_the_decimal_module_and_the_twin(twins: Any) -> None:
    doubles = _doubles(4000)
    context = Context(prec=12, rounding=ROUND_HALF_EVEN, Emin=-999, Emax=999)
    for x in doubles:
        want = context.create_decimal(Decimal(x))
        assert Decimal(values.round12(x)) == want
        assert "E" not in values.round12(x)
    requests: list[tuple[str, list[Any]]] = [("round12", [x]) for x in doubles]
    small = [x for x in doubles if abs(x) < 1e15]
    for x in small:
        assert Decimal(values.fixed(x, 3)) == Decimal(x).quantize(Decimal("0.001"), ROUND_HALF_EVEN, Context(prec=60))
    requests += [("fixed", [x, 3]) for x in small]
    assert twins.python(requests) == twins.javascript(requests)


def test_inward_never_widens_a_limit_and_stays_within_one_step(twins: Any) -> None:
    rnd = random.Random(7)
    requests: list[tuple[str, list[Any]]] = []
    for _ in range(1500):
        text = values.round12(rnd.uniform(-100, 100) * 10 ** rnd.randint(-6, 3))
        step = rnd.choice(["0.1", "0.01", "0.001", "0.5", "0.02", "1", "5", "0.0001"])
        side = rnd.choice(["low", "high"])
        got = Decimal(values.inward(text, step, side))
        rounding = ROUND_FLOOR if side == "high" else ROUND_CEILING
        assert got == (Decimal(text) / Decimal(step)).to_integral_value(rounding) * Decimal(step)
        requests.append(("inward", [text, step, side]))
    assert twins.python(requests) == twins.javascript(requests)


def test_a_limit_worked_out_in_doubles_is_free_of_their_noise() -> None:
    assert values.inward(values.round12(0.42 * 1.4), "0.001", "high") == "0.588"
    assert values.inward(values.round12(0.42 * 1.4), "0.01", "high") == "0.58"
    assert values.inward(values.round12(0.1 * 3), "0.1", "high") == "0.3"


def test_faults_and_names_are_the_same_in_both_languages(twins: Any) -> None:
    requests: list[tuple[str, list[Any]]] = [("faults", []), ("functions", [])]
    assert twins.python(requests) == twins.javascript(requests)


@pytest.mark.parametrize("text", ["1e400", "x", ""])
def test_dec_is_for_texts_that_the_program_made(text: str) -> None:
    with pytest.raises(ValueError, match="plain decimal"):
        values.dec(text)
