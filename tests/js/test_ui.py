"""What the tablet's screens say, tried in Node without a page: words, spoken numbers, rows of the strip."""

from __future__ import annotations

import shutil
import subprocess
from pathlib import Path

import pytest

HERE = Path(__file__).resolve().parent


@pytest.mark.skipif(shutil.which("node") is None, reason="node is not installed: apt-get install nodejs")
@pytest.mark.parametrize("file", sorted(p.name for p in (HERE / "ui").glob("*.test.mjs")))
def test_what_the_screens_say_without_a_page(file: str) -> None:
    done = subprocess.run(["node", "--test", str(HERE / "ui" / file)], capture_output=True, text=True, timeout=120, check=False)
    assert done.returncode == 0, done.stdout[-4000:] + done.stderr[-2000:]
    assert "# tests 0" not in done.stdout
