"""Checks on the two signatures of the file: that they are there, genuine, in their roles, and the last word."""

from __future__ import annotations

import re

from fieldkit.errors import Refusal
from fieldkit.pdf import signed
from fieldkit.pdf.assemble import SEAL, SUPERVISOR
from fieldkit.pdf.report import Note, Unknown, Wrong
from fieldkit.pdf.signed import Signature
from fieldkit.pdf.subject import Subject
from fieldkit.trust import certificates
from fieldkit.trust.certificates import Holder

#: revisions of a finished file: as put together, sealed, countersigned
REVISIONS = 3
_END = re.compile(rb"\nstartxref\n\d+\n%%EOF\n\Z")
#: where the signatures are said to stand, by field
_WHOSE = {SEAL: "the station's seal", SUPERVISOR: "the supervisor's signature"}


def reads(subject: Subject) -> str:
    """The file reads as a PDF."""
    try:
        pages = len(subject.pdf.pages)
        _ = subject.reader
    except Unknown as exc:
        raise Wrong(str(exc)) from exc
    return f"{pages} page{'s' if pages != 1 else ''}, {len(subject.data)} bytes."


def required(subject: Subject) -> str:
    """Both signatures are there, each by a certificate of its role, and nothing else is or can be signed."""
    found = signed.names(subject.reader)
    wrong = [f"{_whose(n)} is missing." for n in (SEAL, SUPERVISOR) if not found.get(n)]
    wrong += [f"There is a field that a record does not have: {n}." for n in found if n not in _WHOSE]
    for name, role in ((SEAL, certificates.SEAL), (SUPERVISOR, "supervisor")):
        signature = subject.signatures.get(name)
        if signature and signature.certificate is not None:
            roles = certificates.holder(signature.certificate).roles
            if role not in roles or (role != certificates.SEAL and certificates.SEAL in roles):
                wrong.append(f"{_whose(name)} was made by a certificate for {', '.join(roles) or 'no role'}.")
    if wrong:
        raise Wrong(*wrong)
    return "Sealed by the station, countersigned by a supervisor, no other field."


def seal(subject: Subject) -> str:
    """The seal is genuine and certifies the file."""
    signature = _signature(subject, SEAL)
    if not signature.certifies:
        raise Wrong("The seal does not certify the file, so anything could be added to it.")
    return f"Sealed {_when(signature)} by {_holder(signature).name}."


def countersignature(subject: Subject) -> str:
    """The supervisor's signature is genuine, closes the file, and is not the recorder's."""
    signature = _signature(subject, SUPERVISOR)
    if not signature.locks:
        raise Wrong("The supervisor's signature does not close the file to later changes.")
    holder = _holder(signature)
    # whoever only signed (a release, a deviation) may countersign; the record then says so
    recorders = {e.head.by for e in subject.events if e.head.kind != "signed"}
    if holder.id in recorders:
        raise Wrong(f"{holder.name} recorded this run and countersigned it; that takes another person.")
    reviewer = (subject.record.get("context") or {}).get("reviewer")
    if reviewer and reviewer.get("id") != holder.id:
        raise Wrong(f"The record was made ready for {reviewer.get('name')}, but {holder.name} countersigned it.")
    return f"“{signature.reason}” {holder.name}, {_when(signature)}."


def untouched(subject: Subject) -> str:
    """Nothing was added, changed or left over beside what the two signatures cover."""
    if not _END.search(subject.data):
        raise Wrong("The file does not end where a PDF ends: something follows it.")
    wrong = []
    found = subject.signatures
    for name in (SEAL, SUPERVISOR):
        signature = found.get(name)
        if signature is None:
            continue
        if signature.problem or not signature.whole_revision:
            wrong.append(f"{_whose(name)} does not cover what it closed.")
        elif not signature.permitted:
            wrong.append(f"The file was changed after {_WHOSE[name]} in a way that it does not permit.")
    last = found.get(SUPERVISOR) or found.get(SEAL)
    if last is None:
        raise Unknown("No signature covers anything.")
    if not last.whole_file and not last.problem:
        wrong.append("There is something in the file after the last signature.")
    revisions = subject.reader.xrefs.total_revisions
    if SUPERVISOR in found and revisions != REVISIONS:
        wrong.append(f"The file has {revisions} revisions; a record has {REVISIONS}.")
    if wrong:
        raise Wrong(*wrong)
    return "The signatures cover the whole file; nothing follows them."


def trusted(subject: Subject) -> str:
    """The certificates of the seal and the supervisor are the given authority's, at the time claimed."""
    if subject.authority is None:
        raise Unknown("trust: not checked. Give the signing authority's certificate with --ca.")
    wrong = []
    for name in (SEAL, SUPERVISOR):
        signature = subject.signatures.get(name)
        if signature is None or signature.certificate is None:
            wrong.append(f"{_whose(name)} has no certificate to judge.")
        elif signature.time is None:
            wrong.append(f"{_whose(name)} claims no time.")
        elif subject.to_come(signature.time):
            wrong.append(f"{_whose(name)} claims a time that has not come yet: {_when(signature)}.")
        else:
            try:
                certificates.check_chain(signature.certificate, subject.authority, signature.time)
            except Refusal as exc:
                wrong.append(f"{_whose(name)}: {exc.sentence}")
    if wrong:
        raise Wrong(*wrong)
    return f"Issued by {certificates.holder(subject.authority).name}, certificate {_digest(subject)}."


def time(subject: Subject) -> str:
    """Whether a trusted timestamp proves the time."""
    times = [s.time for s in subject.signatures.values() if s.time is not None]
    if not times:
        raise Unknown("No signature claims a time.")
    raise Note("time not proved: the times are the station's clock's, not a timestamp authority's.")


def _signature(subject: Subject, field: str) -> Signature:
    found = subject.signatures.get(field)
    if found is None:
        raise Wrong(f"{_whose(field)} is missing.")
    if found.problem:
        raise Wrong(f"{_whose(field)} cannot be read: {found.problem}")
    if not found.genuine:
        raise Wrong(f"{_whose(field)} does not fit the bytes that it covers: they were changed, or it was.")
    return found


def _holder(signature: Signature) -> Holder:
    if signature.certificate is None:
        raise Unknown("The signature brings no certificate.")
    return certificates.holder(signature.certificate)


def _when(signature: Signature) -> str:
    return signature.time.isoformat(sep=" ", timespec="seconds") if signature.time else "at no stated time"


def _whose(field: str) -> str:
    text = _WHOSE[field]
    return text[0].upper() + text[1:]


def _digest(subject: Subject) -> str:
    return certificates.digest(subject.authority)[:16] if subject.authority else ""
