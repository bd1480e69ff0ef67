"""HTML to PDF pages, the same bytes on every machine: the one module that drives the typesetting library.

Fonts come only from static/fonts, by @font-face; fontconfig is pointed at an empty folder meanwhile, so that no font
of the machine can slip in. What the library merely logs (a bad declaration, a missing picture) is an error here.
Not here: what the HTML says (render.py).
"""

from __future__ import annotations

import functools
import importlib
import io
import logging
import os
import tempfile
import threading
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from fieldkit import files
from fieldkit.errors import Refusal

NEEDS = "apt-get install --no-install-recommends libpango-1.0-0 libpangoft2-1.0-0 libharfbuzz-subset0"
#: one family name a typeface; the files are complete, so that no glyph comes from elsewhere
FONTS = (
    ("Plex Sans", 400, "normal", "IBMPlexSans-Regular.woff2"),
    ("Plex Sans", 400, "italic", "IBMPlexSans-Italic.woff2"),
    ("Plex Sans", 500, "normal", "IBMPlexSans-Medium.woff2"),
    ("Plex Sans", 600, "normal", "IBMPlexSans-SemiBold.woff2"),
    ("Plex Sans", 700, "normal", "IBMPlexSans-Bold.woff2"),
    ("Plex Mono", 400, "normal", "IBMPlexMono-Regular.woff2"),
    ("Plex Mono", 500, "normal", "IBMPlexMono-Medium.woff2"),
    ("Plex Mono", 600, "normal", "IBMPlexMono-SemiBold.woff2"),
)
_LOCK = threading.Lock()


class TypesetError(Exception):
    """The pages could not be made as written: what the library complained of. A fault of the program."""


@dataclass(frozen=True)
class Box:
    """Where an element came to stand: page from 0, and its rectangle in PDF points from the page's lower left."""

    page: int
    x0: float
    y0: float
    x1: float
    y1: float


@dataclass(frozen=True)
class Pages:
    """A PDF of pages, before attachments and fields, and where the elements with an id are."""

    pdf: bytes
    count: int
    boxes: dict[str, Box]


def library() -> Any:
    """The typesetting library. Raises Refusal typesetting-missing with the packages to install."""
    try:
        return importlib.import_module("weasyprint")
    except (OSError, ImportError) as exc:
        says = f"PDFs cannot be made on this machine: {exc}. Install what is missing: {NEEDS}"
        raise Refusal("typesetting-missing", says) from exc


def version() -> str:
    """The typesetting library and what it stands on, as far as it decides where a glyph comes to stand."""
    weasyprint = library()
    text = importlib.import_module("weasyprint.text.ffi")
    return f"weasyprint {weasyprint.__version__}, pango {text.pango.pango_version()}"


@functools.cache
def _faces() -> str:
    rules = (
        f'@font-face{{font-family:"{family}";font-weight:{weight};font-style:{style};src:url(fieldkit:font/{name})}}'
        for family, weight, style, name in FONTS
    )
    return "\n".join(rules)


@functools.cache
def _font_files() -> dict[str, tuple[str, bytes]]:
    return {f"font/{name}": ("font/ttf", font(name)) for _, _, _, name in FONTS}


@functools.cache
def font(name: str) -> bytes:
    """A font of static/fonts, unpacked once a process; the library would do so at every use."""
    ttfont = importlib.import_module("fontTools.ttLib").TTFont
    with ttfont(files.folder("static") / "fonts" / name, recalcTimestamp=False) as face:
        face.flavor = None
        out = io.BytesIO()
        face.save(out)
    return out.getvalue()


def pages(
    html: str,
    css: str,
    *,
    identifier: bytes,
    resources: Mapping[str, tuple[str, bytes]] | None = None,
    variant: str | None = "pdf/a-3a",
    otherwise: tuple[str, str] | None = None,
) -> Pages:
    """The pages of `html` under `css`. `resources` are pictures by name (media type, bytes), asked for as fieldkit:...

    `otherwise` is an id and more CSS: when that element does not come to stand on the first page, the pages are laid
    out again with the CSS added. `identifier` becomes the file's identifier; the same arguments give the same bytes.
    Raises TypesetError, and Refusal typesetting-missing.
    """
    weasyprint = library()
    closed = importlib.import_module("fieldkit.pdf.fetcher").Closed
    fetcher = closed({**_font_files(), **(resources or {})})
    with _LOCK, _no_system_fonts(), _complaints() as complaints, _refusals():
        fonts = importlib.import_module("weasyprint.text.fonts").FontConfiguration()

        def laid_out(text: str) -> Any:
            sheet = weasyprint.CSS(string=_faces() + text, font_config=fonts, url_fetcher=fetcher)
            return weasyprint.HTML(string=html, base_url="fieldkit:", url_fetcher=fetcher).render(
                stylesheets=[sheet], font_config=fonts, pdf_variant=variant, pdf_tags=variant is not None
            )

        document = laid_out(css)
        if otherwise and otherwise[0] not in document.pages[0].anchors:
            document = laid_out(css + otherwise[1])
        pdf = document.write_pdf(
            pdf_identifier=identifier, pdf_variant=variant, pdf_tags=variant is not None, custom_metadata=False
        )
    if complaints:
        raise TypesetError("; ".join(complaints))
    return Pages(pdf, len(document.pages), _boxes(document))


def _boxes(document: Any) -> dict[str, Box]:
    """Every id's rectangle. The library measures in CSS pixels from the top left; a PDF in points from below."""
    found: dict[str, Box] = {}
    for number, page in enumerate(document.pages):
        for name, (x0, y0, x1, y1) in page.anchors.items():
            points = (x0 * 0.75, (page.height - y1) * 0.75, x1 * 0.75, (page.height - y0) * 0.75)
            found.setdefault(name, Box(number, *(round(p, 3) for p in points)))
    return found


@contextmanager
def _no_system_fonts() -> Iterator[None]:
    """fontconfig sees one empty folder while this lasts."""
    with tempfile.TemporaryDirectory(prefix="fieldkit-fonts-") as name:
        config = Path(name) / "fonts.conf"
        empty = Path(name) / "empty"
        empty.mkdir()
        config.write_text(f"<fontconfig><dir>{empty}</dir><cachedir>{name}</cachedir></fontconfig>", encoding="utf-8")
        before = os.environ.get("FONTCONFIG_FILE")
        os.environ["FONTCONFIG_FILE"] = str(config)
        try:
            yield
        finally:
            if before is None:
                del os.environ["FONTCONFIG_FILE"]
            else:
                os.environ["FONTCONFIG_FILE"] = before


@contextmanager
def _refusals() -> Iterator[None]:
    """The fetcher's refusal is a BaseException in the library; here it is a TypesetError like any other."""
    fatal = importlib.import_module("weasyprint.urls").FatalURLFetchingError
    try:
        yield
    except fatal as exc:
        raise TypesetError(str(exc)) from exc


class _Listener(logging.Handler):
    def __init__(self) -> None:
        super().__init__(logging.WARNING)
        self.heard: list[str] = []

    def emit(self, record: logging.LogRecord) -> None:
        self.heard.append(record.getMessage())


@contextmanager
def _complaints() -> Iterator[list[str]]:
    """What the library logs at warning level or above while this lasts."""
    logger, listener = logging.getLogger("weasyprint"), _Listener()
    logger.addHandler(listener)
    try:
        yield listener.heard
    finally:
        logger.removeHandler(listener)
