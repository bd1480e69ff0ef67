"""The desk's records: what waits for a signature, one record, its events and pictures, return, the countersigned file.

Countersigning itself, and this browser's key, are in desk_signing.py; what a page shows is laid out in desk_view.py.
No view here records a reading: events are made on tablets and nowhere else.
"""

from __future__ import annotations

from flask import Blueprint, Response, flash, redirect, render_template, url_for
from flask.typing import ResponseReturnValue

from fieldkit.errors import Refusal
from fieldkit.operations import pictures, review, runs
from fieldkit.operations.dossier import dossier
from fieldkit.web import desk_signing, desk_view, errors, forms
from fieldkit.web.security import SANDBOX, actor, allowed

blueprint = Blueprint("desk", __name__, url_prefix="/desk")
NAV = [("Records", "desk.records", ("supervisor", "administrator", "technician"))]
READER = allowed("supervisor", "administrator", "technician")
SUPERVISOR = allowed("supervisor")


@blueprint.get("/records")
@READER
def records() -> ResponseReturnValue:
    """What waits for a signature, oldest first, each with what deserves attention in it; then the rest."""
    lines = review.lines()
    waiting = [desk_view.listed(line) for line in lines if line.state == "waiting"]
    return render_template(
        "desk/records.html",
        waiting=waiting,
        returned=[line for line in lines if line.state == "returned"],
        open_runs=[line for line in lines if line.state in ("open", "arriving")],
        countersigned=[line for line in reversed(lines) if line.state == "countersigned"],
        day=desk_view.day,
    )


@blueprint.get("/records/<run>")
@READER
def record(run: str) -> ResponseReturnValue:
    found = dossier(run)
    return render_template("desk/record.html", page=desk_view.page(actor(), found, runs.kept(run)), r=found.record)


@blueprint.get("/records/<run>/events")
@READER
def events(run: str) -> ResponseReturnValue:
    found = dossier(run, as_received=True)
    kept = runs.kept(run)
    return render_template("desk/events.html", r=found.record, kept=kept, day=desk_view.day)


@blueprint.get("/records/<run>/pictures/<sha256>")
@READER
def picture(run: str, sha256: str) -> Response:
    """The copy made here of a picture that this run names."""
    if sha256 not in runs.pictures(run):
        raise Refusal("not-found", "That picture has not arrived.")
    response = Response(pictures.shown(sha256), content_type="image/jpeg")
    response.headers["Content-Security-Policy"] = SANDBOX
    response.headers["Cache-Control"] = "private, max-age=3600"
    return response


@blueprint.get("/records/<run>/return")
@SUPERVISOR
def return_page(run: str) -> ResponseReturnValue:
    return _return_page(run, forms.Reason())


def _return_page(run: str, form: forms.Reason) -> ResponseReturnValue:
    found = dossier(run)
    bad = review.refusal(actor(), found)
    if bad is not None:
        raise bad
    return render_template("desk/return.html", r=found.record, form=form)


@blueprint.post("/records/<run>/return")
@SUPERVISOR
def return_record(run: str) -> ResponseReturnValue:
    form = forms.Reason()
    if not form.validate_on_submit():
        return _return_page(run, form)
    try:
        review.return_run(actor(), run, form.reason.data or "")
    except Refusal as bad:
        errors.tell(bad)
        return redirect(url_for("desk.record", run=run), 303)
    flash(f"Run {run} is returned. The tablet shows the reason when it next connects.", "done")
    return redirect(url_for("desk.records"), 303)


@blueprint.get("/records/<run>/record.pdf")
@READER
def countersigned_file(run: str) -> Response:
    """The countersigned file, as it was signed."""
    response = Response(review.countersigned_pdf(actor(), run), content_type="application/pdf")
    response.headers["Content-Disposition"] = f'attachment; filename="record-{run}.pdf"'
    return response


desk_signing.join(blueprint)
