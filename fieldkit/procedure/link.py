"""Exits joined to the steps that follow them: `when:` blocks become parallel gated moves, asides are passed over.

Where the following step has conditions, one move leads to it with them in its gate and another past it with their
opposite, so of all moves of one outcome exactly one is open. A choice just answered decides without a gate.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from fieldkit.procedure.items import Block, Item
from fieldkit.sheet.moves import END, Move
from fieldkit.sheet.parts import Condition
from fieldkit.steps import conditions
from fieldkit.steps.base import Exit, Piece
from fieldkit.steps.conditions import Phrase
from fieldkit.steps.scope import Scope


@dataclass
class Linked:
    item: Item
    piece: Piece
    #: the conditions of its own `when:`, as one more block around it
    path: tuple[Block, ...] = ()


@dataclass
class Links:
    """What is known of every block: its phrases, so that gates are made once."""

    phrases: dict[int, tuple[Phrase, ...]] = field(default_factory=dict)
    own: int = 1_000_000

    def of_step(self, item: Item, scope: Scope) -> tuple[Block, ...]:
        """The blocks around a step, its own `when:` the innermost."""
        written = item.written
        if written is None or not written.when:
            return item.blocks
        self.own += 1
        block = Block(written.when, written.at("when"), "", self.own)
        self.phrases[block.serial] = tuple(conditions.read(s, scope) for s in written.when)
        return (*item.blocks, block)


def moves(rows: list[Linked], links: Links) -> list[Move]:
    """Every move of the graph: those inside pieces, and each exit joined to what follows."""
    out: list[Move] = []
    entries = {row.item.id: row.piece.entry for row in rows}
    for index, row in enumerate(rows):
        out += row.piece.moves
        for way in row.piece.exits:
            goto = way.goto or (
                row.item.written.go_on if row.item.written and way.manner in ("plain", "deviation") else None
            )
            if goto is not None:
                out.append(_move(way, entries.get(goto, goto), way.gate))
                continue
            out += _following(rows, index, row, way, links)
    return _with_ids(out)


def _following(rows: list[Linked], index: int, row: Linked, way: Exit, links: Links) -> list[Move]:
    known = _known(row.path, links) | way.known
    inside = {b.serial for b in row.path}
    past: list[Condition] = []
    passed: list[frozenset[str]] = []
    out = []
    for follower in rows[index + 1 :]:
        asked, possible = _asked(follower.path, inside, known, links)
        if not possible or any(p <= {a.text for a in asked} for p in passed):
            continue
        gate = [c for phrase in asked for c in phrase.conditions]
        out.append(_move(way, follower.piece.entry, conditions.distinct([*way.gate, *past, *gate])))
        if not asked:
            return out
        past.append(conditions.negate(conditions.distinct(gate)))
        passed.append(frozenset(a.text for a in asked))
    out.append(_move(way, END, conditions.distinct([*way.gate, *past])))
    return out


def _asked(
    path: tuple[Block, ...], inside: set[int], known: dict[str, frozenset[str]], links: Links
) -> tuple[list[Phrase], bool]:
    """The phrases that entering `path` asks for, and whether it can be entered at all."""
    asked = []
    for block in path:
        if block.serial in inside:
            continue
        if block.aside:
            return [], False
        for phrase in links.phrases[block.serial]:
            if phrase.choice is not None and phrase.choice[0] in known:
                name, let = phrase.choice
                if not known[name] & let:
                    return [], False
                if known[name] <= let:
                    continue
            asked.append(phrase)
    return asked, True


def _known(path: tuple[Block, ...], links: Links) -> dict[str, frozenset[str]]:
    """What choices can be inside the blocks of `path`."""
    known: dict[str, frozenset[str]] = {}
    for block in path:
        for phrase in links.phrases.get(block.serial, ()):
            if phrase.choice is not None:
                name, let = phrase.choice
                known[name] = known[name] & let if name in known else let
    return known


def _move(way: Exit, to: str, gate: tuple[Condition, ...]) -> Move:
    return Move(
        id="", origin=way.origin, to=to, on=way.on, choice=way.choice, manner=way.manner, label=way.label,  # type: ignore[arg-type]
        gate=gate, effects=way.effects,
    )  # fmt: skip


def _with_ids(found: list[Move]) -> list[Move]:
    """Ids that say what a move is: origin, outcome, end; numbered where several would have the same."""
    taken: dict[str, int] = {}
    out = []
    for move in found:
        base = move.id or ":".join(
            [move.origin, move.choice or (move.on if move.manner == "plain" else move.manner), move.to.lstrip("@")]
        )
        taken[base] = taken.get(base, 0) + 1
        out.append(move.model_copy(update={"id": base if taken[base] == 1 else f"{base}:{taken[base]}"}))
    return out
