"""dwell: a least wait that nothing skips. It counts from an event and stands where it must be over.

    - dwell: Heater at rated volts
      for: warm_up_cold
      from: heater on          # a source's state, or the id of an earlier step

Other work goes on between the event and the dwell. After a gap of the tablet what it depends on is confirmed again.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any

from fieldkit.sheet.controls import Wait
from fieldkit.sheet.parts import SOURCE_STATES, Condition, Effects
from fieldkit.steps import base, conditions, words
from fieldkit.steps.base import Kind, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.sources import SOURCES
from fieldkit.steps.words import key

_STATE = re.compile(rf"([a-z_]+) ({'|'.join(SOURCE_STATES)})\Z")


@dataclass(frozen=True, kw_only=True)
class Dwell(StepWritten):
    title: str = key(words.text, "what is waited for", required=True, name="dwell")
    least: Any = key(words.texts, "the least time: 15 min, or a given", required=True, name="for")
    start: Any = key(words.texts, "heater on, or the id of an earlier step", required=True, name="from")
    depends: str | None = key(words.name, "the source that must not change meanwhile; asked again after a gap")


def lower(written: Dwell, id_: str, scope: Scope) -> Piece:
    least = scope.tree(written.least, words.SECOND)
    if not written.why:
        scope.found.add(
            written.place,
            "no-why",
            "a wait stands here without its reason",
            "write why: what needs the time",
            "warning",
        )
    clock, extra, depends, since = _clock(written, scope)
    if written.depends and scope.must_be_source(written.depends, written.at("depends")):
        depends = written.depends
    says = f"{scope.says(' '.join(written.least.text.split()))} have passed since {since}"
    opens = conditions.distinct((*base.gate(written, scope), *extra, conditions.at_least(clock, least, says)))
    control = Wait(clock=clock, least=least, depends=depends, why=written.why)
    return base.one_step("dwell", written.title, control, written, id_, opens, Effects(), scope)


def _clock(written: Dwell, scope: Scope) -> tuple[str, tuple[Condition, ...], str | None, str]:
    start = " ".join(written.start.text.split())
    match = _STATE.match(start)
    if match:
        if not scope.must_be_source(match[1], written.start.place):
            return "age:heater", (), None, start
        energy = SOURCES[match[1]]
        return f"age:{match[1]}", (conditions.state_is(match[1], (match[2],)),), match[1], f"{energy.is_} {match[2]}"
    scope.must_be_step(start, written.start.place)
    return f"since:{start}", (), None, f"“{scope.title_of(start)}”"


KIND = Kind("dwell", Dwell, lower, "a least wait, counted from an event")
