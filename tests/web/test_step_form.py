"""Every control has its face: a form, a template and a module of the tablet; and the templates hold nothing of anybody."""

from __future__ import annotations

import re
from html.parser import HTMLParser

from fieldkit.files import folder
from fieldkit.sheet.controls import CONTROLS
from fieldkit.web import step_form


def test_controls_forms_templates_and_modules_are_the_same_set() -> None:
    templates = {p.stem for p in (folder("templates") / "controls").glob("*.html") if not p.stem.startswith("_")}
    modules = {p.stem for p in (folder("static") / "tablet" / "controls").glob("*.js")} - {"all"}
    listed = (folder("static") / "tablet" / "controls" / "all.js").read_text(encoding="utf-8")
    named = re.search(r"CONTROLS = \{ (.*) \};", listed)
    assert set(CONTROLS) == set(step_form.FORMS) == templates == modules
    assert named is not None
    assert named[1].split(", ") == list(CONTROLS)


class Marks(HTMLParser):
    """Gathers the controls in order, inline style and script, and the types of inputs."""

    def __init__(self) -> None:
        super().__init__()
        self.controls: list[str] = []
        self.inline: list[str] = []
        self.types: set[str] = set()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        held = dict(attrs)
        if tag == "template" and held.get("data-control"):
            self.controls.append(str(held["data-control"]))
        if tag in ("script", "style") or "style" in held or any(name.startswith("on") for name in held):
            self.inline.append(f"{tag} {held}")
        if tag == "input":
            self.types.add(str(held.get("type")))


def test_the_kits_controls_are_one_template_each_without_inline_style_or_script_or_number_fields() -> None:
    marks = Marks()
    marks.feed(step_form.controls_html())
    assert marks.controls == list(CONTROLS)
    assert marks.inline == []
    assert marks.types == {"text", "file"}


def test_the_kits_controls_are_the_same_bytes_each_time() -> None:
    assert step_form.controls_html() == step_form.controls_html()
