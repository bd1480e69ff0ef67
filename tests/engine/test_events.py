"""Events: every kind has one frozen sample, both languages read every sample alike, and refuse the same damage."""

from __future__ import annotations

import json
import types
import typing
from typing import Any

import pytest
import run_driver as drive
from pydantic import BaseModel
from run_twin import Twin

from fieldkit.errors import Refusal
from fieldkit.run import events

FOLDER = drive.VECTORS / "events"


def test_every_event_has_a_sample_and_every_sample_an_event() -> None:
    assert sorted(p.stem for p in FOLDER.glob("*.json")) == sorted(events.EVENTS)


@pytest.mark.parametrize("kind", events.EVENTS)
def test_a_sample_is_read_alike_by_both(kind: str, twin: Twin) -> None:
    raw = (FOLDER / f"{kind}.json").read_bytes()
    event = events.parse(raw)
    assert event.head.kind == kind
    assert twin.ask(read=raw.decode()) == events.plain(event)


@pytest.mark.parametrize("kind", events.EVENTS)
def test_a_sample_with_a_key_too_many_or_too_few_is_refused_by_both(kind: str, twin: Twin) -> None:
    data = json.loads((FOLDER / f"{kind}.json").read_text())
    needed = [name for name, field in events.EVENTS[kind].model_fields.items() if field.is_required()]
    damaged = [{**data, "body": {**data["body"], "extra": 1}}, {**data, "extra": 1}]
    damaged += [{**data, "body": {k: v for k, v in data["body"].items() if k != name}} for name in needed]
    damaged += [{**data, "body": {**data["body"], name: 7.5}} for name in data["body"]]
    for one in damaged:
        text = json.dumps(one)
        with pytest.raises(Refusal) as refused:
            events.parse(text.encode())
        assert refused.value.code == "damaged-event"
        assert twin.ask(read=text)["refused"]["code"] == "damaged-event", text


@pytest.mark.parametrize("kind", events.EVENTS)
def test_what_may_be_left_out_gets_the_same_default(kind: str, twin: Twin) -> None:
    data = json.loads((FOLDER / f"{kind}.json").read_text())
    for name, field in events.EVENTS[kind].model_fields.items():
        if not field.is_required():
            data["body"].pop(name, None)
    text = json.dumps(data)
    assert twin.ask(read=text) == events.plain(events.parse(text.encode()))


@pytest.mark.parametrize(
    "text",
    ["", "{", "[]", '{"v": 1}', "null", '{"v": NaN}', '"read"'],
)
def test_what_is_no_event_is_refused_by_both(text: str, twin: Twin) -> None:
    with pytest.raises(Refusal) as refused:
        events.parse(text.encode())
    assert refused.value.code == twin.ask(read=text)["refused"]["code"] == "damaged-event"


def test_an_unknown_kind_or_version_is_kept_apart_from_damage(twin: Twin) -> None:
    data = json.loads((FOLDER / "waited.json").read_text())
    for one in ({**data, "kind": "danced"}, {**data, "v": 2}, {**data, "v": 0}):
        with pytest.raises(Refusal) as refused:
            events.parse(json.dumps(one).encode())
        assert refused.value.code == twin.ask(read=json.dumps(one))["refused"]["code"] == "unknown-version"


def test_a_key_that_stands_twice_is_damage() -> None:
    text = (FOLDER / "waited.json").read_text().replace('"v":1', '"v":1,"v":1')
    with pytest.raises(Refusal) as refused:
        events.parse(text.encode())
    assert refused.value.code == "damaged-event"


def test_the_table_of_the_tablet_spells_the_models(twin: Twin) -> None:
    table = twin.call("events.BODIES")
    assert list(table) == list(events.EVENTS)
    for kind, model in events.EVENTS.items():
        assert {name: rule(field) for name, field in model.model_fields.items()} == table[kind], kind


def rule(field: Any) -> Any:
    """A field of a model in the notation of static/core/events.js."""
    inner = spelled(field.annotation)
    if field.is_required():
        return inner
    default = field.get_default()
    return {"value": inner, "or": list(default) if isinstance(default, tuple) else default}


def spelled(of: Any) -> Any:
    origin, args = typing.get_origin(of), typing.get_args(of)
    if origin in (typing.Union, types.UnionType):
        return spelled(next(a for a in args if a is not type(None)))
    if origin is typing.Literal:
        return "|".join(args)
    if origin is tuple:
        return "texts" if args[0] is str else [spelled(args[0])]
    if origin is dict:
        inner = spelled(args[1])
        return {"text": "map", "texts": "lists"}.get(inner if isinstance(inner, str) else "", {"each": inner})
    if isinstance(of, type) and issubclass(of, BaseModel):
        return {name: rule(field) for name, field in of.model_fields.items()}
    return {str: "text", int: "count", bool: "flag"}[of]


def test_next_event_carries_the_chain_on() -> None:
    d = drive.started()
    envelope = events.next_event(d.state, "paused", {"reason": ""}, "vell", d.now, "0.1.0")
    text = events.to_text(envelope)
    event = events.parse(text.encode())
    assert (event.head.seq, event.head.prev) == (d.state["seq"] + 1, events.digest(d.texts[-1].encode()))
    assert list(json.loads(text)) == ["v", "run", "chain", "seq", "prev", "kind", "by", "at", "app", "body"]
