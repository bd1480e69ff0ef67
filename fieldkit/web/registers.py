"""The registers at the desk: sites, cabinets with their lock boards, tubes, instruments; and nameplates entered twice.

Read only but for nameplates: a first entry with its photograph, a second by somebody else who does not see the first.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from flask import Blueprint, Response, flash, redirect, render_template, request, url_for
from flask.typing import ResponseReturnValue

from fieldkit.errors import Refusal
from fieldkit.operations import board, instruments, moment, people, pictures, registers
from fieldkit.operations.registers import TubeLine
from fieldkit.web import errors, forms
from fieldkit.web.security import SANDBOX, actor, allowed, signed_in

blueprint = Blueprint("registers", __name__, url_prefix="/registers")
NAV = [("Registers", "registers.page", ("technician", "supervisor", "administrator", "writer"))]
ENTERS = allowed("technician", "supervisor", "administrator")


@blueprint.get("")
@signed_in
def page() -> ResponseReturnValue:
    cabinets = registers.cabinets()
    return render_template(
        "registers/page.html",
        sites=registers.sites(),
        cabinets=cabinets,
        boards=board.boards(list(cabinets)),
        tubes=registers.tubes(),
        instruments=instruments.lines(registers.instruments(), moment.now().date().isoformat()),
    )


@blueprint.get("/tubes/<serial>")
@signed_in
def tube(serial: str) -> ResponseReturnValue:
    return _shown(serial, {})


def _shown(serial: str, typed: Mapping[str, str]) -> str:
    """A tube's page; what was typed and refused stands in its fields again."""
    found = registers.tube(serial)
    names = {p.id: p.name for p in people.everyone()}
    second = found.waiting is not None and found.waiting.entered_by != actor().id
    return render_template(
        "registers/tube.html", tube=found, names=names, second=second, form=forms.SignOut(), typed=typed
    )


def _typed(found: TubeLine) -> dict[str, Any]:
    """What was typed for each value of the nameplate; a ladder of levels is typed with spaces between."""
    made = {}
    for name, given in found.givens.items():
        text = request.form.get(f"value-{name}", "")
        made[name] = {"texts": text.split() if len(given["texts"]) > 1 else [text.strip()], "unit": given["unit"]}
    return made


@blueprint.post("/tubes/<serial>/first")
@ENTERS
def first(serial: str) -> ResponseReturnValue:
    """The first entry, with a photograph of the plate."""
    found = registers.tube(serial)
    file = request.files.get("photograph")
    try:
        if file is None or not file.filename:
            raise Refusal("no-photograph", "A nameplate needs its photograph: without one it does not count.")
        photograph = pictures.put(file.read(), actor().id)
        registers.enter_nameplate(actor(), serial, _typed(found), photograph)
        flash("Entered. It counts when somebody else has read the plate and entered the same.", "done")
    except Refusal as bad:
        errors.tell(bad)
        return _shown(serial, request.form), 422
    return redirect(url_for("registers.tube", serial=serial), 303)


@blueprint.post("/tubes/<serial>/second")
@ENTERS
def second(serial: str) -> ResponseReturnValue:
    """The second entry, by another person."""
    try:
        registers.confirm_nameplate(actor(), serial, _typed(registers.tube(serial)))
        flash("Both entries agree: the nameplate counts from now on.", "done")
    except Refusal as bad:
        errors.tell(bad)
        if bad.code != "entries-differ":
            return _shown(serial, request.form), 422
    return redirect(url_for("registers.tube", serial=serial), 303)


@blueprint.get("/pictures/<sha256>.jpg")
@signed_in
def picture(sha256: str) -> Response:
    """The copy made here; what was received is never sent out."""
    response = Response(pictures.shown(sha256), content_type="image/jpeg")
    response.headers["Content-Security-Policy"] = SANDBOX
    response.headers["Content-Disposition"] = f'inline; filename="{sha256[:12]}.jpg"'
    response.headers["Cache-Control"] = "private, max-age=3600"
    return response
