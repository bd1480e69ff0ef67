"""choose: a branch. The person picks one option; later steps say `when: history is stored`."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.errors import Collector
from fieldkit.sheet.controls import Choice, Option
from fieldkit.sheet.parts import Effects
from fieldkit.steps import base, words
from fieldkit.steps.base import Exit, Kind, Name, Piece, StepWritten
from fieldkit.steps.scope import Scope
from fieldkit.steps.words import Written, key
from fieldkit.yaml_source import Node, Scalar


@dataclass(frozen=True, kw_only=True)
class OptionWritten(Written):
    label: str = key(words.text, "what the button says", required=True)
    text: str = key(words.text, "when to pick it", default="")
    then: str | None = key(words.name, "the step to go on at; left out: the next one", name="go to")
    sets: dict[str, str] = key(base.SETS, "states of energy sources that picking it declares")


def _option(node: Node, found: Collector) -> OptionWritten | None:
    if isinstance(node, Scalar):
        label = words.text(node, found)
        return None if label is None else OptionWritten(label=label, place=node.place)
    return words.read_model(OptionWritten, node, found, "an option")


OPTION = words.Word("its label, or label: and text:", _option)


@dataclass(frozen=True, kw_only=True)
class Choose(StepWritten):
    title: str = key(words.text, "the question", required=True, name="choose")
    options: dict[str, OptionWritten] = key(words.map_of(OPTION, words.word), "value: label", required=True)


def lower(written: Choose, id_: str, scope: Scope) -> Piece:
    if len(written.options) < 2:
        scope.found.add(
            written.at("options"), "one-option", "a choice with one option is none", "write at least two options"
        )
    opens, exits = base.gate(written, scope), []
    for value, option in written.options.items():
        if option.then is not None:
            scope.must_be_step(option.then, option.at("then"), before=False)
        effects = Effects(sets=option.sets or {})  # type: ignore[arg-type]
        gate = (*opens, *base.built_in(option.sets or {}, scope, option.place))
        known = {id_: frozenset([value])}
        exits.append(
            Exit(id_, "option", gate, effects, choice=value, label=option.label, goto=option.then, known=known)
        )
    control = Choice(options=tuple(Option(value=v, label=o.label, text=o.text) for v, o in written.options.items()))
    return Piece(id_, [base.make_step(id_, "choose", written.title, control, written)], exits)


def names(written: Choose, id_: str) -> tuple[Name, ...]:
    return (Name(id_, written.title, options=tuple(written.options)),)


KIND = Kind("choose", Choose, lower, "a branch: one of several options", names)
