"""Verify: may this file be relied on? A row of separate questions about a PDF, and one bottom line.

Needs the file and, for trust, the signing authority's certificate; no database, no network. CHECKS is the registry, in
the order of the report. Not here: the checks themselves (checks/), the command (fieldkit.cli.verify).
"""

from __future__ import annotations

import datetime as dt
import hashlib
from collections.abc import Callable
from dataclasses import dataclass

from fieldkit.pdf.checks import contents, pages, recompute, signatures
from fieldkit.pdf.report import Answer, Note, Report, State, Unknown, Wrong
from fieldkit.pdf.subject import Subject
from fieldkit.trust import certificates


@dataclass(frozen=True)
class Check:
    """One question: its code (an API), the question as the report prints it, and the function that answers."""

    code: str
    question: str
    answer: Callable[[Subject], str]


CHECKS: tuple[Check, ...] = (
    Check("file", "The file reads as a PDF", signatures.reads),
    Check("fields", "Seal and supervisor's signature are there, each in its role", signatures.required),
    Check("seal", "The station's seal is genuine and certifies the file", signatures.seal),
    Check("countersignature", "The supervisor's signature is genuine and closes the file", signatures.countersignature),
    Check("untouched", "Nothing was changed or added that is not signed", signatures.untouched),
    Check("trust", "The certificates are the given authority's, at the time claimed", signatures.trusted),
    Check("time", "A trusted timestamp proves the time", signatures.time),
    Check("attachments", "Everything that the record rests on is attached, unchanged", contents.attached),
    Check("chain", "The events are one unbroken chain", contents.chain),
    Check("people", "Everyone signed for their part, with their own key", contents.people),
    Check("verdicts", "Every verdict comes out again from the sheet and the events", recompute.verdicts),
    Check("record", "The record comes out again from the sheet and the events", recompute.record),
    Check("pages", "The pages show what the record says", pages.pages),
    Check("real", "The run was real work, not a rehearsal", recompute.real),
)


def verify(data: bytes, authority_pem: str | bytes | None, now: dt.datetime) -> Report:
    """Every answer about the file. Without an authority, trust is not checked and the report does not hold.

    `now` is aware; a time claimed after it is refused. Raises Refusal bad-certificate for an authority that is none.
    """
    authority = certificates.from_pem(authority_pem) if authority_pem is not None else None
    subject = Subject(data, authority, now)
    answers = tuple(_ask(check, subject) for check in CHECKS)
    return Report(hashlib.sha256(data).hexdigest(), _about(subject), answers)


def _ask(check: Check, subject: Subject) -> Answer:
    def answer(state: State, *says: str) -> Answer:
        return Answer(check.code, check.question, state, says)

    try:
        return answer("holds", check.answer(subject))
    except Wrong as exc:
        return answer("fails", *exc.sentences)
    except Unknown as exc:
        return answer("not checked", str(exc))
    except Note as exc:
        return answer("note", *exc.sentences)
    except Exception as exc:
        # The file may be hostile: whatever it breaks here, the answer is no, and the other questions are asked.
        return answer("fails", f"This could not be examined: {type(exc).__name__}: {exc}")


def _about(subject: Subject) -> str:
    """One line that names the record, from the file's own words."""
    try:
        head = subject.record["head"]
        return f"Run {head['run']}, {head['title']}, edition {head['edition']}, {head['station']}, {head['day']}"
    except (Unknown, KeyError, TypeError):
        return ""
