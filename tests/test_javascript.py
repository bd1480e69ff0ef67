"""The JavaScript of the tablet: its own tests under Node, and its types, checked from the comments it carries."""

from __future__ import annotations

import shutil
import subprocess
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
JS = ROOT / "tests" / "js"
MODULES = JS / "node_modules"

needs_node = pytest.mark.skipif(shutil.which("node") is None, reason="no Node here: apt-get install nodejs npm")
needs_modules = pytest.mark.skipif(not MODULES.is_dir(), reason="npm packages are missing: npm ci --prefix tests/js")


def done(*command: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(command, cwd=ROOT, capture_output=True, text=True, timeout=300)


@needs_node
@needs_modules
@pytest.mark.parametrize("folder", ["plumbing", "ui"])
def test_node_finds_nothing_wrong(folder):
    files = sorted(str(p) for p in (JS / folder).glob("*.test.mjs"))
    assert files
    ran = done("node", "--test", "--test-reporter=tap", *files)
    assert ran.returncode == 0, "\n".join(line for line in ran.stdout.splitlines() if "ok" in line or "error" in line)
    passed = next(int(line.split()[-1]) for line in ran.stdout.splitlines() if line.startswith("# pass"))
    assert passed >= len(files)


@needs_node
@needs_modules
@pytest.mark.parametrize("config", ["tsconfig.json", "tsconfig.worker.json"])
def test_types_hold(config):
    ran = done(str(MODULES / ".bin" / "tsc"), "-p", str(JS / config), "--pretty", "false")
    assert ran.returncode == 0, ran.stdout


def test_every_module_of_core_and_tablet_is_type_checked():
    """The two configurations between them leave no file out, and none opts out by itself."""
    import json

    page = json.loads((JS / "tsconfig.json").read_text())
    worker = json.loads((JS / "tsconfig.worker.json").read_text())
    assert page["exclude"] == worker["include"]
    assert page["compilerOptions"]["strict"] is page["compilerOptions"]["checkJs"] is True
    files = [*(ROOT / "static" / "core").rglob("*.js"), *(ROOT / "static" / "tablet").rglob("*.js")]
    assert len(files) > 40
    assert [p.name for p in files if "@ts-nocheck" in p.read_text(encoding="utf-8")] == []
