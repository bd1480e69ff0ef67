"""What the browser tests stand on: `server`, a small station that a test may stop and start, and `tablet` (driving.py)."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

HERE = Path(__file__).resolve().parent
# driving.py and small_station.py stand beside the tests and are imported by name
sys.path.insert(0, str(HERE))

from driving import CHROMIUM, ROOT, Server, Tablet  # noqa: E402


@pytest.fixture(scope="module")
def playwright_here() -> Any:
    """The driver, for one file: while it is there an event loop runs in this thread, which other tests cannot have."""
    if not Path(CHROMIUM).exists():
        pytest.skip(f"no browser at {CHROMIUM}: apt-get install chromium")
    from playwright.sync_api import sync_playwright

    with sync_playwright() as made:
        yield made


@pytest.fixture(scope="session")
def station_folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("station")
    env = {**os.environ, "PYTHONPATH": str(ROOT)}
    subprocess.run([sys.executable, str(HERE / "small_station.py"), "build", str(folder)], check=True, env=env)
    return folder


@pytest.fixture
def server(station_folder: Path, tmp_path: Path) -> Any:
    folder = tmp_path / "station"
    shutil.copytree(station_folder, folder)
    made = Server(folder)
    made.start()
    yield made
    made.stop()


@pytest.fixture
def tablet(playwright_here: Any, server: Server, tmp_path: Path) -> Any:
    made = Tablet(playwright_here, tmp_path / "profile", server)
    made.launch()
    made.open()
    yield made
    made.close()
