"""What probably comes: the steps ahead, the waits that count now, the next change of a source.

Twin: static/core/ahead.js. Not here: what may be done now (fieldkit.run.progress).
"""

from __future__ import annotations

from typing import Any

from fieldkit.run import moves, names, readings
from fieldkit.run.moves import State
from fieldkit.run.names import Context, Scope
from fieldkit.sheet.moves import END, SAFE

Plain = dict[str, Any]
Path = list[tuple[str, Plain | None]]


def forward(ctx: Context, node: str) -> list[Plain]:
    """The moves that an answer of the step is for: not those that a fail offers, and no way round."""
    leaving = ctx.leaving.get(node, [])
    return [m for m in leaving if m["on"] != "fail" and m["manner"] == "plain" and not moves.is_around(m)]


def ahead(ctx: Context, state: State, where: Scope) -> Path:
    """The steps that probably come, the open one first, each with the move that probably leaves it."""
    node, seen, path = state["node"], set[str](), Path()
    while node in ctx.steps and node not in seen:
        seen.add(node)
        pending = state["pending"] if state["pending"] and state["pending"]["step"] == node else None
        leaving = moves.leads(ctx, state, node, pending["outcome"]) if pending else forward(ctx, node)
        plain = [m for m in leaving if m["manner"] == "plain" and m["to"] not in seen and m["to"] != SAFE]
        likely = [m for m in plain if not any(_decided_against(ctx, state, where, c) for c in m["gate"])]
        # an answer that is given opens some ways and shuts the others
        open_now = [m for m in plain if pending and not names.reasons(ctx, where, m["gate"])]
        move = next(iter(open_now or likely or plain), None)
        path.append((node, move))
        # what a fail leaves closed is no round: nothing is foreseen past it
        if (move is None and pending) or (move is not None and move["to"] == END):
            break
        node = move["to"] if move else _out_of_the_round(ctx, path, seen)
    return path


def _out_of_the_round(ctx: Context, path: Path, seen: set[str]) -> str:
    """Where the way goes on after the last rung: every step that could follow was passed, so a ladder comes round.

    It is left by the last way without a label, as a label offers something else than going on; "" without one.
    """
    for step_id, _ in reversed(path):
        for move in forward(ctx, step_id):
            if not move["label"] and move["to"] in ctx.steps and move["to"] not in seen:
                return str(move["to"])
    return ""


def _decided_against(ctx: Context, state: State, where: Scope, condition: Plain) -> bool:
    """The condition speaks only of answered choices and of givens, and does not hold: it never will in this run."""
    found = names.mentioned(condition["tree"])
    given = {one["name"] for one in ctx.sheet["givens"]}
    known = all(n in given or (n.startswith("choice:") and n[len("choice:") :] in state["choices"]) for n in found)
    return bool(found) and known and names.value(ctx, where, condition["tree"]) is not True


def waits(ctx: Context, where: Scope, state: State, path: Path) -> list[Plain]:
    """Waits that count now and gate the open step or one that comes."""
    found: list[Plain] = []
    known = set()
    for step_id, move in path:
        step = ctx.steps[step_id]
        control = step["control"]
        own = step["control"]["control"] == "wait"
        asked = [{"clock": control["clock"], "least": control["least"], "says": step["title"]}] if own else []
        asked += [c for c in (move["gate"] if move else []) if c["clock"] and c["least"]]
        untimed = [c for c in (move["gate"] if move else []) if not c["clock"]]
        if step_id != state["node"] and names.reasons(ctx, where, untimed, step_id):
            continue
        for one in asked:
            elapsed = readings.waited(ctx, where, one)
            if elapsed is None or (elapsed["left"] <= 0 and not (own and step_id == state["node"])):
                continue
            key = (one["clock"], elapsed["texts"]["needed"])
            if key in known:
                continue
            known.add(key)
            head, _, rest = one["clock"].partition(":")
            found.append(
                {
                    "step": step_id,
                    "number": step["number"],
                    "source": rest if head == "age" else None,
                    "since": rest if head == "since" else None,
                    "says": one["says"],
                    "left": elapsed["left"],
                    "least": elapsed["texts"]["needed"],
                    "elapsed": elapsed["texts"]["least"],
                    "greatest": elapsed["texts"]["greatest"],
                }
            )
    return found


def next_change(state: State, ctx: Context, path: Path) -> Plain | None:
    """The next step that probably changes a source, and what it changes."""
    for step_id, move in path:
        sets = move["effects"]["sets"] if move else {}
        changed = {n: to for n, to in sets.items() if state["sources"].get(n, {}).get("state") != to}
        if changed:
            return {"sources": changed, "step": step_id, "number": ctx.steps[step_id]["number"]}
    return None
