"""One command and what it is decided from. Twin: static/core/command.js. Not here: deciding (fieldkit.run.decide)."""

from __future__ import annotations

from typing import Any

from pydantic import ValidationError

from fieldkit.errors import Refusal
from fieldkit.run import events
from fieldkit.run.moves import State
from fieldkit.run.names import Context

Plain = dict[str, Any]


class Given:
    """One command with what it is decided from."""

    def __init__(self, ctx: Context, state: State, kind: str, asked: Plain, now: Plain, by: str, facts: Plain) -> None:
        self.ctx, self.state, self.kind, self.asked, self.now, self.by, self.facts = (
            ctx,
            state,
            kind,
            asked,
            now,
            by,
            facts,
        )

    def text(self, key: str) -> str:
        """A text of the command without space around it; empty where there is none."""
        found = self.asked.get(key)
        return found.strip() if isinstance(found, str) else ""

    def need(self, key: str, code: str, says: str) -> str:
        found = self.text(key)
        if not found:
            raise Refusal(code, says)
        return found


def checked(kind: str, body: Plain) -> Plain:
    """The body as the event's model has it, with defaults. Raises Refusal bad-command."""
    try:
        return events.read_body(kind, body).model_dump(mode="json")
    except (ValidationError, TypeError) as exc:
        raise Refusal("bad-command", f"The command {kind} is damaged.") from exc
