"""Formula files: what is refused, all at once, with places; and what a sheet is given."""

from __future__ import annotations

from pathlib import Path

from fieldkit.files import folder
from fieldkit.formula import library
from fieldkit.sheet.model import FormulaUsed

GOOD = """\
subject: test
formulas:
  twice:
    meaning: two of it
    arguments:
      x: {unit: V, low: 0 V, high: 1 kV}
    expression: 2 * x
    unit: V
    reference: none needed
    decides: nothing
    examples:
      - {with: {x: 3 V}, gives: 6 V, within: 0 V}
"""


def _codes(tmp_path: Path, *texts: str) -> list[tuple[str, int, int]]:
    for k, text in enumerate(texts):
        (tmp_path / f"f{k}.yaml").write_text(text, encoding="utf-8")
    return [(p.code, p.place.line, p.place.column) for p in library.load(tmp_path).problems]


def test_a_good_file_has_no_problem(tmp_path: Path) -> None:
    assert _codes(tmp_path, GOOD) == []


def test_each_mistake_has_its_place(tmp_path: Path) -> None:
    cases = [
        (("2 * x", "2 * y"), [("unknown-name", 7, 21)]),
        (("2 * x", "x * x"), [("unit-mismatch", 7, 17)]),
        (("2 * x", "2 *"), [("formula-syntax", 7, 19)]),
        (("2 * x", "thrice(x=x)"), [("unknown-function", 7, 17)]),
        (("gives: 6 V", "gives: 7 V"), [("example-differs", 12, 9)]),
        (("gives: 6 V", "gives: 6 A"), [("not-a-quantity", 12, 33)]),
        (("gives: 6 V", "gives: 6V"), [("no-space-before-unit", 12, 33)]),
        (("x: 3 V}", "x: 3000 V}"), [("example-differs", 12, 9)]),
        (("x: 3 V}", "z: 3 V}"), [("missing-key", 12, 16), ("unknown-key", 12, 17)]),
        (("unit: V\n", "unit: volts\n"), [("unknown-unit", 8, 11)]),
        (("    decides: nothing\n", ""), [("missing-key", 4, 5)]),
        (("    decides", "    decide"), [("missing-key", 4, 5), ("unknown-key", 10, 5)]),
        (("  twice:", "  sqrt:"), [("formula-name", 3, 3)]),
        (("  twice:", "  Twice:"), [("formula-name", 3, 3)]),
        (("expression: 2 * x", "expression: [2]"), [("not-a-text", 7, 17)]),
        (("    expression: 2 * x\n", ""), [("formula-body", 4, 5)]),
        (("subject: test", "subjects: test"), [("unknown-key", 1, 1)]),
        (("with: {x: 3 V}", "with: 3 V"), [("not-a-block", 12, 16)]),
        (("within: 0 V}", "within: 0 V, fault: no}"), [("unknown-fault", 12, 9)]),
        (("low: 0 V", "low: 0 A"), [("not-a-quantity", 6, 25)]),
    ]
    for change, codes in cases:
        text = GOOD.replace(*change)
        assert text != GOOD, change
        assert _codes(tmp_path, text) == codes, change


def test_all_mistakes_are_told_at_once(tmp_path: Path) -> None:
    text = GOOD.replace("2 * x", "2 * y").replace("    decides: nothing\n", "") + "extra: 1\n"
    assert [c for c, _, _ in _codes(tmp_path, text, GOOD.replace("unit: V,", "unit: Vv,"))] == [
        "missing-key",
        "unknown-key",
        "unknown-unit",
    ]


def test_a_circle_and_a_second_definition_are_refused(tmp_path: Path) -> None:
    other = GOOD.replace("twice:", "thrice:").replace("2 * x", "twice(x=x) + x").replace("gives: 6 V", "gives: 9 V")
    assert _codes(tmp_path, GOOD, other) == []
    assert _codes(tmp_path, GOOD, GOOD) == [("formula-twice", 3, 3)]
    circle = GOOD.replace("2 * x", "thrice(x=x)")
    assert _codes(tmp_path, circle, other) == [("formula-circle", 3, 3), ("formula-circle", 3, 3)]


def test_tables_are_held_to_their_form(tmp_path: Path) -> None:
    def table(body: str) -> list[tuple[str, int, int]]:
        return _codes(tmp_path, GOOD.replace("expression: 2 * x", f"table: {body}").replace("x: 3 V}", "x: 1 V}"))

    assert table("{of: x, x: [0, 2], y: [0, 12]}") == []
    assert table("{of: z, x: [0, 2], y: [0, 12]}")[0][0] == "unknown-name"
    assert table("{of: x, x: [0, 2], y: [0]}")[0][0] == "table-length"
    assert table("{of: x, x: [2, 0], y: [0, 12]}")[0][0] == "table-order"
    assert table("{of: x, x: [0, a], y: [0, 12]}")[0][0] == "not-a-number"
    assert table("{of: x, x: 0, y: [0, 12]}")[0][0] == "not-a-list"


def test_every_problem_says_what_to_do(tmp_path: Path) -> None:
    (tmp_path / "a.yaml").write_text(GOOD.replace("2 * x", "2 * y").replace("decides", "decide"), encoding="utf-8")
    for problem in library.load(tmp_path).problems:
        assert problem.remedy and problem.file.endswith("a.yaml")


def test_a_sheet_gets_a_formula_with_all_that_it_uses() -> None:
    used = library.load(folder("procedures") / "formulas").used(["coolant_heat_water"])
    assert list(used) == ["coolant_heat_water", "water_density", "water_heat_capacity"]
    for entry in used.values():
        assert FormulaUsed.model_validate(entry).name == entry["name"]


def test_formulas_that_come_with_the_project_name_their_source_and_their_cautions() -> None:
    for formula in library.load(folder("procedures") / "formulas").formulas.values():
        assert formula.meaning and formula.reference and formula.decides
        assert len(formula.examples) >= 2, formula.name
        assert any(e.fault == "out-of-range" for e in formula.examples), formula.name
        assert all(e.fault or e.source for e in formula.examples), formula.name
