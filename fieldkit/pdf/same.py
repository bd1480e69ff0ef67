"""Whether two PDF objects draw the same: compared by content, whatever their numbers in the file."""

from __future__ import annotations

from typing import Any

from pikepdf import Array, Dictionary, PdfError, Stream

#: links back up, and numbers that only the structure tree needs
_IGNORED = {"/Parent", "/StructParents", "/StructParent", "/Length", "/Filter", "/DecodeParms"}
_DEEPEST = 40


def difference(one: Any, other: Any, depth: int = 0) -> str:
    """Where the two part, as a path such as "/Font/F1"; empty when they are the same."""
    if depth > _DEEPEST:
        return " nested too deeply"
    for kind in (Stream, Array, Dictionary):
        if isinstance(one, kind) != isinstance(other, kind):
            return " of another kind"
    if isinstance(one, Array):
        if len(one) != len(other):
            return " of another length"
        for place, (a, b) in enumerate(zip(one, other, strict=True)):
            found = difference(a, b, depth + 1)
            if found:
                return f"[{place}]{found}"
        return ""
    if isinstance(one, Dictionary | Stream):
        keys = ({*one.keys()} | {*other.keys()}) - _IGNORED
        for key in sorted(keys):
            if key not in one or key not in other:
                return f"{key} is in one only"
            found = difference(one[key], other[key], depth + 1)
            if found:
                return f"{key}{found}"
        if isinstance(one, Stream) and _content(one) != _content(other):
            return " has other content"
        return ""
    return "" if one == other else f" {one} is not {other}"


def _content(stream: Stream) -> bytes:
    """What the stream holds, unpacked; a picture as it is coded."""
    try:
        return stream.read_bytes()
    except PdfError:
        return str(stream.get("/Filter")).encode() + stream.read_raw_bytes()
