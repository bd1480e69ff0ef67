"""The library as people read it at a terminal: the list by subject, and one formula with all that belongs to it.

    listing(library)              every formula: name(arguments), and what it is
    details("beam_power", library)   arguments with unit and range, unit, source, what it decides, cautions, an example

Not here: the same for programs (sums.py).
"""

from __future__ import annotations

import re
import textwrap
from collections.abc import Iterable, Mapping, Sequence
from typing import Union

from fieldkit import units
from fieldkit.formula import display
from fieldkit.formula.arguments import Argument, any_of
from fieldkit.formula.carried import Carried
from fieldkit.formula.entry import Formula, Pair
from fieldkit.formula.library import Library
from fieldkit.formula.sums import sums

WIDTH = 100


def subjects(library: Library) -> dict[str, list[str]]:
    """The names of formulas and pairs by subject, in the order of the library."""
    return {s["name"]: s["formulas"] for s in sums(library)["subjects"]}


def listing(library: Library, only: str = "", width: int = WIDTH) -> str:
    """Every formula of one subject, or of all of them."""
    rows: list[str] = []
    for subject, names in subjects(library).items():
        if only in ("", subject):
            rows += [subject, *(row for n in names for row in _entry(n, library, width)), ""]
    return "\n".join(rows).rstrip()


def _entry(name: str, library: Library, width: int) -> list[str]:
    one = find(name, library)
    taken = ", ".join(a.name for a in arguments(one, library))
    return [f"  {name}({taken})", *_wrapped("      ", "      ", one.meaning, width)]


def find(name: str, library: Library) -> Union[Formula, Pair]:
    return library.pairs[name] if name in library.pairs else library.formulas[name]


def arguments(one: Union[Formula, Pair], library: Library) -> tuple[Argument, ...]:
    """What a formula takes; what both of a pair take."""
    return library.formulas[one.of[0]].arguments if isinstance(one, Pair) else one.arguments


def details(name: str, library: Library, width: int = WIDTH) -> str:
    """One formula or pair with everything that its entry says."""
    one = find(name, library)
    taken = arguments(one, library)
    rows = [f"{name}({', '.join(a.name for a in taken)})", *_wrapped("", "", one.meaning, width), ""]
    if taken:
        rows += [*_columns([(a.name, _kind(a) + span(a), a.meaning) for a in taken], width), ""]
    rows += _wrapped("Gives: ", "  ", _gives(one, library), width)
    written = one.written if isinstance(one, Formula) else ""
    rows += _wrapped("By: ", "  ", written, width) if written else []
    rows += notes(one, width)
    rows += _wrapped("Decides: ", "  ", one.decides, width)
    example = _example(one, library)
    return "\n".join([*rows, *(["", *example] if example else [])])


def notes(one: Union[Formula, Pair], width: int = WIDTH, label: str = "") -> list[str]:
    """The source and the cautions, as they stand under an answer; `label` says whose they are."""
    rows = _wrapped(f"Source{label}: ", "  ", one.reference, width)
    for caution in one.cautions:
        rows += _wrapped(f"Caution{label}: ", "  ", caution, width)
    return rows


def uncertainty(
    parts: Mapping[str, Carried | None], warnings: Sequence[str], width: int = WIDTH, accuracy: bool = False
) -> list[str]:
    """What the ± of an answer means, and which number it comes from; `parts` are its values by name, one or a pair."""
    rows: list[str] = []
    known = {name: carried for name, carried in parts.items() if carried is not None}
    if known:
        says = "± is the expanded uncertainty, k = 2, typed or worked out."
        if accuracy:
            says = "± of the answer is the expanded uncertainty, k = 2; a ± typed is an accuracy, u = ± / sqrt(3)."
        rows += _wrapped("", "", f"{says} A formula's own error is not in it.", width)
    for name, carried in known.items():
        rows += _shares(f"That of {name}" if len(parts) > 1 else "It", carried)
    for says in warnings:
        rows += _wrapped("Mind: ", "  ", says, width)
    return rows


def _shares(which: str, carried: Carried) -> list[str]:
    """Which number the uncertainty comes from, the largest part first."""
    if not carried.u:
        return [f"{which} is nothing: the answer does not change with what has a ±."]
    wide = [
        max(len(of) for of in column) for column in zip(*((s.name, s.written) for s in carried.shares), strict=True)
    ]
    named = f"  {{:{wide[0]}}}" if wide[0] else ""
    rows = [f"{named.format(s.name)}  {s.written:{wide[1]}}  {_percent(s.percent):>6} %" for s in carried.shares]
    return [f"{which} comes from (share of the variance):", *rows]


def _percent(of: float) -> str:
    return "0" if of == 0.0 else "< 0.1" if of < 0.1 else f"{of:.1f}" if of < 9.95 else f"{of:.0f}"


def span(argument: Argument) -> str:
    """The range of an argument in words: "from 0 to 100 °C", "from 14 on, whole numbers only"."""
    low, high = (
        None if text is None else display.with_unit(display.quantity(text, argument.unit), argument.unit)
        for text in (argument.low, argument.high)
    )
    if low is not None and high is not None:
        words = f"from {display.quantity(argument.low or '0', argument.unit)} to {high}"
    elif low is not None:
        words = f"from {low} on"
    else:
        words = f"up to {high}" if high is not None else f"any size {argument.unit.shown}".rstrip()
    return f"{words}, whole numbers only" if argument.whole else words


def _kind(argument: Argument) -> str:
    """What is said of the unit where any will do."""
    return {"any": "any unit, ", "difference": "a difference in that unit, "}.get(any_of(argument.unit), "")


def _gives(one: Union[Formula, Pair], library: Library) -> str:
    if isinstance(one, Pair):
        first = library.formulas[one.of[0]]
        return f"two values, {one.of[0]} and {one.of[1]}" + (f", in {first.unit.shown}" if first.unit.shown else "")
    if any_of(one.unit):
        return "a value in the unit of the arguments"
    return one.unit.shown or "a plain number"


def _example(one: Union[Formula, Pair], library: Library) -> list[str]:
    """How to ask for it, and the answer that is written for it; of a pair, both answers."""
    formulas = [library.formulas[n] for n in one.of] if isinstance(one, Pair) else [one]
    example = next((e for e in formulas[0].examples if not e.fault), None)
    if example is None:
        return []
    given = ", ".join(f"{a.name}={w}" for a, w in zip(formulas[0].arguments, example.written, strict=True))
    gives = example.gives_written if isinstance(one, Formula) else ""
    return [f"fieldkit calc '{one.name}({given})'", *([f"  {gives}"] if gives else [])]


def _columns(rows: list[tuple[str, str, str]], width: int) -> list[str]:
    wide = [max(len(row[k]) for row in rows) for k in (0, 1)]
    lines: list[str] = []
    for name, ranged, meaning in rows:
        start = f"  {name.ljust(wide[0])}  {ranged.ljust(wide[1])}  "
        lines += _wrapped(start, " " * len(start), meaning, max(width, len(start) + 30))
    return lines


def _wrapped(first: str, later: str, text: str, width: int) -> list[str]:
    """The text in lines, a number and its unit never apart: textwrap breaks at no other space than the plain one."""
    bound = re.sub(r"([0-9]) (\S+)", _bound, " ".join(text.split()))
    rows = textwrap.wrap(
        bound, width, initial_indent=first, subsequent_indent=later, break_long_words=False, break_on_hyphens=False
    )
    return [row.replace("\u00a0", " ") for row in rows]


def _bound(found: re.Match[str]) -> str:
    number, word = found.groups()
    return f"{number}\u00a0{word}" if units.unit(word.rstrip(".,;:)")) is not None else found[0]


def names(library: Library) -> Iterable[str]:
    """Everything that `details` and `listing` know by name."""
    return [*subjects(library), *library.formulas, *library.pairs]
