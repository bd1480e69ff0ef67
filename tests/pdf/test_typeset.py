"""Typesetting: the same bytes every time, no font but ours, nothing fetched, and a complaint is a failure."""

from __future__ import annotations

import io
import os

import pikepdf
import pytest

from fieldkit.errors import Refusal
from fieldkit.pdf import expected, fonts, text, typeset

CSS = '@page{size:A5;margin:10mm} body{font:400 10pt "Plex Sans"} .m{font-family:"Plex Mono"} b{font-weight:600}'
WORDS = "Łódź Δ Ω ≤ ≥ √ → ✓ ½ µ − “fi” fl ±1.2"


def _html(body: str) -> str:
    return f'<html lang="en"><head><title>T</title></head><body>{body}</body></html>'


def _pages(body: str, **named) -> typeset.Pages:
    return typeset.pages(_html(body), CSS, identifier=b"test", **named)


def test_the_same_arguments_give_the_same_bytes_whatever_the_machines_fonts_are(monkeypatch, tmp_path):
    first = _pages(f"<p>{WORDS} <b>bold</b></p>")
    monkeypatch.setenv("FONTCONFIG_FILE", str(tmp_path / "nothing.conf"))
    assert _pages(f"<p>{WORDS} <b>bold</b></p>").pdf == first.pdf
    assert os.environ["FONTCONFIG_FILE"] == str(tmp_path / "nothing.conf")


def test_every_glyph_is_the_one_that_the_text_layer_claims():
    pdf = pikepdf.open(io.BytesIO(_pages(f"<p>{WORDS} <b>{WORDS}</b></p><p class='m'>−11.96 µ ≤ →</p>").pdf))
    found = fonts.embedded(pdf)
    assert len(found) == 3
    assert {name: fonts.disagreements(font) for name, font in found.items()} == dict.fromkeys(found, [])


def test_a_text_layer_that_lies_about_a_glyph_is_found():
    pdf = pikepdf.open(io.BytesIO(_pages("<p>46 mA</p>").pdf))
    (font,) = fonts.embedded(pdf).values()
    cmap = font.ToUnicode.read_bytes()
    assert b"<0034>" in cmap and b"<0036>" in cmap
    font.ToUnicode.write(cmap.replace(b"<0036>", b"<0030>"))
    assert text.squeeze(text.said(pdf).body) == "40mA"
    assert fonts.disagreements(font) == ["0"]


@pytest.mark.parametrize(
    "body",
    [
        '<img alt="" src="file:///etc/passwd">',
        '<link rel="attachment" href="file:///etc/hostname">',
        '<p style="background:url(http://elsewhere.example/x.png)">x</p>',
        '<img alt="" src="data:image/svg+xml,<svg xmlns=%22http://www.w3.org/2000/svg%22><image href=%22file:///etc/passwd%22/></svg>">',
        '<img alt="" src="fieldkit:picture/unknown">',
    ],
)
def test_nothing_outside_the_record_is_loaded(body):
    with pytest.raises(typeset.TypesetError):
        _pages(body)


def test_what_the_library_only_logs_is_a_failure():
    with pytest.raises(typeset.TypesetError, match="notacolour"):
        _pages('<p style="color:notacolour">x</p>')


def test_a_machine_without_pango_is_told_what_to_install(monkeypatch):
    def missing(name):
        raise OSError("cannot load library 'libgobject-2.0-0'")

    monkeypatch.setattr(typeset.importlib, "import_module", missing)
    with pytest.raises(Refusal) as caught:
        typeset.library()
    assert caught.value.code == "typesetting-missing"
    for package in ("libpango-1.0-0", "libpangoft2-1.0-0", "libharfbuzz-subset0"):
        assert package in caught.value.sentence


def test_pages_are_read_back_in_the_order_of_the_html_with_drawings_and_repeating_heads():
    svg = "<svg xmlns='http://www.w3.org/2000/svg' viewBox='0 0 90 20' width='90' height='20'><text y='15'>in it</text></svg>"
    rows = "".join(f"<tr><td>{n}</td><td>row {n}</td></tr>" for n in range(60))
    body = (
        f"<div style='display:flex'><p>left</p><p>right <img alt='x' src=\"data:image/svg+xml,{svg}\"></p></div>"
        f"<table><thead><tr><th>No</th><th>What</th></tr></thead><tbody>{rows}</tbody></table><p>the end</p>"
    )
    made = _pages(body)
    said, meant = text.said(pikepdf.open(io.BytesIO(made.pdf))), expected.expected(_html(body))
    assert made.count > 1
    assert text.squeeze(said.body) == text.squeeze(meant.body)
    assert meant.heads == ["No", "What"] and said.heads == ["No", "What"] * made.count
    assert "init" in text.squeeze(said.body) and said.hidden == ""


def test_an_elements_box_is_given_in_points_from_the_pages_lower_left():
    made = _pages('<div id="a" style="position:absolute;left:0;top:0;width:50mm;height:20mm">x</div>')
    box = made.boxes["a"]
    assert (box.page, round(box.x1 - box.x0, 1), round(box.y1 - box.y0, 1)) == (0, 141.7, 56.7)
    assert round(box.y1, 1) == round(595.28 - 28.35, 1)
