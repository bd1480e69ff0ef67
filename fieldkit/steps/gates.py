"""Gates that a procedure need not write: what the rules of the plant ask of a step that changes a source.

Switching something on needs everyone out, the source free of locks, and what the procedure's `rules:` say of it; the
beam supply also every earth lifted. Switching off, parking or changing something is closed while a live source needs
it. Make safe is never gated, so nothing of this is applied to it. Not here: the proof that gates suffice.
"""

from __future__ import annotations

from fieldkit.errors import Place
from fieldkit.sheet.parts import Condition
from fieldkit.steps import conditions
from fieldkit.steps.scope import Scope
from fieldkit.steps.sources import ISOLATED, SOURCES


def built_in(sets: dict[str, str], scope: Scope, place: Place) -> list[Condition]:
    """The conditions that the changes in `sets` need, by the rules of the plant and of the procedure."""
    found: list[Condition] = []
    for source, state in sets.items():
        if state in ISOLATED or not scope.must_be_source(source, place):
            continue
        if state != "off":
            energy = SOURCES[source]
            found += [conditions.NOBODY_IN]
            says = f"{energy.is_} unlocked, not earthed, and its state is known"
            found.append(conditions.state_is_not(source, (*ISOLATED, "unknown"), says))
        if source == "beam_supply" and state == "on":
            found.append(conditions.EARTHS_LIFTED)
        found += _asked(source, state, sets, scope)
        found += _needed(source, state, sets, scope)
    return found


def _asked(source: str, state: str, sets: dict[str, str], scope: Scope) -> list[Condition]:
    """What rules ask of other sources before `source` may be in `state`."""
    return [c for rule in scope.rules if rule.source == source and rule.state == state for c in rule.needs]


def _needed(source: str, state: str, sets: dict[str, str], scope: Scope) -> list[Condition]:
    """Closed while a live source needs `source` to stay in the state that it would leave."""
    found = []
    for rule in scope.rules:
        if rule.source == source or sets.get(rule.source, rule.state) != rule.state:
            continue
        states = states_asked(rule.needs, source)
        if states and state not in states:
            needs = "they need" if SOURCES[rule.source].plural else "it needs"
            kept = f"the {SOURCES[source].title} {' or '.join(states)}"
            says = f"{SOURCES[rule.source].is_} no longer {rule.state}; {needs} {kept}"
            found.append(conditions.state_is_not(rule.source, (rule.state,), says))
    return found


def states_asked(needs: tuple[Condition, ...], source: str) -> tuple[str, ...]:
    """The states of `source` that a rule's conditions let through; empty where none speak of it."""
    for condition in needs:
        states = _states(condition.tree, f"state:{source}")
        if states:
            return tuple(states)
    return ()


def _states(tree: dict, name: str) -> list[str]:
    if tree.get("call") == "or":
        return [s for part in tree["of"] for s in _states(part, name)]
    if tree.get("call") == "eq" and tree["of"][0] == {"name": name} and "text" in tree["of"][1]:
        return [tree["of"][1]["text"]]
    return []
