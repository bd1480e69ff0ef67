"""`fieldkit check [PATH...] [--json]`: compiles procedures and tries formulas, and tells everything that is wrong.

Without a path: the procedures and formulas that come with fieldkit. A path is a file or a folder; the formulas in a
folder `formulas/` beside the procedures add to the ones that come with fieldkit. Exit 0 clean (warnings are shown),
1 problems, 2 misuse. Not here: what is checked (fieldkit.procedure, fieldkit.formula).
"""

from __future__ import annotations

import argparse
import json
import os
import sys
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path
from typing import Any

from fieldkit.errors import Problem
from fieldkit.files import folder
from fieldkit.formula import library
from fieldkit.formula.library import Library
from fieldkit.procedure.compile import compile_bytes
from fieldkit.sheet import model
from fieldkit.sheet.model import Sheet
from fieldkit.yaml_source import Mapping, Node, Sequence, read

WINDOW = 100


@dataclass(frozen=True)
class Looked:
    """What was found in one file."""

    file: str
    problems: list[Problem]
    sheet: Sheet | None = None
    source: str = ""
    #: of a formula file: what was tried
    tried: str = ""

    @property
    def clean(self) -> bool:
        return not any(p.weight == "problem" for p in self.problems)


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("paths", nargs="*", metavar="PATH", help="a procedure, a formula file, or a folder of them")
    parser.add_argument("--json", action="store_true", help="the answer for a program to read")


def run(args: argparse.Namespace) -> int:
    paths = [Path(p) for p in args.paths] or [folder("procedures")]
    missing = [p for p in paths if not p.exists()]
    for path in missing:
        print(f"fieldkit check: there is no {path}; name a procedure or a folder", file=sys.stderr)
    if missing:
        return 2
    found = [looked for path in paths for looked in look(path)]
    if not found:
        print(f"fieldkit check: no .yaml file in {', '.join(map(str, paths))}", file=sys.stderr)
        return 2
    print(json.dumps(as_json(found), ensure_ascii=False, indent=1) if args.json else as_text(found))
    return 0 if all(one.clean for one in found) else 1


def look(path: Path) -> list[Looked]:
    """Every file at `path`, read, compiled or tried."""
    files = sorted(p for p in path.rglob("*.yaml") if p.is_file()) if path.is_dir() else [path]
    formulas = formulas_for(path)
    return [_look_at(file, _beside(path), formulas) for file in files]


def formulas_for(path: Path) -> Library:
    """The formulas that the procedures at `path`, a file or a folder, may use."""
    return formulas_in(_beside(path))


def _beside(path: Path) -> Path:
    return (path if path.is_dir() else path.parent) / "formulas"


def formulas_in(own: Path) -> Library:
    """The formulas that come with fieldkit and those in the folder `own`, if there is one; the problems of `own`."""
    shipped = folder("procedures") / "formulas"
    if not own.is_dir() or own.resolve() == shipped.resolve():
        return _shipped(shipped)
    return library.load(own, base=_shipped(shipped))


@lru_cache(maxsize=1)
def _shipped(home: Path) -> Library:
    return library.load(home)


def shown(path: Path) -> str:
    """The path as a person in the working folder would write it."""
    relative = os.path.relpath(path)
    return str(path) if relative.startswith("..") else relative


def _look_at(file: Path, home: Path, formulas: Library) -> Looked:
    name, data = shown(file), file.read_bytes()
    source = data.decode("utf-8", "replace")
    node, _ = read(data, name)
    if isinstance(node, Mapping) and "formulas" in node:
        own = formulas if file.parent.resolve() == home.resolve() else formulas_in(file.parent)
        problems = [p for p in own.problems if Path(p.file).resolve() == file.resolve()]
        return Looked(name, problems, None, source, _tried(node.get("formulas")))
    sheet, problems = compile_bytes(data, name, formulas)
    return Looked(name, problems, sheet, source)


def _tried(node: Node | None) -> str:
    """How many formulas and worked examples a file has; all of them were tried."""
    entries = [e.value for e in node if isinstance(e.value, Mapping)] if isinstance(node, Mapping) else []
    examples = [e.get("examples") for e in entries]
    tried = sum(len(x) for x in examples if isinstance(x, Sequence))
    pairs = sum("pair" in e for e in entries)
    counted = [_counted(len(entries) - pairs, "formula"), *([_counted(pairs, "pair")] if pairs else [])]
    return f"{', '.join(counted)}, {_counted(tried, 'worked example')} tried"


def _counted(count: int, word: str) -> str:
    return f"{count} {word}{'' if count == 1 else 's'}"


def as_text(found: list[Looked]) -> str:
    """Problems as people read them, then one line for each file."""
    parts = [tell(p, one.source) for one in found for p in one.problems]
    return "\n".join([*parts, *([""] if parts else []), *(_summary(one) for one in found)])


def _summary(one: Looked) -> str:
    problems = sum(p.weight == "problem" for p in one.problems)
    warnings = len(one.problems) - problems
    counted = [_counted(n, word) for n, word in ((problems, "problem"), (warnings, "warning")) if n]
    state = ", ".join(counted) or "clean"
    if one.sheet is None:
        return f"{one.file}: {state}" + (f"; {one.tried}" if one.tried else "")
    what = f"edition {one.sheet.edition}, {len(one.sheet.steps)} steps, {len(one.sheet.moves)} moves"
    return f"{one.file}: {state}; {what}, sheet {model.digest(model.to_bytes(one.sheet))[:12]}, not proved"


def tell(problem: Problem, source: str) -> str:
    """One problem: where and what, the line of the file with a caret under the place, and what to write instead."""
    place = problem.place
    weight = "" if problem.weight == "problem" else f"{problem.weight}: "
    rows = [f"{problem.file}:{place.line}:{place.column}: {weight}{problem.message} [{problem.code}]"]
    lines = source.split("\n")
    if 1 <= place.line <= len(lines) and lines[place.line - 1].strip():
        rows += _with_caret(lines[place.line - 1], place.column, place.width)
    if problem.remedy:
        rows.append(f"    = {problem.remedy}")
    return "\n".join(rows)


def _with_caret(line: str, column: int, width: int) -> list[str]:
    """The line, cut to a window round the column where it is long, and the caret under it."""
    line = "".join(c if c.isprintable() else " " for c in line)
    start = max(0, column - 1 - WINDOW // 2) if len(line) > WINDOW else 0
    part, at = line[start : start + WINDOW], column - 1 - start
    marks = "^" + "~" * (max(1, min(width, len(part) - at)) - 1)
    return [f"    {part.rstrip()}", f"    {' ' * at}{marks}"]


def as_json(found: list[Looked]) -> dict[str, Any]:
    return {"clean": all(one.clean for one in found), "files": [_json_of(one) for one in found]}


def _json_of(one: Looked) -> dict[str, Any]:
    sheet = None
    if one.sheet is not None:
        sheet = {
            "procedure": one.sheet.procedure,
            "edition": one.sheet.edition,
            "sha256": model.digest(model.to_bytes(one.sheet)),
            "steps": len(one.sheet.steps),
            "moves": len(one.sheet.moves),
            "proved": False,
        }
    return {"file": one.file, "clean": one.clean, "sheet": sheet, "problems": [problem_json(p) for p in one.problems]}


def problem_json(p: Problem) -> dict[str, Any]:
    """One problem for a program: where, code, weight, message, remedy."""
    where = {"file": p.file, "line": p.place.line, "column": p.place.column, "width": p.place.width}
    return {**where, "code": p.code, "weight": p.weight, "message": p.message, "remedy": p.remedy}
