"""A wheel installed into a clean environment is a whole fieldkit: command, templates, static files, procedures."""

from __future__ import annotations

import subprocess
import sys
import venv
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]

ASK = """
import json
from fieldkit import files
print(json.dumps({n: sorted(p.name for p in files.folder(n).iterdir()) for n in ("templates", "static", "procedures")}))
"""


@pytest.fixture(scope="module")
def python(tmp_path_factory) -> Path:
    """A new environment that has fieldkit's wheel in it, and shares only the third-party packages."""
    place = tmp_path_factory.mktemp("clean")
    subprocess.run([sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", place, ROOT], check=True, capture_output=True)
    wheel = next(place.glob("fieldkit-*.whl"))
    venv.create(place / "env", with_pip=False, symlinks=True)
    python = place / "env" / "bin" / "python"
    site = next((place / "env" / "lib").glob("python*/site-packages"))
    subprocess.run([sys.executable, "-m", "pip", "install", "-q", "--disable-pip-version-check", "--no-index", "--no-deps", "--target", site, wheel], check=True, capture_output=True)
    ours = Path(next(p for p in sys.path if p.endswith("site-packages")))
    # third-party packages by path; the editable fieldkit of this environment is shut out by its .pth not being read
    (site / "others.py").write_text("")
    (site / "third.pth").write_text(str(ours) + "\n")
    return python


def run(python: Path, *args: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run([python, *args], capture_output=True, text=True, cwd=python.parent, timeout=120)


def test_templates_static_files_and_procedures_are_aboard(python):
    done = run(python, "-c", ASK)
    assert done.returncode == 0, done.stderr
    assert "warm-up.yaml" in done.stdout and "core" in done.stdout and "controls" in done.stdout


def test_it_is_the_installed_package_that_answers(python):
    done = run(python, "-c", "import fieldkit; print(fieldkit.__file__)")
    assert str(ROOT) not in done.stdout


def test_the_installed_command_checks_the_shipped_procedures(python):
    done = run(python, "-c", "from fieldkit.cli.main import main; raise SystemExit(main(['check']))")
    assert done.returncode == 0, done.stdout + done.stderr
