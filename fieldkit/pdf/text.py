"""What the pages say: the text drawn on them in reading order, from the file alone.

Reading order is the structure tree's. Text that is in no structure element (the title block) is kept apart by page.
Each glyph is read through its font's ToUnicode, which a forger may bend; fonts.py compares it with the glyphs.
Not here: what the pages should say (expected.py).
"""

from __future__ import annotations

import re
from collections import defaultdict
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

import pikepdf
from pikepdf import Array, Dictionary

UNREADABLE = "\N{REPLACEMENT CHARACTER}"
#: text rendering modes that draw nothing to see
_INVISIBLE = {3, 7}
_DEEPEST = 12


@dataclass
class Said:
    """Text in reading order; text of table heads, which repeat on every page; text outside the structure, by page."""

    body: str = ""
    heads: list[str] = field(default_factory=list)
    furniture: list[str] = field(default_factory=list)
    #: what a reader would not see although it is in the text
    hidden: str = ""


def squeeze(text: str) -> str:
    """Without white space: lines break elsewhere on another page, words stay."""
    return "".join(text.split())


def said(pdf: pikepdf.Pdf) -> Said:
    """Everything the pages say. Raises pikepdf's errors, KeyError or ValueError on a damaged page."""
    out = Said()
    marked: dict[tuple[Any, int], list[str]] = {}
    orders: list[list[tuple[int | None, str]]] = []
    for page in pdf.pages:
        order: list[tuple[int | None, str]] = []
        reader = _Reader(order, out)
        reader.read(page.obj, page.obj.get("/Resources", Dictionary()), None, 0)
        orders.append(order)
        for mark, text in order:
            if mark is not None:
                marked.setdefault((page.obj.objgen, mark), []).append(text)
    used: set[tuple[Any, int]] = set()
    tree = pdf.Root.get("/StructTreeRoot")
    body: list[str] = []
    if tree is not None:
        for head, key in _leaves(tree.get("/K"), None, False, 0):
            used.add(key)
            text = "".join(marked.get(key, ()))
            (out.heads if head else body).append(text)
    out.body = "".join(body)
    for page, order in zip(pdf.pages, orders, strict=True):
        out.furniture.append("".join(t for m, t in order if m is None or (page.obj.objgen, m) not in used))
    return out


def form(stream: pikepdf.Object) -> str:
    """The text that one form XObject (an appearance) draws."""
    order: list[tuple[int | None, str]] = []
    _Reader(order, Said()).read(stream, stream.get("/Resources", Dictionary()), None, 0)
    return "".join(t for _, t in order)


def _leaves(kids: Any, page: Any, head: bool, depth: int) -> Iterator[tuple[bool, tuple[Any, int]]]:
    """Marked content in the tree's order: whether it is in a table's head, and its page and number."""
    if kids is None or depth > 200:
        return
    for kid in kids if isinstance(kids, Array) else [kids]:
        if isinstance(kid, int):
            yield head, (page, int(kid))
        elif isinstance(kid, Dictionary):
            own = kid.Pg.objgen if "/Pg" in kid else page
            if "/MCID" in kid:
                yield head, (own, int(kid.MCID))
            else:
                yield from _leaves(kid.get("/K"), own, head or kid.get("/S") == "/THead", depth + 1)


class _Reader:
    """Walks one content stream, and the forms it draws, and notes what is shown under which mark."""

    def __init__(self, order: list[tuple[int | None, str]], out: Said) -> None:
        self._order = order
        self._out = out

    def read(self, stream: Any, resources: Any, mark: int | None, depth: int) -> None:
        if depth > _DEEPEST:
            raise ValueError("drawings are nested too deeply")
        marks: list[int | None] = [mark]
        font: dict[int, str] = {}
        mode, modes = 0, []
        for operands, operator in pikepdf.parse_content_stream(stream):
            name = str(operator)
            if name in ("BDC", "BMC"):
                marks.append(_mark(operands, resources, marks[-1]))
            elif name == "EMC":
                if len(marks) > 1:
                    marks.pop()
            elif name == "Tf":
                font = to_unicode(resources.Font[str(operands[0])])
            elif name == "Tr":
                mode = int(operands[0])
            elif name == "q":
                modes.append((mode, font))
            elif name == "Q" and modes:
                mode, font = modes.pop()
            elif name in ("Tj", "TJ", "'", '"'):
                text = "".join(_decode(o, font) for o in _strings(operands))
                self._order.append((marks[-1], text))
                if mode in _INVISIBLE:
                    self._out.hidden += text
            elif name == "Do":
                drawn = resources.XObject[str(operands[0])]
                if drawn.get("/Subtype") == "/Form":
                    self.read(drawn, drawn.get("/Resources", resources), marks[-1], depth + 1)


def _mark(operands: Any, resources: Any, outer: int | None) -> int | None:
    """The number of the marked content that begins; an artifact or an unnumbered mark keeps the outer one's."""
    if str(operands[0]) == "/Artifact":
        return None
    if len(operands) < 2:
        return outer
    properties = operands[1]
    if not isinstance(properties, Dictionary):
        properties = resources.Properties[str(properties)]
    return int(properties.MCID) if "/MCID" in properties else outer


def _strings(operands: Any) -> Iterator[bytes]:
    for operand in operands:
        if isinstance(operand, Array):
            yield from _strings(operand)
        elif isinstance(operand, pikepdf.String):
            yield bytes(operand)


def _decode(codes: bytes, font: dict[int, str]) -> str:
    pairs = (int.from_bytes(codes[i : i + 2], "big") for i in range(0, len(codes), 2))
    return "".join(font.get(code, UNREADABLE) for code in pairs)


_TOKEN = re.compile(rb"begin(bfchar|bfrange)(.*?)end\1", re.DOTALL)
_HEX = re.compile(rb"<([0-9a-fA-F\s]*)>")


def to_unicode(font: Any) -> dict[int, str]:
    """Code to text of a two-byte font, from its ToUnicode. Raises ValueError for a font of another form."""
    if font.get("/Subtype") != "/Type0" or "/ToUnicode" not in font:
        raise ValueError("a font on the page is not of the form that fieldkit embeds")
    table: dict[int, str] = defaultdict(lambda: UNREADABLE)
    for kind, body in _TOKEN.findall(font.ToUnicode.read_bytes()):
        words = [bytes.fromhex(w.decode()) for w in _HEX.findall(body)]
        if kind == b"bfchar":
            for code, text in zip(words[::2], words[1::2], strict=True):
                table[int.from_bytes(code, "big")] = text.decode("utf-16-be")
        else:
            for first, last, text in zip(words[::3], words[1::3], words[2::3], strict=True):
                start = text.decode("utf-16-be")
                for step in range(int.from_bytes(last, "big") - int.from_bytes(first, "big") + 1):
                    table[int.from_bytes(first, "big") + step] = start[:-1] + chr(ord(start[-1]) + step)
    return dict(table)
