"""A compiled sheet as text that a person can read: its head, every step with its control, every move with its gate.

Not here: the tablet's pages, and the record. Nothing reads this text back.
"""

from __future__ import annotations

from collections.abc import Iterator

from fieldkit.procedure import say
from fieldkit.sheet import controls, model
from fieldkit.sheet.model import Sheet, Step
from fieldkit.sheet.moves import Move
from fieldkit.sheet.parts import Effects, Unit


def show(sheet: Sheet) -> str:
    """The whole sheet as text."""
    return "\n".join([*_head(sheet), "", *_steps(sheet), *_foot(sheet)]) + "\n"


def _head(sheet: Sheet) -> Iterator[str]:
    yield f"{sheet.title} ({sheet.procedure}, edition {sheet.edition})"
    yield f"  {sheet.purpose}"
    yield f"  sheet {model.digest(model.to_bytes(sheet))}, not proved"
    yield f"  for {', '.join(sheet.tubes)}; crew {sheet.crew}" + (f"; alone: {sheet.alone}" if sheet.alone else "")
    for after in sheet.after:
        yield f"  after {after.says}"
    yield "  at the start: " + ", ".join(_declared(s, sheet) for s in sheet.start)
    yield "  at the end: " + ", ".join(f"{s} {' or '.join(states)}" for s, states in sheet.ends.items())
    for rule in sheet.rules:
        yield f"  rule: {rule.says}"
    yield "  givens:"
    for given in sheet.givens:
        unit = given.unit.shown or given.unit.symbol if given.unit else "text"
        between = f", between {given.between[0]} and {given.between[1]}" if given.between else ""
        yield f"    {given.name} [{unit or 'number'}] from the {given.origin}: {given.meaning}{between}"


def _declared(source: str, sheet: Sheet) -> str:
    found = sheet.start[source]
    least = f" for {say.tree(found.least)} s" if found.least is not None else ""
    return f"{source} {' or '.join((found.state, *found.accepts))}{least}"


def _steps(sheet: Sheet) -> Iterator[str]:
    ways: dict[str, list[Move]] = {}
    for move in sheet.moves:
        ways.setdefault(move.origin, []).append(move)
    section = ""
    for step in sheet.steps:
        if step.section != section:
            section = step.section
            yield f"== {section} =="
        yield from _step(step)
        for move in ways.get(step.id, []):
            yield from _move(move)
        yield ""


def _step(step: Step) -> Iterator[str]:
    who = "" if step.who == "recorder" else f", by the {step.who}"
    yield f"{step.number}. {step.id} ({step.kind}{who}): {step.title}"
    if step.level is not None:
        yield f"     at level {say.tree(step.level.value)}"
    if step.text:
        yield f"     {step.text}"
    yield from (f"     {row}" for row in _control(step.control))


def _control(control: controls.Control) -> Iterator[str]:
    match control:
        case controls.Caution():
            yield f"{control.signal}: {control.consequence} {' '.join(control.avoid)}".strip()
        case controls.Number():
            yield f"number in {_unit(control.unit)}" + _meter(control)
            yield from _judged(control)
        case controls.Result():
            yield f"result in {_unit(control.unit)}, to {control.resolution}: {say.tree(control.value)}"
            yield from _judged(control)
        case controls.Prove():
            tester = control.tester.instrument or control.tester.role
            yield f"prove with {tester} on {control.known_source}, before and after"
            yield f"known source: {say.limits(control.known, control.unit)}"
            for point in control.points:
                yield f"{point.title}: {say.limits(point.limits, control.unit)}"
        case controls.Lock() | controls.Unlock():
            yield f"{control.control} {control.point}: {', '.join(control.sources)}"
        case controls.Earth() | controls.Lift():
            yield f"{control.control} {control.stick}, {control.point}: {control.source}"
        case controls.Choice():
            yield from (f"option {o.value}: {o.label}" for o in control.options)
        case controls.Hold():
            yield f"released by the {control.by}: “{control.statement}”"
        case controls.Wait():
            depends = f", depends on {control.depends}" if control.depends else ""
            yield f"wait until {control.clock} >= {say.tree(control.least)} s{depends}"
        case controls.People():
            yield f"people {control.way}: {control.place}"
        case _:
            yield control.control


def _unit(unit: Unit) -> str:
    return unit.shown or unit.symbol or "plain numbers"


def _meter(control: controls.Number) -> str:
    if control.meter is None:
        return ""
    at = f" at {control.meter.hand_at}" if control.meter.hand_at else ""
    late = ", none that is overdue" if control.meter.overdue == "refuse" else ""
    return f", meter {control.meter.role or control.meter.instrument}{at}{late}"


def _judged(control: controls.Number | controls.Result) -> Iterator[str]:
    if control.limits is not None:
        yield f"limits: {say.limits(control.limits, control.unit)}" + ("; protects people" if control.protects else "")
    if control.typical is not None:
        low, high = (say.tree(t, control.unit) if t else "" for t in (control.typical.low, control.typical.high))
        yield f"typical: {low} to {high} ({control.typical.note})"


def _move(move: Move) -> Iterator[str]:
    on = move.choice or move.on
    manner = "" if move.manner == "plain" else f" [{move.manner}]"
    effects = _effects(move.effects)
    yield f"     {on}{manner} -> {move.to}" + (f"   {effects}" if effects else "")
    for condition in move.gate:
        yield f"         opens when {condition.says}"


def _effects(effects: Effects) -> str:
    parts = [f"{s} is {state}" for s, state in effects.sets.items()]
    parts += [f"shows {fact}" for fact in effects.shows]
    parts += [f"{c.counter} {'= ' + str(c.to) if c.to is not None else f'{c.by:+d}'}" for c in effects.counts]
    parts += [f"hands {way} at {place}" for place, way in effects.hands.items()]
    return "{" + ", ".join(parts) + "}" if parts else ""


def _foot(sheet: Sheet) -> Iterator[str]:
    yield "== Make safe =="
    for line in sheet.make_safe:
        sets = ", ".join(f"{s} is {state}" for s, state in line.sets.items())
        yield f"{line.text}" + (f"   {{{sets}}}" if sets else "") + (f" ({line.note})" if line.note else "")
    if sheet.counters:
        counted = ", ".join(f"{name} {low} to {high}" for name, (low, high) in sheet.counters.items())
        yield f"counters: {counted}"
    for formula in sheet.formulas.values():
        yield f"formula {formula.name}: {formula.meaning} ({formula.reference})"
    if sheet.next_person:
        yield f"for the next person: {sheet.next_person}"
