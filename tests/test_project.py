"""The house rules that a tree can be asked about: layout, file sizes, leftovers, and one way for imports."""

from __future__ import annotations

import re
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
TOP = {"README.md", "DEVELOPERS.md", "pyproject.toml", "fieldkit", "templates", "static", "tests", "procedures"}


def tracked(*patterns: str) -> list[Path]:
    out = subprocess.run(["git", "ls-files", "--", *patterns], cwd=ROOT, capture_output=True, text=True, check=True)
    files = [ROOT / line for line in out.stdout.splitlines()]
    assert files, f"no tracked files match {patterns}"
    return files


def code() -> list[Path]:
    return [p for p in tracked("fieldkit/*.py", "static/*.js") if "vendor" not in p.parts]


def test_the_top_level_shows_only_what_was_agreed():
    seen = {p.relative_to(ROOT).parts[0] for p in tracked()}
    assert {name for name in seen if not name.startswith(".")} == TOP


def test_no_source_file_is_longer_than_400_lines():
    long = {str(p.relative_to(ROOT)): n for p in code() if (n := len(p.read_text().splitlines())) > 400}
    assert long == {}


def test_every_module_says_what_it_holds():
    silent = [str(p.relative_to(ROOT)) for p in code() if p.suffix == ".py" and not p.read_text().lstrip().startswith(('"""', 'r"""'))]
    assert silent == []


@pytest.mark.parametrize("word", [r"\bTODO\b", r"\bFIXME\b", r"\bXXX\b", "NotImplemented" + "Error"])
def test_nothing_is_left_half_done(word):
    files = [*code(), *[p for p in tracked("templates/*", "procedures/*")]]
    hits = [str(p.relative_to(ROOT)) for p in files if re.search(word, p.read_text())]
    assert hits == []


def test_no_path_of_a_machine_and_no_registry_host_is_written_down():
    pattern = re.compile("/wor" + r"k/|/home/\w+/|files\.python" + r"hosted|registry\.npm" + "js|deb\\.debian")
    text = (".py", ".js", ".md", ".html", ".css", ".yaml", ".toml", ".json", ".mjs", "")
    hits = [str(p.relative_to(ROOT)) for p in tracked() if p.suffix in text and pattern.search(p.read_text(errors="ignore"))]
    assert hits == []


def test_imports_keep_the_contracts():
    script = Path(sys.executable).with_name("lint-imports")
    done = subprocess.run([script], cwd=ROOT, capture_output=True, text=True)
    assert done.returncode == 0, done.stdout[-3000:]


def test_the_core_can_be_imported_without_the_web_or_signing_libraries():
    banned = "flask sqlalchemy wtforms weasyprint pyhanko".split()
    script = (
        "import sys\n"
        "import fieldkit.run.decide, fieldkit.record.build, fieldkit.procedure.compile\n"
        f"print([m for m in {banned!r} if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", script], cwd=ROOT, capture_output=True, text=True)
    assert done.stdout.strip() == "[]", done.stdout + done.stderr
