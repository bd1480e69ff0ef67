"""What the README says can be done: its procedure checks clean, its commands exist, its pictures are there."""

from __future__ import annotations

import re
from pathlib import Path

from fieldkit import files
from fieldkit.cli.main import COMMANDS, main

ROOT = Path(__file__).resolve().parents[1]
TEXT = (ROOT / "README.md").read_text(encoding="utf-8")


def test_the_procedure_of_the_readme_checks_clean(tmp_path, capsys):
    block = re.search(r"((?:^    .*\n|^\n)+)", TEXT[TEXT.index("    procedure: heater-look") :], re.M)
    example = tmp_path / "heater-look.yaml"
    example.write_text(re.sub(r"^    ", "", block.group(1), flags=re.M).strip() + "\n", encoding="utf-8")
    assert main(["check", str(example)]) == 0, capsys.readouterr().out


def test_every_command_that_the_readme_names_exists():
    named = set(re.findall(r"`?fieldkit (check|demo|serve|sheet|verify|rehearse|calc|backup|doctor)\b", TEXT))
    assert {"check", "demo", "serve", "sheet", "verify"} <= named <= {command.name for command in COMMANDS}


def test_the_sum_of_the_readme_gives_what_it_shows(capsys):
    shown = re.findall(r"^    \$ fieldkit calc '([^']+)'\n((?:    .+\n)+)", TEXT, re.M)
    assert len(shown) >= 2
    for expression, block in shown:
        assert main(["calc", expression]) == 0
        lines = [line.removeprefix("    ") for line in block.splitlines()]
        assert capsys.readouterr().out.splitlines()[: len(lines)] == lines


def test_the_pictures_and_files_that_the_readme_shows_are_there():
    named = re.findall(r"\]\((\.readme/[^)]+)\)", TEXT) + re.findall(r"`((?:procedures|tests)/[\w./-]+)`", TEXT)
    assert len(named) >= 5
    assert [name for name in named if not (ROOT / name).exists()] == []
    assert files.folder("procedures").is_dir()


def test_it_opens_with_one_paragraph_that_states_the_job():
    first, _, rest = TEXT.partition("\n\n")
    assert first.startswith("fieldkit is a field checklist") and "\n" not in first and rest
