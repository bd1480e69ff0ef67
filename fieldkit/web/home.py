"""The first page after signing in: where this person's work is."""

from __future__ import annotations

from flask import Blueprint, current_app, redirect, url_for
from flask.typing import ResponseReturnValue

from fieldkit.web.security import actor, signed_in

blueprint = Blueprint("home", __name__)


@blueprint.get("/")
@signed_in
def page() -> ResponseReturnValue:
    """Supervisors go to the records, administrators to people and tablets, everybody else to the registers."""
    who = actor()
    if who.may("supervisor") and "desk.records" in current_app.view_functions:
        return redirect(url_for("desk.records"))
    return redirect(url_for("admin.page" if who.may("administrator") else "registers.page"))
