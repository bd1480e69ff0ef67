"""caution: read aloud to everyone present; signal word, hazard, consequence, how to avoid it (ANSI Z535)."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.errors import Collector
from fieldkit.sheet.controls import SIGNALS, Caution
from fieldkit.steps import base, words
from fieldkit.steps.base import Kind, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import Written, key
from fieldkit.yaml_source import Node


@dataclass(frozen=True, kw_only=True)
class Panel(Written):
    signal: str = key(
        words.one_of(*SIGNALS), "DANGER kills, WARNING may kill, CAUTION injures, NOTICE damages", required=True
    )
    hazard: str = key(words.text, "what can hurt", required=True)
    consequence: str = key(words.text, "what happens then", default="")
    avoid: tuple[str, ...] = key(words.list_of(words.text), "how to avoid it, one line each", required=True)


def _panel(node: Node, found: Collector) -> Panel | None:
    return words.read_model(Panel, node, found, "a caution")


@dataclass(frozen=True, kw_only=True)
class CautionStep(StepWritten):
    panel: Panel = key(
        words.Word("signal, hazard, consequence, avoid", _panel), "the signal panel", required=True, name="caution"
    )


def lower(written: CautionStep, id_: str, scope: Scope) -> Piece:
    panel = written.panel
    if panel.signal != "NOTICE" and not panel.consequence:
        scope.found.add(
            panel.place,
            "no-consequence",
            f"a {panel.signal} panel says no consequence",
            "write consequence: what happens then",
        )
    control = Caution(signal=panel.signal, hazard=panel.hazard, consequence=panel.consequence, avoid=panel.avoid)  # type: ignore[arg-type]
    return base.simple("caution", panel.hazard, control, written, id_, scope)


KIND = Kind("caution", CautionStep, lower, "a signal panel, read aloud and heard by everyone named")
