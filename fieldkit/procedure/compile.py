"""From YAML to a sheet: read, check, lower, link. Every problem of the file at once; same bytes in, same sheet out.

    sheet, problems = compile_file(Path("procedures/warm-up.yaml"), library)

The sheet is None where a problem stops it; warnings do not. The walk: head (names, sources, rules), items (steps as
written), pieces (each kind lowers its step), link (moves), lint (rules of sense). Not here: any step kind.
"""

from __future__ import annotations

import hashlib
from pathlib import Path
from typing import Any

from fieldkit.errors import Collector, Problem
from fieldkit.formula.library import Library
from fieldkit.procedure import head, items, link, lint
from fieldkit.procedure.items import Item
from fieldkit.procedure.model import Head
from fieldkit.sheet.model import Sheet, Step
from fieldkit.steps import KINDS, conditions, words
from fieldkit.steps.base import Kind, Name, Piece
from fieldkit.steps.expression import Named, used_formulas
from fieldkit.steps.scope import Scope
from fieldkit.yaml_source import Mapping, Node, read


def compile_file(path: Path, library: Library) -> tuple[Sheet | None, list[Problem]]:
    """The sheet of the procedure in `path`, and everything wrong with it. Raises OSError where it cannot be read."""
    return compile_bytes(path.read_bytes(), str(path), library)


def compile_bytes(
    data: bytes, file: str, library: Library, kinds: dict[str, Kind] | None = None
) -> tuple[Sheet | None, list[Problem]]:
    """As compile_file, from bytes; `kinds` is KINDS unless a test brings its own."""
    node, problems = read(data, file)
    found = Collector(file, list(problems))
    sheet = _compile(node, data, found, library, kinds or KINDS) if node is not None else None
    return (None if found.stops else sheet), _in_order(found.problems)


def _in_order(problems: list[Problem]) -> list[Problem]:
    """Sorted by place, each once."""
    return sorted(dict.fromkeys(problems), key=lambda p: (p.place.line, p.place.column, p.code, p.message))


def _compile(node: Node, data: bytes, found: Collector, library: Library, kinds: dict[str, Kind]) -> Sheet | None:
    values = words.read_keys(Head, node, found, "a procedure")
    if not isinstance(node, Mapping):
        return None
    scope = Scope(found=found, library=library, crew=values.get("crew") or 1)
    energy = values.get("energy") or {}
    scope.sources = tuple(energy)
    given = head.givens(values.get("givens") or {}, node.get("givens"), scope)
    written = items.read(values.get("steps"), found, kinds)
    _name_steps(written, scope)
    scope.now = len(written) + 1
    scope.rules = head.rules(values.get("rules") or (), scope)
    parts: dict[str, Any] = {
        "givens": given,
        "sources": head.sources(energy),
        "start": head.start(energy, scope),
        "ends": head.ends(values.get("ends") or {}, scope),
        "after": head.after(values.get("after") or {}, scope),
        "make_safe": head.make_safe(values.get("make_safe") or (), scope),
        "rules": scope.rules,
    }
    rows, links = _lower(written, scope)
    if found.stops or not rows:
        lint.check_written(written, values, scope)
        return None
    parts |= {f: values[f] for f in ("procedure", "edition", "title", "purpose", "tubes", "crew")}
    parts |= {f: values.get(f) or "" for f in ("changes", "alone", "next_person")}
    sheet = Sheet(
        **parts,
        source_sha256=hashlib.sha256(data).hexdigest(),
        counters=dict(sorted(c for row in rows for c in row.piece.counters.items())),
        first=rows[0].piece.entry,
        steps=tuple(s for row in rows for s in row.piece.steps),
        moves=tuple(link.moves(rows, links)),
        formulas=used_formulas(scope.formulas_used, library),
    )
    lint.check_written(written, values, scope)
    lint.check_sheet(sheet, written, scope)
    return sheet


def _name_steps(written: list[Item], scope: Scope) -> None:
    """Puts every step's id and names into the scope, so that steps may speak of each other."""
    for order, item in enumerate(written, 1):
        scope.steps[item.id] = (order, item.title)
        if item.written is None:
            scope.names.setdefault(item.id, Named(None, order, broken=True))
            continue
        for inner, title in item.kind.inner(item.written, item.id).items():
            scope.steps.setdefault(inner, (order, title))
        for name in item.kind.names(item.written, item.id):
            _name(name, order, item, scope)
        for shown in getattr(item.written, "shows", ()):
            scope.facts.add(shown)


def _name(name: Name, order: int, item: Item, scope: Scope) -> None:
    taken = scope.names.get(name.name)
    if taken is not None:
        message = f'the name "{name.name}" is already {"a given" if taken.order == 0 else "that of another step"}'
        scope.found.add(
            item.written.at("id") if item.written else item.place, "name-taken", message, "choose another id"
        )
        return
    scope.steps[name.name] = (order, name.title)
    if name.options:
        scope.options[name.name] = name.options
        return
    scope.names[name.name] = Named(words.dimension(name.unit or words.NO_UNIT), order)
    scope.meanings.setdefault(name.name, words.plain(name.title))


def _lower(written: list[Item], scope: Scope) -> tuple[list[link.Linked], link.Links]:
    links, rows = link.Links(), []
    for order, item in enumerate(written, 1):
        scope.now = order
        for block in item.blocks:
            if block.serial not in links.phrases:
                links.phrases[block.serial] = tuple(conditions.read(s, scope) for s in block.conditions)
        if item.written is None:
            continue
        path = links.of_step(item, scope)
        if item.written.go_on is not None:
            scope.must_be_step(item.written.go_on, item.written.at("go_on"), before=False)
        piece = item.kind.lower(item.written, item.id, scope)
        _number(piece, item)
        rows.append(link.Linked(item, piece, path))
    return rows, links


def _number(piece: Piece, item: Item) -> None:
    piece.steps = [_numbered(s, item) for s in piece.steps]


def _numbered(step: Step, item: Item) -> Step:
    return step.model_copy(update={"number": item.number, "section": item.section})
