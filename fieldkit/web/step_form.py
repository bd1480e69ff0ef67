"""The fields of the controls, and their HTML: what the tablet fills from a sheet, without anyone's data.

`controls_html` is the kit's "controls" blob: one `<template data-control="...">` a control, rendered when the kit is
made. Not here: what an answer means (fieldkit.run) and any value; no form is posted, events are made on the tablet.
To add a control: a Form below (or Plain), one line in FORMS, templates/controls/<control>.html.
"""

from __future__ import annotations

from jinja2 import Environment, FileSystemLoader, StrictUndefined
from markupsafe import Markup
from wtforms import FileField, Form, StringField, TextAreaField

from fieldkit import drawing
from fieldkit.files import folder
from fieldkit.sheet.controls import CONTROLS

#: The tablet has its own keypad; the browser must neither help, correct nor complete.
_TYPED = {"autocomplete": "off", "autocapitalize": "off", "spellcheck": "false"}
_READING = {**_TYPED, "inputmode": "none", "enterkeyhint": "done"}


class Plain(Form):
    """A control that is answered by its button alone, or by what the sheet makes of it."""


class NumberForm(Form):
    text = StringField("Reading", render_kw=_READING)


class ProveForm(Form):
    """The row that is repeated: tester before, each point, tester after."""

    text = StringField("Reading", render_kw=_READING)


class LockForm(Form):
    lock = StringField("Number on the lock", render_kw=_TYPED)
    tag = StringField("Number on the tag", render_kw=_TYPED)


class UnlockForm(Form):
    not_on_site = StringField("How you know that the holder is not on site", render_kw=_TYPED)
    tried = StringField("How you tried to reach the holder", render_kw=_TYPED)
    told = StringField("How the holder will be told before returning", render_kw=_TYPED)


class PictureForm(Form):
    picture = FileField("Take the picture", render_kw={"accept": "image/*", "capture": "environment"})
    note = StringField("What the picture shows, if it needs words", render_kw=_TYPED)


class RemarkForm(Form):
    text = TextAreaField("Remark", render_kw={"rows": 5, "autocomplete": "off"})


#: control -> form, in the order of fieldkit.sheet.controls.CONTROLS
FORMS: dict[str, type[Form]] = {
    "caution": Plain,
    "confirm": Plain,
    "number": NumberForm,
    "prove": ProveForm,
    "lock": LockForm,
    "unlock": UnlockForm,
    "earth": Plain,
    "lift": Plain,
    "choice": Plain,
    "hold": Plain,
    "picture": PictureForm,
    "remark": RemarkForm,
    "result": Plain,
    "wait": Plain,
    "people": Plain,
}


def _symbol(name: str) -> Markup:
    """A symbol of fieldkit.drawing, hidden from readers: a word stands beside each."""
    return Markup(drawing.symbol(name))  # noqa: S704 - our own drawing, no data in it


def controls_html() -> str:
    """The HTML of every control's template, in order. Raises jinja2.UndefinedError where a template asks for more."""
    environment = Environment(
        loader=FileSystemLoader(folder("templates")),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.globals["symbol"] = _symbol
    return "".join(
        environment.get_template(f"controls/{control}.html").render(form=FORMS[control]()) for control in CONTROLS
    )
