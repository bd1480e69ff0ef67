"""Runs recorded before instruments had ranges: both engines read them as they did, whatever was added since."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
import run_driver as drive
from run_twin import Twin

from fieldkit.run import events, readings, state

PATHS = sorted((drive.VECTORS / "earlier").glob("*.json"))


def parted(old: Any, new: Any, path: str = "") -> list[str]:
    """Where what stood there before is not there any more; what is new beside it does not count."""
    if isinstance(old, dict) and isinstance(new, dict):
        gone = [f"{path}.{key} is gone" for key in old if key not in new]
        return gone + [p for key in old if key in new for p in parted(old[key], new[key], f"{path}.{key}")]
    if isinstance(old, list) and isinstance(new, list) and len(old) == len(new):
        return [p for i, (a, b) in enumerate(zip(old, new, strict=True)) for p in parted(a, b, f"{path}.{i}")]
    return [] if old == new else [f"{path}: {old!r}, now {new!r}"]


@pytest.mark.parametrize("path", PATHS, ids=lambda p: p.stem)
def test_an_earlier_run_says_all_that_it_said(path: Path, twin: Twin) -> None:
    kept = json.loads(path.read_text())
    assert '"ranges"' not in kept["texts"][0]
    now = state.fold(drive.tiny(), [events.parse(t.encode()) for t in kept["texts"]])
    twin.keep("tiny", drive.tiny().model_dump(mode="json"))
    assert twin.ask(fold="tiny", texts=kept["texts"]) == now
    before = kept["state"]["started"].pop("instruments")
    assert parted(kept["state"], now) == []
    for one in before:
        assert parted(one, readings.instrument(now, one["id"])) == []


def test_there_are_earlier_runs() -> None:
    assert len(PATHS) >= 6


def test_a_difference_would_be_seen() -> None:
    assert parted({"a": [1, {"b": 2}]}, {"a": [1, {"b": 3, "c": 4}]}) == [".a.1.b: 2, now 3"]
    assert parted({"a": 1}, {"b": 1}) == [".a is gone"]
