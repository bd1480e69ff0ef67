"""`fieldkit calc EXPRESSION [--in UNIT] [--json]`: one sum of numbers and formulas, with its sources and cautions.

`--list [NAME]` shows the formulas, or one of them; so does a formula's name alone. `--formulas FOLDER` adds a station's
own. The first line of an answer is the value alone, or with its uncertainty where a number has a ±: 60 L/min ± 2 %.
Every ± is an expanded uncertainty, k = 2; after `--accuracy` those that were typed are half-widths of what a maker
promises. Exit 0 answered; 1 no answer, and every reason was said; 2 misuse.
Not here: the sum itself (fieldkit.formula.answer), the texts of the list (fieldkit.formula.describe).
"""

from __future__ import annotations

import argparse
import json
import shutil
import sys
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

from fieldkit import values
from fieldkit.cli import check
from fieldkit.errors import Place, Problem
from fieldkit.files import folder
from fieldkit.formula import carried, describe, display
from fieldkit.formula.answer import Answer, Value, answer, asked, in_unit
from fieldkit.formula.carried import COVERAGE, Carried
from fieldkit.formula.library import Library
from fieldkit.formula.spots import Spot, Unreadable, nearest, one_of
from fieldkit.formula.sums import sums

EXAMPLE = "fieldkit calc 'coolant_heat_water(flow=60 L/min, inlet=35 degC, outlet=45 degC)'"


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.epilog = (
        f"Put the expression in quotes: {EXAMPLE}. One that begins with - wants -- before it. "
        "After a number its uncertainty may stand, in percent of it or in a unit: 60 L/min ± 2 %, 35 degC +/- 0.2 K. "
        "The answer then has one too. Every ± is the expanded uncertainty with k = 2 (about 95 %), if not --accuracy."
    )
    parser.add_argument("expression", nargs="*", metavar="EXPRESSION", help="numbers with units, formulas, or a name")
    parser.add_argument("--in", dest="unit", metavar="UNIT", help="show the answer in this unit, like kW")
    parser.add_argument("--digits", type=int, choices=range(1, 13), metavar="N", help="significant digits, 1 to 12")
    parser.add_argument(
        "--accuracy",
        action="store_true",
        help="the ± typed are accuracies as makers state them: half-widths a, so that u = a / sqrt(3)",
    )
    parser.add_argument("--list", nargs="?", const="", metavar="NAME", help="all formulas, one subject, or one formula")
    parser.add_argument("--formulas", type=Path, metavar="FOLDER", help="a station's own formulas, added to the others")
    parser.add_argument("--json", action="store_true", help="the answer for a program to read")


def run(args: argparse.Namespace) -> int:
    wrong = _misuse(args)
    if wrong:
        return _refuse(args, [Problem("calc", Place(1, 1), "misuse", wrong)], 2)
    library = check.formulas_in(_home(args.formulas))
    if any(p.weight == "problem" for p in library.problems):
        return _refuse(args, list(library.problems), 1)
    if args.list is not None:
        return _list(args, library)
    text = args.expression[0]
    if text.strip() in (*library.formulas, *library.pairs):
        return _one(args, text.strip(), library)
    return _answer(args, text, library)


def _home(own: Path | None) -> Path:
    """The folder of formula files: the one that was named, or `formulas/` in it; else what comes with fieldkit."""
    if own is None:
        return folder("procedures") / "formulas"
    return own / "formulas" if (own / "formulas").is_dir() else own


def _misuse(args: argparse.Namespace) -> str:
    """What is wrong with the words of the command; "" where nothing is."""
    if args.formulas is not None and not args.formulas.is_dir():
        return f"there is no folder {args.formulas}; name a folder of formula files"
    if not any(_home(args.formulas).glob("*.yaml")):
        return f"no .yaml file in {args.formulas}; name a folder of formula files"
    if args.list is not None:
        return "an expression and --list do not go together; leave one out" if args.expression else ""
    if len(args.expression) > 1:
        return f"put the whole expression in one pair of quotes, like: {EXAMPLE}"
    if not args.expression or not args.expression[0].strip():
        return f"write an expression in quotes, like: {EXAMPLE}; or --list"
    return ""


def _answer(args: argparse.Namespace, text: str, library: Library) -> int:
    problems: list[Problem] = []
    found: Answer | None = None
    try:
        found = answer(text, library, carried.ACCURACY if args.accuracy else carried.EXPANDED)
    except Unreadable as exc:
        problems += [_problem("expression", text, s) for s in exc.spots]
    try:
        unit = asked(args.unit) if args.unit is not None else None
        found = in_unit(found, unit) if found is not None and unit is not None else found
    except Unreadable as exc:
        problems += [_problem("--in", args.unit, s) for s in exc.spots]
    if found is None or problems:
        return _refuse(args, problems, 1, {"expression": text, "--in": args.unit or ""})
    if args.digits:
        found = replace(found, values=tuple(replace(v, digits=args.digits) for v in found.values))
    print(_dump(as_json(found, args.accuracy)) if args.json else as_text(found, _width(), args.accuracy))
    return 0


def as_text(found: Answer, width: int, accuracy: bool = False) -> str:
    """The value alone on the first line, then its uncertainty, the source and the cautions of every formula named."""
    rows = [found.shown()]
    if found.uncertain:
        parts = {v.name: v.carried for v in found.values}
        rows += describe.uncertainty(parts, found.warnings, width, accuracy)
    for one in found.formulas:
        label = "" if found.whole is not None else f" for {one.name}"
        rows += describe.notes(one, width, label)
    return "\n".join(rows)


def as_json(found: Answer, accuracy: bool = False) -> dict[str, Any]:
    """The same for a program; a pair has `values` in place of one value's keys."""
    whole = found.whole
    cautions = [(one.name, c) for one in found.formulas for c in one.cautions]
    return {
        "expression": found.text,
        **_values(found),
        "shown": found.shown(),
        "formula": whole.name if whole else None,
        "reference": whole.reference if whole else None,
        "stated": ("accuracy" if accuracy else "expanded") if found.uncertain else None,
        "warnings": list(found.warnings),
        "cautions": [c if whole else f"{name}: {c}" for name, c in cautions],
        "sources": {one.name: one.reference for one in found.formulas},
    }


def _values(found: Answer) -> dict[str, Any]:
    if found.flag is not None:
        return {"si": None, "si_unit": None, "value": found.flag, "unit": None, "uncertainty": None}
    if len(found.values) == 1:
        return _value(found.values[0])
    return {"values": [{"name": v.name, **_value(v), "shown": v.shown()} for v in found.values]}


def _value(v: Value) -> dict[str, Any]:
    shown = float(values.to_shown(v.si, v.unit))
    si_unit = display.coherent(v.dimension).symbol
    of = _uncertainty(v, v.carried) if v.carried else None
    return {"si": v.si, "si_unit": si_unit, "value": shown, "unit": v.unit.symbol, "uncertainty": of}


def _uncertainty(v: Value, of: Carried) -> dict[str, Any]:
    """U with k = 2, and the part of each number in it: its own U of the answer, and percent of the variance."""
    shares = [
        {"name": s.name or None, "written": s.written, "si": COVERAGE * abs(s.part), "percent": s.percent}
        for s in of.shares
    ]
    value = float(display.width(of.expanded, v.unit))
    unit = display.difference(v.unit).symbol
    return {"si": of.expanded, "value": value, "unit": unit, "k": COVERAGE, "shares": shares}


def _list(args: argparse.Namespace, library: Library) -> int:
    name = args.list.strip()
    if name in (*library.formulas, *library.pairs):
        return _one(args, name, library)
    known = describe.subjects(library)
    if name and name not in known:
        close = nearest(name, [*known, *library.formulas, *library.pairs])
        remedy = one_of(name, close) or "look at fieldkit calc --list"
        spot = Spot(1, len(name), "unknown-name", f'there is no formula or subject "{name}"', remedy)
        return _refuse(args, [_problem("--list", name, spot)], 1, {"--list": name})
    print(_dump(_listed(sums(library), name)) if args.json else describe.listing(library, name, _width()))
    return 0


def _listed(data: dict[str, Any], subject: str) -> dict[str, Any]:
    """The whole library, or what belongs to one subject."""
    if not subject:
        return data
    kept = {kind: {n: f for n, f in data[kind].items() if f["subject"] == subject} for kind in ("formulas", "pairs")}
    return {**data, "subjects": [s for s in data["subjects"] if s["name"] == subject], **kept}


def _one(args: argparse.Namespace, name: str, library: Library) -> int:
    if args.json:
        data = sums(library)
        print(_dump({"name": name, **(data["formulas"].get(name) or data["pairs"][name])}))
    else:
        print(describe.details(name, library, _width()))
    return 0


def _problem(file: str, text: str, spot: Spot) -> Problem:
    """A spot of an expression as `check` tells the problems of a file; an expression may have several lines."""
    before = text[: spot.column - 1]
    line, column = before.count("\n") + 1, len(before) - (before.rfind("\n") + 1) + 1
    return Problem(file, Place(line, column, spot.width), spot.code, spot.message, spot.remedy)


def _refuse(
    args: argparse.Namespace, problems: list[Problem], code: int, texts: Mapping[str, str] | None = None
) -> int:
    """Says every problem, on stderr or as JSON on stdout, and gives the exit code; `texts` are what was typed."""
    if args.json:
        expression = args.expression[0] if len(args.expression) == 1 else None
        print(_dump({"expression": expression, "problems": [check.problem_json(p) for p in problems]}))
    elif code == 2:
        print("\n".join(f"fieldkit calc: {p.message}" for p in problems), file=sys.stderr)
    else:
        print("\n".join(check.tell(p, (texts or {}).get(p.file) or _source(p.file)) for p in problems), file=sys.stderr)
    return code


def _source(file: str) -> str:
    path = Path(file)
    return path.read_bytes().decode("utf-8", "replace") if path.is_file() else ""


def _width() -> int:
    return min(describe.WIDTH, shutil.get_terminal_size((describe.WIDTH, 24)).columns)


def _dump(data: dict[str, Any]) -> str:
    return json.dumps(data, ensure_ascii=False, indent=1)
