"""Formula files: what is refused, all at once, with places; and what a sheet is given."""

from __future__ import annotations

from pathlib import Path

from fieldkit.files import folder
from fieldkit.formula import check, library, parse
from fieldkit.formula.evaluate import evaluate
from fieldkit.formula.sums import sums
from fieldkit.sheet.model import FormulaUsed
from fieldkit.values import Fault

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
        if formula.arguments:
            assert len(formula.examples) >= 2, formula.name
            assert any(e.fault == "out-of-range" for e in formula.examples), formula.name
        assert any(not e.fault for e in formula.examples), formula.name
        assert all(e.fault or e.source for e in formula.examples), formula.name


WIDER = """\
subject: test
formulas:
  left_over:
    meaning: what is left
    arguments:
      whole_of: {unit: W, low: 0 W, high: 10 W}
      part: {unit: W, low: 0 W, high: 10 W}
    requires:
      - {where: part < whole_of, otherwise: the part must be below the whole}
    expression: whole_of - part
    unit: W
    reference: none needed
    decides: nothing
    plot: {along: part}
    examples:
      - {with: {whole_of: 3 W, part: 1 W}, gives: 2 W, within: 0 W}
      - {with: {whole_of: 3 W, part: 3 W}, fault: out-of-range}
  step:
    meaning: place of a channel
    arguments:
      n: {unit: "1", low: 1, high: 9, whole: true}
    expression: n * 6 MHz
    unit: MHz
    reference: none needed
    decides: nothing
    examples:
      - {with: {n: 2}, gives: 12 MHz, within: 0 MHz}
      - {with: {n: 2.5}, fault: out-of-range}
  nearer:
    meaning: limit drawn in
    arguments:
      limit: {unit: any}
      spread: {unit: any difference, low: 0}
    expression: limit - spread
    unit: any
    reference: none needed
    decides: nothing
    examples:
      - {with: {limit: 40 degC, spread: 2 K}, gives: 38 degC, within: 0 K}
      - {with: {limit: 5 V, spread: 0.5 V}, gives: 4.5 V, within: 0 V}
  further:
    meaning: limit moved out
    arguments:
      limit: {unit: any}
      spread: {unit: any difference, low: 0}
    expression: limit + spread
    unit: any
    reference: none needed
    decides: nothing
    examples:
      - {with: {limit: 5 V, spread: 0.5 V}, gives: 5.5 V, within: 0 V}
  both:
    meaning: limit on both sides
    pair: [nearer, further]
    reference: none needed
    decides: nothing
"""


def test_requirements_whole_numbers_any_unit_and_pairs(tmp_path: Path) -> None:
    assert _codes(tmp_path, WIDER) == []
    read = library.load(tmp_path)
    tree = {"call": "left_over", "of": [{"number": "3"}, {"number": "5"}]}
    fault = evaluate(tree, formulas=read.used(["left_over"]))
    assert isinstance(fault, Fault) and fault.code == "out-of-range"
    assert fault.says == "left_over: the part must be below the whole."
    assert read.pairs["both"].of == ("nearer", "further")


def test_each_mistake_in_the_wider_entries_has_its_place(tmp_path: Path) -> None:
    cases = [
        (("part < whole_of", "part < 3 V"), [("unit-mismatch", 9, 17)]),
        (("part < whole_of", "part + whole_of"), [("unit-mismatch", 9, 17)]),
        (("part < whole_of", "parts < whole_of"), [("unknown-name", 9, 17)]),
        (("otherwise: the part must be below the whole", "else: no"), [("missing-key", 9, 9), ("unknown-key", 9, 34)]),
        (("along: part", "along: parts"), [("unknown-name", 14, 11)]),
        (("whole: true", "whole: yes"), [("not-yes-or-no", 21, 46)]),
        (("[nearer, further]", "[nearer, farther]"), [("unknown-function", 52, 3)]),
        (("[nearer, further]", "[nearer, step]"), [("pair-differs", 52, 3)]),
        (("[nearer, further]", "[nearer]"), [("pair-of-two", 54, 11)]),
        (("spread: 2 K}", "spread: 2 degC}"), [("not-a-quantity", 39, 41)]),
    ]
    for change, codes in cases:
        assert _codes(tmp_path, WIDER.replace(*change, 1)) == codes, change


def test_any_unit_is_one_unit_in_a_call(tmp_path: Path) -> None:
    (tmp_path / "f.yaml").write_text(WIDER, encoding="utf-8")
    formulas = library.load(tmp_path).formulas
    good = {"5 V": "0.1 V", "40 degC": "2 K", "3": "0.5"}
    for limit, spread in good.items():
        parsed = parse.read(f"nearer(limit={limit}, spread={spread})")
        checked = check.check(parsed, {}, library=formulas)
        assert checked.spots == () and checked.kind == check.check(parse.read(limit), {}).kind
    for limit, spread in {"5 V": "0.1 A", "40 degC": "2 degC", "3": "0.5 V"}.items():
        parsed = parse.read(f"nearer(limit={limit}, spread={spread})")
        assert [s.code for s in check.check(parsed, {}, library=formulas).spots] == ["unit-mismatch"], limit


def test_a_pair_in_a_formula_says_which_two_to_use(tmp_path: Path) -> None:
    (tmp_path / "f.yaml").write_text(WIDER, encoding="utf-8")
    read = library.load(tmp_path)
    parsed = parse.read("both(limit=5 V, spread=1 V)")
    (spot,) = check.check(parsed, {}, library=read.formulas, pairs=read.pairs).spots
    assert (spot.code, spot.remedy) == ("pair-not-number", "write nearer or further")


def test_a_folder_adds_to_a_library_and_takes_no_name_of_it(tmp_path: Path) -> None:
    shipped = library.load(folder("procedures") / "formulas")
    own = GOOD.replace("2 * x", "heater_power(voltage=x, current=1 A) / (1 A) * 2")
    (tmp_path / "own.yaml").write_text(own, encoding="utf-8")
    read = library.load(tmp_path, base=shipped)
    assert read.problems == () and set(read.formulas) == {*shipped.formulas, "twice"}
    (tmp_path / "own.yaml").write_text(GOOD.replace("twice", "beam_power"), encoding="utf-8")
    (problem,) = library.load(tmp_path, base=shipped).problems
    assert problem.code == "formula-twice" and "come with fieldkit" in problem.message


def test_the_sums_say_all_that_a_page_needs(tmp_path: Path) -> None:
    (tmp_path / "f.yaml").write_text(WIDER, encoding="utf-8")
    data = sums(library.load(tmp_path))
    assert data["subjects"] == [{"name": "test", "formulas": ["left_over", "step", "both", "nearer", "further"]}]
    left = data["formulas"]["left_over"]
    assert left["plot"] == {"along": "part"} and left["example"] == {
        "with": {"whole_of": "3 W", "part": "1 W"},
        "gives": "2 W",
    }
    assert [a["any"] for a in data["formulas"]["nearer"]["arguments"]] == ["any", "difference"]
    assert data["formulas"]["step"]["arguments"][0]["whole"] is True
    assert data["pairs"]["both"]["of"] == ["nearer", "further"]
    tree = {"call": "left_over", "of": [{"number": "3"}, {"number": "1"}]}
    assert evaluate(tree, formulas=data["formulas"]) == 2.0
