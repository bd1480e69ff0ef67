"""What the checker says, file by file: err/NAME.yaml and err/NAME.out are a pair; every file in ok/ is clean.

One command writes the .out files again, to be read before they are committed: REWRITE=1 pytest tests/lint
"""

from __future__ import annotations

import ast
import os
import re
from pathlib import Path

import pytest

import fieldkit
from fieldkit.cli.check import tell
from fieldkit.files import folder
from fieldkit.formula import library
from fieldkit.formula.library import Library
from fieldkit.procedure.compile import compile_bytes

HERE = Path(__file__).parent
WRONG = sorted((HERE / "err").glob("*.yaml"))
RIGHT = sorted((HERE / "ok").glob("*.yaml"))
#: held by every kind that exists; only a new kind that forgets its stop move would show it
UNSEEN = {"fail-cannot-stop"}


@pytest.fixture(scope="module")
def formulas() -> Library:
    return library.load(folder("procedures") / "formulas")


def said(path: Path, formulas: Library) -> str:
    data = path.read_bytes()
    sheet, problems = compile_bytes(data, f"err/{path.name}", formulas)
    assert (sheet is None) == any(p.weight == "problem" for p in problems)
    return "\n".join(tell(p, data.decode()) for p in problems) + "\n"


@pytest.mark.parametrize("path", WRONG, ids=lambda p: p.stem)
def test_the_checker_says_what_is_wrong_and_what_to_write(path: Path, formulas: Library) -> None:
    out = path.with_suffix(".out")
    found = said(path, formulas)
    if os.environ.get("REWRITE"):
        out.write_text(found)
    assert found == out.read_text()
    assert path.stem.startswith(("many", "formula")) or f"[{_code(path)}]" in found


def _code(path: Path) -> str:
    return path.stem.removesuffix("-list")


@pytest.mark.parametrize("path", WRONG, ids=lambda p: p.stem)
def test_every_problem_stands_on_its_own_characters_and_says_a_remedy(path: Path, formulas: Library) -> None:
    lines = path.read_text().split("\n")
    _, problems = compile_bytes(path.read_bytes(), path.name, formulas)
    assert problems
    for problem in problems:
        row = lines[problem.place.line - 1]
        assert problem.place.column <= len(row) + 1
        assert problem.remedy
        assert not re.search(r"[.!]$", problem.message)


@pytest.mark.parametrize("path", RIGHT, ids=lambda p: p.stem)
def test_what_is_right_is_clean(path: Path, formulas: Library) -> None:
    sheet, problems = compile_bytes(path.read_bytes(), path.name, formulas)
    assert problems == []
    assert sheet is not None


def codes_in_the_source() -> set[str]:
    """The code of every Problem that the language and its compiler can add."""
    found = set()
    package = Path(fieldkit.__file__).parent
    for path in [*(package / "steps").glob("*.py"), *(package / "procedure").glob("*.py")]:
        for node in ast.walk(ast.parse(path.read_text())):
            if isinstance(node, ast.Call) and isinstance(node.func, ast.Attribute) and node.func.attr == "add":
                code = node.args[1] if len(node.args) >= 3 else None
                if isinstance(code, ast.Constant) and isinstance(code.value, str):
                    found.add(code.value)
    return found


def test_every_code_has_a_pair() -> None:
    shown = {
        code for path in WRONG for code in re.findall(r"\[([a-z-]+)\]$", path.with_suffix(".out").read_text(), re.M)
    }
    assert codes_in_the_source() - shown - UNSEEN == set()
    assert {path.stem for path in (HERE / "err").glob("*.out")} == {path.stem for path in WRONG}
