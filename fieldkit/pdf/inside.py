"""The names of the files inside a record's PDF, and reading them out again. Not here: judging them (checks/)."""

from __future__ import annotations

import pikepdf

RECORD, SHEET, EVENTS, PROCEDURE = "record.json", "sheet.json", "events.ndjson", "procedure.yaml"
AUTHORITY, RENDERING = "signing-authority.pem", "rendering.json"
#: what every record has; pictures come besides
REQUIRED = (RECORD, SHEET, EVENTS, PROCEDURE, AUTHORITY, RENDERING)
_PICTURE = "picture-"


def picture(sha256: str) -> str:
    """The name of an attached picture."""
    return f"{_PICTURE}{sha256}.jpg"


def pictures(files: dict[str, bytes]) -> dict[str, bytes]:
    """The attached pictures by the hash in their name (not checked here)."""
    return {n.removeprefix(_PICTURE).removesuffix(".jpg"): d for n, d in files.items() if n.startswith(_PICTURE)}


def attachments(pdf: pikepdf.Pdf) -> dict[str, bytes]:
    """Every embedded file by name. Raises ValueError when a name stands twice, pikepdf's errors when damaged."""
    found: dict[str, bytes] = {}
    tree = pdf.Root.get("/Names", pikepdf.Dictionary()).get("/EmbeddedFiles")
    if tree is None:
        return found
    if "/Kids" in tree:
        raise ValueError("the list of attached files has not the form that fieldkit writes")
    names = list(tree.get("/Names", pikepdf.Array()))
    for label, spec in zip(names[::2], names[1::2], strict=True):
        name = str(spec.UF)
        if name != str(label) or name in found:
            raise ValueError(f"the attached file {name} is named twice or otherwise than listed")
        found[name] = spec.EF.F.read_bytes()
    return found
