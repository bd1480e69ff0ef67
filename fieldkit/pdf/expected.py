"""What the pages should say: the text of a record's HTML, as a reader of the pages meets it.

Twin in purpose of text.py, from the other end: body in order, table heads apart, the title block apart.
"""

from __future__ import annotations

import base64
import binascii
from dataclasses import dataclass, field
from html.parser import HTMLParser
from urllib.parse import unquote_to_bytes

#: the element that stands on every page, and the place in it that says which page
FURNITURE, COUNTER = "furniture", "page-counter"
_VOID = {"area", "base", "br", "col", "embed", "hr", "img", "input", "link", "meta", "source", "track", "wbr"}
_UNSEEN = {"head", "style", "script", "title", "desc"}


@dataclass
class Expected:
    body: str = ""
    heads: list[str] = field(default_factory=list)
    #: the title block's text before and after the place of the page number
    furniture: tuple[str, str] = ("", "")

    def furniture_of(self, page: int, pages: int) -> str:
        """The title block's text on `page` (from 1) of `pages`."""
        before, after = self.furniture
        return f"{before}{page} of {pages}{after}"


def expected(html: str) -> Expected:
    """The text that the pages made from `html` show."""
    walker = _Walker()
    walker.feed(html)
    walker.close()
    out = Expected("".join(walker.body), walker.heads)
    out.furniture = ("".join(walker.before), "".join(walker.after))
    return out


class _Walker(HTMLParser):
    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.body: list[str] = []
        self.heads: list[str] = []
        self.before: list[str] = []
        self.after: list[str] = []
        self._counted = False
        #: open elements, and what each one makes of the text inside: "", unseen, head, furniture
        self._open: list[tuple[str, str]] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        given = dict(attrs)
        if COUNTER in (given.get("class") or "").split():
            self._counted = True
        if tag == "img":
            self._image(given.get("src") or "")
        if tag in _VOID:
            return
        inside = self._open[-1][1] if self._open else ""
        if FURNITURE in (given.get("class") or "").split():
            inside = FURNITURE
        elif tag in _UNSEEN:
            inside = "unseen"
        elif tag == "thead":
            inside = "head"
        self._open.append((tag, inside))

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        if tag == "img":
            self._image(dict(attrs).get("src") or "")

    def handle_endtag(self, tag: str) -> None:
        for place in range(len(self._open) - 1, -1, -1):
            if self._open[place][0] == tag:
                del self._open[place:]
                return

    def handle_data(self, data: str) -> None:
        inside = self._open[-1][1] if self._open else ""
        if inside == FURNITURE:
            (self.after if self._counted else self.before).append(data)
        elif inside == "head":
            self.heads.append(data)
        elif inside != "unseen":
            self.body.append(data)

    def _image(self, source: str) -> None:
        """The text of a drawing is drawn as text."""
        media, _, data = source.partition(",")
        if not media.startswith("data:image/svg+xml"):
            return
        try:
            svg = base64.b64decode(data) if media.endswith(";base64") else unquote_to_bytes(data)
        except binascii.Error:
            return
        inner = _Walker()
        inner.feed(svg.decode("utf-8", "replace"))
        inner.close()
        text = "".join(inner.body)
        if self._open and self._open[-1][1] == "head":
            self.heads.append(text)
        else:
            self.body.append(text)
