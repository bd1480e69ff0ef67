"""The fonts in a file: do its glyphs look like the characters that its text claims?

Each embedded glyph's outline is compared with the one that the project's own font of that name has for the claimed
characters. So a font that draws 46 and says 40 is found, and so is one swapped while the page was made.
"""

from __future__ import annotations

import functools
import io
from typing import Any

import pikepdf
from fontTools.pens.recordingPen import DecomposingRecordingPen
from fontTools.ttLib import TTFont, TTLibError

from fieldkit.pdf import typeset
from fieldkit.pdf.text import to_unicode

_FILES = {name.removeprefix("IBM").removesuffix(".woff2").lower(): name for _, _, _, name in typeset.FONTS}


def embedded(pdf: pikepdf.Pdf) -> dict[str, Any]:
    """Every font that a page or something drawn on it uses, by its name in the file."""
    found: dict[str, Any] = {}
    seen: set[tuple[int, int]] = set()

    def look(resources: Any, depth: int) -> None:
        if resources is None or depth > 12:
            return
        for font in resources.get("/Font", {}).values():
            found[f"{font.BaseFont} {font.objgen}"] = font
        for drawn in resources.get("/XObject", {}).values():
            if drawn.objgen not in seen:
                seen.add(drawn.objgen)
                look(drawn.get("/Resources"), depth + 1)

    for page in pdf.pages:
        look(page.obj.get("/Resources"), 0)
        for note in page.obj.get("/Annots", ()):
            normal = note.get("/AP", {}).get("/N")
            if normal is not None:
                look(normal.get("/Resources"), 0)
    return found


def disagreements(font: Any) -> list[str]:
    """The characters that this font does not draw as the project's fonts draw them; empty when all agree.

    Raises ValueError when the font is of another form than fieldkit embeds.
    """
    descendant = font.DescendantFonts[0]
    try:
        face = TTFont(io.BytesIO(descendant.FontDescriptor.FontFile2.read_bytes()))
        drawn = face.getGlyphSet()
        order = face.getGlyphOrder()
    except (TTLibError, AttributeError, KeyError) as exc:
        raise ValueError("a font in the file cannot be read") from exc
    claims = to_unicode(font)
    return [text for code, text in claims.items() if text.strip() and not _known(_outline(drawn, order, code), text)]


def _outline(drawn: Any, order: list[str], code: int) -> tuple[Any, ...]:
    if code >= len(order):
        return ()
    pen = DecomposingRecordingPen(drawn)
    drawn[order[code]].draw(pen)
    return _plain(pen.value)


def _plain(value: list[Any]) -> tuple[Any, ...]:
    return tuple((step, tuple(points)) for step, points in value)


def _known(outline: tuple[Any, ...], text: str) -> bool:
    """Whether one of the project's typefaces draws `text` with this outline."""
    return bool(outline) and any(outline in _outlines(name, text) for name in _FILES.values())


@functools.cache
def _face(name: str) -> tuple[Any, dict[int, str], dict[str, list[str]]]:
    face = TTFont(io.BytesIO(typeset.font(name)))
    return face.getGlyphSet(), face.getBestCmap(), _substitutes(face)


def _substitutes(face: Any) -> dict[str, list[str]]:
    """First glyph of each ligature and single substitution -> what may be drawn instead."""
    found: dict[str, list[str]] = {}
    if "GSUB" not in face:
        return found
    for lookup in face["GSUB"].table.LookupList.Lookup:
        for table in lookup.SubTable:
            inner = getattr(table, "ExtSubTable", table)
            for source, target in getattr(inner, "mapping", {}).items():
                if isinstance(target, str):
                    found.setdefault(source, []).append(target)
            for first, ligatures in getattr(inner, "ligatures", {}).items():
                for one in ligatures:
                    found.setdefault(" ".join([first, *one.Component]), []).append(one.LigGlyph)
    return found


@functools.cache
def _outlines(name: str, text: str) -> tuple[tuple[Any, ...], ...]:
    """Every outline with which the typeface may draw `text`: the glyph itself, its alternates, its ligature."""
    drawn, cmap, substitutes = _face(name)
    glyphs = [cmap.get(ord(c)) for c in text]
    if None in glyphs:
        return ()
    key = " ".join(str(g) for g in glyphs)
    candidates = [*substitutes.get(key, ()), *([str(glyphs[0])] if len(glyphs) == 1 else [])]
    found = []
    for glyph in candidates:
        pen = DecomposingRecordingPen(drawn)
        drawn[glyph].draw(pen)
        found.append(_plain(pen.value))
    return tuple(found)
