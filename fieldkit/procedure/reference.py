"""The reference of the procedure language, made from its own models: procedures/REFERENCE.md is this text.

A test holds the file to it, and writes it again with REWRITE=1. To document a key: its `key(...)` in the model.
"""

from __future__ import annotations

from collections.abc import Iterator

from fieldkit.procedure.model import GivenWritten, Head, SafeWritten
from fieldkit.sheet.parts import SOURCE_STATES
from fieldkit.steps import KINDS, conditions, judged, limits, words
from fieldkit.steps.base import StepWritten
from fieldkit.steps.caution import Panel
from fieldkit.steps.choose import OptionWritten
from fieldkit.steps.judged import Judged
from fieldkit.steps.meters import ROLES, MeterWritten
from fieldkit.steps.raise_ import Rule
from fieldkit.steps.sources import FOLLOWS, SOURCES
from fieldkit.steps.words import Written

INTRO = """# How a procedure is written

Made from the checker's own models; `fieldkit check FILE` says the same, with line and column. A procedure is a YAML
file of plain texts: `no`, `on`, `12:30` and `1e3` mean what a person reads. A value is a number, a space and a unit:
`27 kV`, `12 L/min`, `0.5 uA`. Where a value is a formula it may use givens and earlier readings by name, `+ - * / ^`,
comparisons, `if(condition, a, b)`, the formulas that come along (`fieldkit calc --list` shows them) and those in a
folder `formulas` beside the procedure; units are checked. In a formula a choice is written `choice(history) = cold`.
Quotes are needed where a text has `: ` or ` #` in it, or a comma inside `{ }`.
"""

LIMITS = f"""## Limits

`limits`, `caution_band` and `typical` say where a value lies: {limits.FORM}. A limit itself is inside; `below` and
`above` mean the same as `at most` and `at least`. Each side may be a formula of givens and earlier readings. It is
rounded inward to the resolution before it is shown and applied. `guarded` limits are pulled in by the uncertainty U
(k = 2) of the meter's range, those of a result by its own; without `guarded` a value inside the limits passes, however
near. `typical` only warns.

A fail offers what `on_fail` lists: {judged.ON_FAIL}. To stop and make safe is always among it.
"""


def text() -> str:
    """The whole reference as Markdown."""
    return "\n".join([INTRO, *_head(), *_steps(), LIMITS, *_conditions(), *_lists()])


def _head() -> Iterator[str]:
    yield "## The head\n"
    yield from _keys(Head)
    yield "\nA given, under its name:\n"
    yield from _keys(GivenWritten)
    yield "\nA line of `make_safe`:\n"
    yield from _keys(SafeWritten)
    yield ""


STEPS = """## Steps

The first key names the kind. Between steps may stand `- section: TITLE`; `- when: CONDITION` with `steps:`, a block
that is left out where the condition does not hold; and `- aside: TITLE` with `steps:`, a block that is only reached by
`go to`.

Keys of every step:
"""

METERS = """
A `meter` or a `tester` is a meter of the cabinet or an instrument, as in `meter: heater_volts`. Where more is to be
said of it, its keys are written, as in `meter: {name: heater_volts, overdue: refuse}`:
"""

GATES = """
Gates that need not be written: switching a source on needs everyone out and the source free of locks, the beam supply
also every earth lifted; switching off is closed while a rule of a live source needs it; `earth` needs its source proved
dead; `hands` needs every source that reaches the place dead and earthed; `lift` and `unlock` need everyone out. Make
safe is never gated. A fact is cleared by a pause, so a step that needs one says with `or_else` where it is shown again.
"""


def _steps() -> Iterator[str]:
    yield STEPS
    yield from _keys(StepWritten)
    yield "\nFurther keys of `read` and `work_out`:\n"
    yield from _keys(Judged, StepWritten)
    yield METERS
    yield from _keys(MeterWritten)
    for word, kind in KINDS.items():
        yield f"\n### {word}\n\n{kind.about[0].upper()}{kind.about[1:]}.\n"
        yield from _keys(kind.model, Judged if issubclass(kind.model, Judged) else StepWritten)
        for title, inner in _INNER.get(word, ()):
            yield f"\n{title}:\n"
            yield from _keys(inner)
    yield ""


_INNER: dict[str, tuple[tuple[str, type[Written]], ...]] = {
    "caution": (("Under `caution`", Panel),),
    "choose": (("An option, where it is more than its label", OptionWritten),),
    "raise": (("Under `rule`", Rule),),
}


def _keys(model: type[Written], but: type[Written] | None = None) -> Iterator[str]:
    known = words.keys_of(but) if but else {}
    for name, field in words.keys_of(model).items():
        if name not in known:
            must = " *(needed)*" if field.metadata["required"] else ""
            write = field.metadata["word"].write
            hint = "" if write in ("a text", "a value") else f" Write {write}."
            yield f"- `{name}`{must}: {field.metadata['doc']}.{hint}"


def _conditions() -> Iterator[str]:
    yield "## Conditions\n"
    yield "In `needs`, `when` and, after `needs`, in `rules` (there separated by commas):\n"
    yield from (f"- `{form}`" for form in conditions.FORMS)
    yield GATES


def _lists() -> Iterator[str]:
    isolable = [s.name for s in SOURCES.values() if s.isolable]
    following = [f"{f} (from {s})" for s, fs in FOLLOWS.items() for f in fs]
    yield "## Lists\n"
    yield f"- Sources: {', '.join(isolable)}."
    yield f"- Sources that follow others and are never written: {', '.join(following)}."
    yield f"- States: {', '.join(SOURCE_STATES)}."
    yield f"- Meters of a cabinet: {', '.join(ROLES)}."
    yield "- Instruments: `HV-2`; or held at a place, with the rules for hands: `HV-2 at deck`."
    yield "- Units: as in the registers; `fieldkit check` names near ones.\n"
