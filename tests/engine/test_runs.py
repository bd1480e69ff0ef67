"""Frozen runs: what each script gives stands in tests/vectors/runs/, and both engines give it.

Codes are compared, not the prose of refusals; the prose of both engines is compared with each other in test_walk.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
import run_driver as drive
import run_vectors
from run_twin import Twin

from fieldkit.run import events, state

PATHS = sorted(run_vectors.FOLDER.glob("*.json"))


def load(path: Path) -> dict[str, Any]:
    return dict(json.loads(path.read_text()))


def expected(vector: dict[str, Any], said: list[Any]) -> None:
    """What was said at each step is what the script says."""
    asked = [m for m in vector["script"] if set(m) & {"do", "refuse", "see"}]
    assert len(asked) == len(said)
    for moment, answer in zip(asked, said, strict=True):
        if "do" in moment:
            assert "events" in answer, (moment, answer)
        elif "refuse" in moment:
            assert answer.get("refused", {}).get("code") == moment["code"], (moment, answer)
            assert answer["refused"]["says"].endswith(".")
        else:
            assert {key: answer[key] for key in moment["see"]} == moment["see"]


@pytest.mark.parametrize("path", PATHS, ids=lambda p: p.stem)
def test_a_script_gives_what_is_frozen(path: Path) -> None:
    vector = load(path)
    d, _, said = run_vectors.play(vector)
    expected(vector, said)
    assert d.texts == vector["texts"]
    assert d.state == vector["state"]
    assert state.fold(d.sheet, [events.parse(t.encode()) for t in vector["texts"]]) == vector["state"]


@pytest.mark.parametrize("path", PATHS, ids=lambda p: p.stem)
def test_the_tablet_gives_what_is_frozen(path: Path, twin: Twin) -> None:
    vector = load(path)
    sheet = vector.get("sheet", "tiny")
    twin.keep(sheet, drive.frozen(sheet).model_dump(mode="json"))
    d, steps, _ = run_vectors.play(vector)
    played = twin.ask(play=sheet, run=d.first["run"], chain=d.first["chain"], sha256=drive.SHEET_SHA, steps=steps)
    expected(vector, played["said"])
    assert played["state"] == vector["state"]
    assert twin.ask(fold=sheet, texts=vector["texts"]) == vector["state"]


def test_every_vector_says_what_it_shows() -> None:
    assert PATHS
    for path in PATHS:
        assert len(load(path)["shows"]) > 30, path.name
