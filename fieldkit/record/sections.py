"""The PDF's sections in order: template under templates/record/, the title it prints, and whether it is left out empty.

To add one: a line here, a template of that name; the sweep test holds both together.
"""

from __future__ import annotations

from typing import NamedTuple

from fieldkit.record.model import Record


class Section(NamedTuple):
    #: templates/record/<name>.html
    name: str
    title: str
    #: fields of the record; with all of them empty the section is left out. () is always printed
    fields: tuple[str, ...] = ()


SECTIONS: tuple[Section, ...] = (
    Section("summary", "Record of a run"),
    Section("readings", "Readings", ("readings",)),
    Section("deviations", "Deviations", ("deviations",)),
    Section("corrections", "Corrections and readings taken again", ("corrections", "retakes")),
    Section("isolation", "Locks, proofs and earths", ("locks", "proofs", "earths")),
    Section("waits", "Waits and hold points", ("waits", "holds")),
    Section("people", "People and cautions", ("people", "cautions")),
    Section("incidents", "Trips, making safe, pauses and clocks", ("trips", "safe", "gaps")),
    Section("remarks", "Remarks and choices", ("remarks", "choices")),
    Section("pictures", "Pictures", ("pictures",)),
    Section("basis", "Nameplate values, formulas and instruments", ("givens", "formulas", "instruments")),
    Section("log", "The whole run, event by event", ("log",)),
    Section("proof", "Signatures, chain of events and how to verify"),
)


def printed(record: Record) -> tuple[Section, ...]:
    """The sections that this record has something for."""
    return tuple(s for s in SECTIONS if not s.fields or any(getattr(record, f) for f in s.fields))
