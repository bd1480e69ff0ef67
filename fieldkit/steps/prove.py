"""prove: prove dead. The tester on a known source, every point, the tester on the known source again; one step."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from fieldkit.sheet.controls import Point, Prove
from fieldkit.sheet.parts import Effects, Limits, Meter, Unit
from fieldkit.steps import base, conditions, judged, words
from fieldkit.steps.base import Kind, Piece, StepWritten
from fieldkit.steps.judged import Judged
from fieldkit.steps.limits import read_range
from fieldkit.steps.meters import METER
from fieldkit.steps.read import resolution
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import Quantity, key


@dataclass(frozen=True, kw_only=True)
class ProveStep(StepWritten):
    title: str = key(words.text, "what is proved dead", required=True, name="prove")
    sources: tuple[str, ...] = key(base.SOURCE_NAMES, "the sources that are shown dead", required=True)
    unit: Unit = key(words.unit, "unit of every value", required=True)
    tester: Meter = key(METER, "the tester and where it is held: HV-2 at hv-compartment", required=True)
    known_source: str = key(words.text, "what the tester is proved on, before and after", required=True)
    known: Any = key(words.texts, "what the tester must show there: at least 450 V", required=True)
    points: dict[str, str] = key(words.map_of(words.text), "name: where the tester is put", required=True)
    limits: Any = key(words.texts, "what counts as dead: at most safe_voltage", required=True)
    guarded: bool = key(words.yes_no, "pull the limits in by the tester's uncertainty", default=False)
    resolution: Quantity | None = key(words.quantity, "where the tester's own does not count")
    shows: tuple[str, ...] = key(words.list_of(words.text), "facts that hold from now until a pause", default=())
    on_fail: tuple[Any, ...] = key(
        words.list_of(words.texts), "make safe only: no second try at a live point", default=()
    )


def lower(written: ProveStep, id_: str, scope: Scope) -> Piece:
    for source in written.sources:
        scope.must_be_source(source, written.at("sources"))
    if written.tester.correlated:
        remedy = "delete correlated; no formula uses the values of a proof"
        scope.found.add(written.at("tester"), "correlated-tester", "correlated stands here at a tester", remedy)
    dead = _limits(written, written.limits, scope)
    control = Prove(
        unit=written.unit,
        tester=written.tester,
        known_source=written.known_source,
        known=_limits(written, written.known, scope),
        points=tuple(Point(name=n, title=t, limits=dead) for n, t in written.points.items()),
        resolution=resolution(written.resolution, written.unit, scope),
    )
    for scalar in written.on_fail:
        if " ".join(scalar.text.split()) != "make safe":
            remedy = "write make safe, or delete on_fail"
            scope.found.add(scalar.place, "prove-again", "a failed proof offers only to make safe", remedy)
    locked = [conditions.state_is(s, ("locked", "proved", "earthed")) for s in written.sources if s in scope.sources]
    opens = conditions.distinct((*base.gate(written, scope), *locked))
    passed = Effects(sets={s: "proved" for s in written.sources}, shows=written.shows)
    ways = judged.ways(Judged(place=written.place, or_else=written.or_else), id_, scope, opens, passed)
    return Piece(
        id_, [base.make_step(id_, "prove", written.title, control, written)], ways.exits, ways.moves, ways.counters
    )


def _limits(written: ProveStep, scalar: Any, scope: Scope) -> Limits:
    sides = read_range(scalar, written.unit, scope)
    return Limits(
        low=sides.low.tree,
        high=sides.high.tree,
        low_name=sides.low.name,
        high_name=sides.high.name,
        guarded=written.guarded,
    )


KIND = Kind("prove", ProveStep, lower, "prove dead, with the tester proved before and after")
