"""`fieldkit check` and `fieldkit sheet`: what they print, and the exit codes that mean something."""

from __future__ import annotations

import json
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from fieldkit.cli import main as command_line
from fieldkit.cli.check import tell
from fieldkit.cli.main import COMMANDS, main
from fieldkit.errors import Place, Problem
from fieldkit.files import folder
from fieldkit.sheet import model

STEPS = Path(__file__).resolve().parents[1] / "steps"
WRONG = Path(__file__).resolve().parents[1] / "lint" / "err"


def misuse(*words: str) -> int:
    with pytest.raises(SystemExit) as ended:
        main(list(words))
    return int(ended.value.code or 0)


def test_what_comes_with_fieldkit_is_clean(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check"]) == 0
    out = capsys.readouterr().out
    assert "warm-up.yaml: clean; edition 1" in out
    assert "hv-bring-up.yaml: clean; edition 1" in out
    assert "not proved" in out


def test_problems_end_with_1_and_stand_above_the_summary(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", str(WRONG / "many-at-once.yaml")]) == 1
    out = capsys.readouterr().out.split("\n")
    assert out[0].endswith('"x" is not a whole number from 1 to 9999 [bad-number]')
    assert out[-2].endswith("many-at-once.yaml: 6 problems")


def test_a_warning_is_shown_and_does_not_stop(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", str(WRONG / "no-why.yaml")]) == 0
    out = capsys.readouterr().out
    assert "warning: a wait stands here without its reason [no-why]" in out
    assert "1 warning; edition 1" in out


def test_a_folder_is_every_file_in_it(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", str(STEPS)]) == 0
    assert len(capsys.readouterr().out.strip().split("\n")) == len(list(STEPS.glob("*.yaml")))


def test_a_path_that_is_not_there_is_misuse(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    assert main(["check", str(tmp_path / "none.yaml")]) == 2
    assert main(["check", str(tmp_path)]) == 2
    said = capsys.readouterr()
    assert "there is no" in said.err and "no .yaml file" in said.err
    assert said.out == ""


def test_unknown_words_are_misuse() -> None:
    assert misuse("chekc") == 2
    assert misuse("check", "--jsno") == 2
    assert misuse() == 2


def test_json_says_the_same_for_programs(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", "--json", str(WRONG / "many-at-once.yaml"), str(STEPS / "act.yaml")]) == 1
    answer = json.loads(capsys.readouterr().out)
    wrong, right = answer["files"]
    assert not answer["clean"] and not wrong["clean"] and right["clean"]
    first = wrong["problems"][0]
    assert (first["line"], first["column"], first["code"], first["weight"]) == (2, 10, "bad-number", "problem")
    assert right["sheet"]["steps"] == 1 and len(right["sheet"]["sha256"]) == 64


OWN = """\
subject: station
formulas:
  hall_heat:
    meaning: heat of one valve and its heater
    arguments:
      voltage: {unit: kV, low: 0 kV, high: 60 kV, meaning: beam voltage}
      current: {unit: A, low: 0 A, high: 10 A, meaning: beam current}
    expression: beam_power(voltage=voltage, current=current) + 200 W
    unit: kW
    reference: of the station
    decides: whether the fan is enough
    examples:
      - {with: {voltage: 34 kV, current: 2.2 A}, gives: 75 kW, within: 0.001 kW, source: by hand}
"""


def station(tmp_path: Path, text: str = OWN) -> Path:
    """A folder with one formula file."""
    own = tmp_path / "formulas"
    own.mkdir(exist_ok=True)
    (own / "own.yaml").write_text(text)
    return own


def test_a_formula_file_is_tried_on_its_examples(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    own = station(tmp_path)
    assert main(["check", str(own / "own.yaml")]) == 0
    assert capsys.readouterr().out.endswith("own.yaml: clean; 1 formula, 1 worked example tried\n")
    (own / "own.yaml").write_text(OWN.replace("200 W", "300 W"))
    assert main(["check", str(own / "own.yaml")]) == 1
    assert "[example-differs]" in capsys.readouterr().out


def test_a_folders_formulas_add_to_those_that_come_with_fieldkit(
    capsys: pytest.CaptureFixture[str], tmp_path: Path
) -> None:
    station(tmp_path)
    calls = "hall_heat(voltage=volts, current=amps) / beam_power(voltage=volts, current=amps) * volts / amps"
    step = (STEPS / "work_out.yaml").read_text().replace("volts / amps", calls)
    (tmp_path / "work-out.yaml").write_text(step)
    for path in (tmp_path, tmp_path / "work-out.yaml"):
        assert main(["check", str(path)]) == 0
        assert "work-out.yaml: clean" in capsys.readouterr().out


def test_a_name_that_comes_with_fieldkit_is_taken_and_told_at_the_stations_file(
    capsys: pytest.CaptureFixture[str], tmp_path: Path
) -> None:
    station(tmp_path, OWN.replace("hall_heat", "heater_power"))
    assert main(["check", "--json", str(tmp_path)]) == 1
    (file,) = json.loads(capsys.readouterr().out)["files"]
    assert file["file"].endswith("own.yaml")
    assert [(p["code"], p["line"], p["column"]) for p in file["problems"]] == [("formula-twice", 3, 3)]


def test_a_copy_of_what_comes_with_fieldkit_is_no_clash(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    shutil.copytree(folder("procedures"), tmp_path / "copy")
    station(tmp_path / "copy")
    assert main(["check", str(tmp_path / "copy")]) == 0, capsys.readouterr().out
    beam = tmp_path / "copy" / "formulas" / "beam.yaml"
    beam.write_text(beam.read_text() + "# changed\n")
    assert main(["check", str(tmp_path / "copy")]) == 1
    assert '"beam_power" is already among the formulas that come with fieldkit' in capsys.readouterr().out


def test_the_caret_stands_under_the_place_even_in_a_very_long_line() -> None:
    line = "x" * 5000 + "HERE" + "y" * 5000
    said = tell(Problem("f.yaml", Place(1, 5001, 4), "code", "wrong", "write it right"), line).split("\n")
    assert len(said[1]) < 130
    assert said[1][said[2].index("^") :].startswith("HERE")
    assert said[2].strip() == "^~~~"
    assert said[3] == "    = write it right"


def test_sheet_show_prints_every_step_and_the_same_sheet_every_time(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["sheet", "show", "warm-up"]) == 0
    shown = capsys.readouterr().out
    assert main(["sheet", "show", "warm-up", "--json"]) == 0
    data = capsys.readouterr().out.encode().rstrip(b"\n")
    sheet = model.from_bytes(data)
    assert model.digest(data) in shown
    assert all(f" {step.id} (" in shown for step in sheet.steps)
    assert "limits: heater_voltage_low to heater_voltage_high (nameplate); guarded" in shown
    assert "limits: dew_point + 5 to inlet_max" in shown


def test_sheet_show_reads_a_stored_sheet_and_refuses_a_damaged_one(
    capsys: pytest.CaptureFixture[str], tmp_path: Path
) -> None:
    assert main(["sheet", "show", str(STEPS / "read.yaml"), "--json"]) == 0
    stored = tmp_path / "sheet.json"
    stored.write_text(capsys.readouterr().out.rstrip("\n"))
    assert main(["sheet", "show", str(stored)]) == 0
    assert "Ion-pump current" in capsys.readouterr().out
    stored.write_text(stored.read_text().replace('"sheet/1"', '"sheet/9"'))
    assert main(["sheet", "show", str(stored)]) == 1
    assert "[unknown-version]" in capsys.readouterr().err


def test_sheet_show_of_what_does_not_compile_tells_the_problems(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["sheet", "show", str(WRONG / "bad-limits.yaml")]) == 1
    assert "[bad-limits]" in capsys.readouterr().out
    assert main(["sheet", "show", "warmup"]) == 2
    assert 'did you mean "warm-up"' in capsys.readouterr().err


def test_every_command_is_a_module_with_arguments_and_run() -> None:
    for command in COMMANDS:
        path = Path(command_line.__file__).parent / f"{command.module.rsplit('.', 1)[1]}.py"
        text = path.read_text()
        assert "def arguments(" in text and "def run(" in text, command.name


def test_the_version_and_the_program_itself() -> None:
    done = subprocess.run([sys.executable, "-m", "fieldkit.cli.main", "--version"], capture_output=True, text=True)
    assert done.returncode == 0
    assert done.stdout.startswith("fieldkit ")


def test_checking_needs_no_server_library() -> None:
    code = (
        "import sys; from fieldkit.cli.main import main; main(['check']);"
        "print(sorted({'flask', 'sqlalchemy', 'weasyprint', 'pyhanko', 'wtforms'} & set(sys.modules)))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True)
    assert done.stdout.strip().endswith("[]"), done.stdout + done.stderr
