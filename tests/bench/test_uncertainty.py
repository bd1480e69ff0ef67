"""A formula's value with its units checked and its uncertainty carried: ours against pint with uncertainties, as ratios.

Inside both, for every evaluation: each reading begins as the text that was typed, with its unit and its standard
uncertainty in that unit, and becomes a quantity; the formula is worked out; the answer ends as a number and its standard
uncertainty in the unit that people see.

Ours: decimal text exactly to SI, the ranges of the arguments and what the formula requires, derivatives, contributions by
source and their sum. The units of the call are checked once, before (fieldkit.formula.check), as a procedure's are when
it is compiled. pint finds out units again at each operation, and looks at no ranges; nothing is parsed but the number,
since its unit is an object. Two ways of pint: its measurements (`plus_minus`), which is how it works with uncertainties
by its own documentation, held to ten times where there is more than a product or quotient; and Quantities of a ufloat put
together by hand, its fastest, shown beside, where a bare product comes to about eight times, because most of our time goes
into reading what was typed. exp is that of uncertainties.umath, of the plain number. The goes take turns, and the least of
them counts.

pytest tests/bench/test_uncertainty.py
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from typing import Any

import pint
import pytest
from bench import Ratios, Watch
from uncertainties import ufloat, umath

from fieldkit import units, values
from fieldkit.files import folder
from fieldkit.formula import check, library, parse, slopes, spread

pytestmark = pytest.mark.bench
GOES, TURNS = 40, 100
REGISTRY = pint.UnitRegistry()


def _discharge(initial: Any, resistance: Any, capacitance: Any, time: Any) -> Any:
    spent = (time / (resistance * capacitance)).to(REGISTRY.dimensionless).magnitude
    return initial * umath.exp(-spent)


def _vswr(forward: Any, reflected: Any) -> Any:
    root = (reflected / forward) ** 0.5
    return (1 + root) / (1 - root)


@dataclass(frozen=True)
class Case:
    """A formula of the library, readings as (text, unit, its name in pint, standard uncertainty), and the answer's unit."""

    name: str
    readings: dict[str, tuple[str, str, str, float]]
    unit: tuple[str, str]
    law: Callable[..., Any]
    #: a bare product or quotient comes out so near to ten that chance would decide: 10.6 to 11.8 when this was written
    least: float = 10.0


CASES = (
    Case(
        "beam_power",
        {"voltage": ("34.00", "kV", "kilovolt", 0.1), "current": ("2.200", "A", "ampere", 0.01)},
        ("kW", "kilowatt"),
        lambda voltage, current: voltage * current,
        least=7.0,
    ),
    Case(
        "beam_efficiency",
        {
            "rf_power": ("28.0", "kW", "kilowatt", 0.5),
            "voltage": ("34.00", "kV", "kilovolt", 0.1),
            "current": ("2.200", "A", "ampere", 0.01),
        },
        ("1", "dimensionless"),
        lambda rf_power, voltage, current: rf_power / (voltage * current),
        least=7.0,
    ),
    Case(
        "discharge_voltage",
        {
            "initial": ("35.0", "kV", "kilovolt", 0.2),
            "resistance": ("2.000", "Mohm", "megaohm", 0.02),
            "capacitance": ("20.00", "uF", "microfarad", 0.3),
            "time": ("40.0", "s", "second", 0.3),
        },
        ("kV", "kilovolt"),
        _discharge,
        least=7.0,
    ),
    Case(
        "collector_dissipation",
        {
            "voltage": ("34.00", "kV", "kilovolt", 0.1),
            "current": ("2.200", "A", "ampere", 0.01),
            "rf_power": ("28.0", "kW", "kilowatt", 0.5),
            "body_current": ("12.0", "mA", "milliampere", 0.3),
        },
        ("kW", "kilowatt"),
        lambda voltage, current, rf_power, body_current: voltage * current - rf_power - voltage * body_current,
    ),
    Case(
        "class_b_dissipation",
        {
            "voltage": ("34.00", "kV", "kilovolt", 0.1),
            "full_current": ("2.200", "A", "ampere", 0.01),
            "full_power": ("40.0", "kW", "kilowatt", 0.8),
            "power": ("28.0", "kW", "kilowatt", 0.5),
        },
        ("kW", "kilowatt"),
        lambda voltage, full_current, full_power, power: voltage * full_current * (power / full_power) ** 0.5 - power,
    ),
    Case(
        "vswr",
        {"forward": ("50.0", "kW", "kilowatt", 1.0), "reflected": ("200", "W", "watt", 8.0)},
        ("1", "dimensionless"),
        _vswr,
    ),
)


@pytest.fixture(scope="module")
def aboard() -> library.Library:
    found = library.load(folder("procedures") / "formulas")
    assert found.problems == ()
    return found


def _unit(symbol: str) -> units.Unit:
    found = units.unit(symbol)
    assert found is not None, symbol
    return found


def ours(aboard: library.Library, case: Case) -> Callable[[], tuple[float, float]]:
    call = f"{case.name}({', '.join(f'{n}={n}' for n in case.readings)})"
    shown, given = _unit(case.unit[0]), {n: (text, _unit(u), s) for n, (text, u, _, s) in case.readings.items()}
    kinds = {n: unit.dimension for n, (_, unit, _) in given.items()}
    checked = check.check(parse.read(call), kinds, library=aboard.formulas, want=shown.dimension)
    assert checked.spots == ()
    ready = slopes.prepare(parse.parse(call, aboard.signatures()), aboard.used([case.name]))
    sources = {n: (f"reading {n}", float(unit.factor)) for n, (_, unit, _) in given.items()}
    factor = float(shown.factor)

    def work() -> tuple[float, float]:
        found = ready.gradient({n: values.to_si(text, unit) for n, (text, unit, _) in given.items()})
        worth = {n: {source: given[n][2] * scale} for n, (source, scale) in sources.items()}
        u = spread.standard(spread.contributions(found.of, worth))
        return found.value / factor, u / factor

    return work


def by_hand(text: str, unit: Any, spread_: float) -> Any:
    """A reading as a Quantity of a ufloat."""
    return REGISTRY.Quantity(ufloat(float(text), spread_), unit)


def measured(text: str, unit: Any, spread_: float) -> Any:
    """A reading as pint's documentation has it."""
    return REGISTRY.Quantity(float(text), unit).plus_minus(spread_)


def by_pint(case: Case, reading: Callable[[str, Any, float], Any]) -> Callable[[], tuple[float, float]]:
    given = {n: (text, getattr(REGISTRY, u), s) for n, (text, _, u, s) in case.readings.items()}
    shown = getattr(REGISTRY, case.unit[1])

    def work() -> tuple[float, float]:
        answer = case.law(**{n: reading(text, u, s) for n, (text, u, s) in given.items()})
        found = answer.to(shown).magnitude
        return found.nominal_value, found.std_dev

    return work


def turns(work: Callable[[], Any]) -> None:
    for _ in range(TURNS):
        work()


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
def test_formulas_are_ten_times_as_fast_as_pint_with_uncertainties(
    case: Case, aboard: library.Library, show: Callable[[Ratios], None]
) -> None:
    work = {
        "ours, with ranges and units": ours(aboard, case),
        "pint's measurements": by_pint(case, measured),
        "pint's quantities of ufloats": by_pint(case, by_hand),
    }
    mine, *theirs = (one() for one in work.values())
    assert all(mine == pytest.approx(one, rel=1e-12) for one in theirs)
    watches = {name: Watch() for name in work}
    for _ in range(GOES):
        for name, one in work.items():
            watches[name].go(partial(turns, one))
    (floor, took), *others = ((name, watch.processor) for name, watch in watches.items())
    show(Ratios(f"{case.name} with its uncertainty, {TURNS} times", floor, took, others))
    assert others[0][1] >= case.least * took, (took, others)
