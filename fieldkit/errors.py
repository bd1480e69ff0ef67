"""The four kinds of bad, used strictly, and nothing else.

    bad
    ├── Problem    something wrong in an author's file; collected, never the first only
    ├── Refusal    not allowed now; a code and one sentence for the person
    ├── Verdict    the judgement of a reading (fieldkit.run.judge); not an error, so not here
    └── exception  a fault of this program, or of the machine below it

A formula's error value is none of these: it is an answer (fieldkit.values.Fault).
To add a code: use it where the bad thing is met, in kebab-case words; codes are an API, prose may improve.
"""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(frozen=True, order=True)
class Place:
    """Where in a file: 1-based line and column, and how many characters the caret covers."""

    line: int
    column: int
    width: int = 1


@dataclass(frozen=True)
class Problem:
    """One thing wrong in an author's file: where, what, and what to write instead."""

    file: str
    place: Place
    code: str
    message: str
    remedy: str = ""
    #: "problem" stops compilation; "warning" is shown and does not.
    weight: str = "problem"


class Refusal(Exception):
    """Not allowed now: a stable code, and a sentence for the person that says what to do instead."""

    def __init__(self, code: str, sentence: str, **detail: object) -> None:
        super().__init__(sentence)
        self.code = code
        self.sentence = sentence
        self.detail = detail


class Problems(Exception):
    """An author's file cannot be used; carries every problem found in it, in order of place."""

    def __init__(self, problems: list[Problem]) -> None:
        super().__init__(f"{len(problems)} problem(s)")
        self.problems = problems


@dataclass
class Collector:
    """Gathers problems while a file is read, so that all are told at once."""

    file: str
    problems: list[Problem] = field(default_factory=list)

    def add(self, place: Place, code: str, message: str, remedy: str = "", weight: str = "problem") -> None:
        self.problems.append(Problem(self.file, place, code, message, remedy, weight))

    @property
    def stops(self) -> bool:
        return any(p.weight == "problem" for p in self.problems)
