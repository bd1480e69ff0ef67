"""`fieldkit verify` as a command: what it prints, and exit codes that mean something."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest

from fieldkit.cli import main
from fieldkit.pdf import verify
from fieldkit.pdf.report import Answer, Report

CA = """-----BEGIN CERTIFICATE-----
MIIBgjCCASmgAwIBAgIUJmWl3PLOOH6yH4g1TOOCWC1tuPUwCgYIKoZIzj0EAwIw
-----END CERTIFICATE-----
"""


def _run(*words: str) -> subprocess.CompletedProcess:
    command = [sys.executable, "-m", "fieldkit.cli.main", "verify", *words]
    return subprocess.run(command, capture_output=True, text=True, cwd=Path(__file__).parents[2])


@pytest.fixture
def foreign(tmp_path) -> Path:
    path = tmp_path / "foreign.pdf"
    path.write_bytes(b"%PDF-1.7\nnothing more\n")
    return path


def test_a_foreign_file_exits_1_says_what_is_wrong_and_shows_no_traceback(foreign):
    done = _run(str(foreign))
    assert done.returncode == 1 and "Traceback" not in done.stderr + done.stdout
    assert "FAILS        The file reads as a PDF" in done.stdout
    assert done.stdout.rstrip().splitlines()[-1].startswith("Do not rely on this file. Fails: file")


def test_json_is_for_programs(foreign):
    done = _run(str(foreign), "--json")
    answer = json.loads(done.stdout)
    assert done.returncode == 1 and answer["holds"] is False
    assert [a["code"] for a in answer["answers"]] == [c.code for c in verify.CHECKS]


def test_misuse_exits_2(foreign, tmp_path):
    bad = tmp_path / "ca.pem"
    bad.write_text(CA)
    for words in ([], [str(tmp_path / "none.pdf")], [str(foreign), "--ca", str(tmp_path / "none.pem")],
                  [str(foreign), "--ca", str(bad)], [str(tmp_path)]):  # fmt: skip
        done = _run(*words)
        assert done.returncode == 2 and "Traceback" not in done.stderr, words
        assert done.stderr


def test_exit_0_only_when_all_hold(foreign, monkeypatch, capsys):
    def answers(*states):
        return Report(
            "0" * 64, "Run x", tuple(Answer(f"c{i}", f"Question {i}", s, ("so",)) for i, s in enumerate(states))
        )

    for states, code in (
        (("holds", "note"), 0),
        (("holds", "not checked"), 1),
        (("holds", "fails"), 1),
    ):
        monkeypatch.setattr(verify, "verify", lambda *_, states=states: answers(*states))
        assert main.main(["verify", str(foreign)]) == code
    said = capsys.readouterr().out
    assert "This record holds." in said and "not everything was checked: c1" in said
