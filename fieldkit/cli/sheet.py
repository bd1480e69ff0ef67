"""`fieldkit sheet show NAME [--json]`: a compiled procedure as people read it, or the exact bytes that are hashed.

NAME is a procedure that comes with fieldkit, a YAML file, or a stored sheet (.json). Exit 0 shown, 1 it has problems,
2 there is no such procedure.
"""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from fieldkit.cli import check
from fieldkit.files import folder
from fieldkit.procedure.show import show
from fieldkit.sheet import model
from fieldkit.steps.words import near


def arguments(parser: argparse.ArgumentParser) -> None:
    actions = parser.add_subparsers(dest="action", metavar="ACTION", required=True)
    one = actions.add_parser("show", help="show one sheet")
    one.add_argument("name", metavar="NAME", help="a procedure's name, a YAML file, or a stored sheet (.json)")
    one.add_argument("--json", action="store_true", help="the sheet's own bytes")


def run(args: argparse.Namespace) -> int:
    path = _find(args.name)
    if path is None:
        names = [p.stem for p in sorted(folder("procedures").glob("*.yaml"))]
        print(
            f'fieldkit sheet: there is no procedure "{args.name}"; {near(args.name, names)}have: {", ".join(names)}',
            file=sys.stderr,
        )
        return 2
    if path.suffix == ".json":
        return _print(model.from_bytes(path.read_bytes()), args.json)
    found = check.look(path)[0]
    if found.sheet is None:
        print("\n".join(check.tell(p, found.source) for p in found.problems) or f"{found.file}: this is no procedure")
        return 1
    return _print(found.sheet, args.json)


def _find(name: str) -> Path | None:
    path = Path(name)
    if path.suffix in (".yaml", ".json") and path.is_file():
        return path
    shipped = folder("procedures") / f"{name}.yaml"
    return shipped if shipped.is_file() and Path(name).name == name else None


def _print(sheet: model.Sheet, as_json: bool) -> int:
    sys.stdout.write(model.to_bytes(sheet).decode() + "\n" if as_json else show(sheet))
    return 0
