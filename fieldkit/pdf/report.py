"""What verify answers: one answer a question, one bottom line, as text and as JSON.

States: `holds`; `fails`; `not checked`, with the reason, which is no pass; `note`, which decides nothing.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

State = Literal["holds", "fails", "not checked", "note"]
_MARKS: dict[str, str] = {
    "holds": "holds      ",
    "fails": "FAILS      ",
    "not checked": "not checked",
    "note": "note       ",
}


class Wrong(Exception):
    """A check's answer is no: what is wrong, one sentence each."""

    def __init__(self, *sentences: str) -> None:
        super().__init__(" ".join(sentences))
        self.sentences = sentences


class Unknown(Exception):
    """A check cannot be made, and why; never a pass."""


class Note(Exception):
    """A check's answer is neither yes nor no: something to be said, one sentence each."""

    def __init__(self, *sentences: str) -> None:
        super().__init__(" ".join(sentences))
        self.sentences = sentences


@dataclass(frozen=True)
class Answer:
    code: str
    question: str
    state: State
    says: tuple[str, ...]


@dataclass(frozen=True)
class Report:
    """Every answer about one file, in the order of the registry."""

    sha256: str
    #: one line that names the record, empty where the file does not say
    about: str
    answers: tuple[Answer, ...]

    @property
    def holds(self) -> bool:
        """Whether every answer that decides is yes."""
        return all(a.state in ("holds", "note") for a in self.answers)

    @property
    def bottom_line(self) -> str:
        """One sentence for whoever reads nothing else."""
        failed = [a.code for a in self.answers if a.state == "fails"]
        unchecked = [a.code for a in self.answers if a.state == "not checked"]
        if failed:
            return f"Do not rely on this file. Fails: {', '.join(failed)}."
        if unchecked:
            return f"Nothing wrong was found, but not everything was checked: {', '.join(unchecked)}."
        return "This record holds."

    def answer(self, code: str) -> Answer:
        """The answer with this code. Raises KeyError."""
        return {a.code: a for a in self.answers}[code]

    def to_json(self) -> dict[str, Any]:
        answers = [
            {"code": a.code, "question": a.question, "state": a.state, "says": list(a.says)} for a in self.answers
        ]
        return {
            "holds": self.holds,
            "bottom_line": self.bottom_line,
            "sha256": self.sha256,
            "about": self.about,
            "answers": answers,
        }

    def to_text(self) -> str:
        """For a person at a terminal: a line an answer, its details below it, the bottom line last."""
        lines = [self.about] if self.about else []
        for a in self.answers:
            lines.append(f"{_MARKS[a.state]}  {a.question}")
            lines.extend(f"{'':13}{sentence}" for sentence in a.says)
        return "\n".join([*lines, "", self.bottom_line])
