"""Signing in and out at the desk, and changing one's own password."""

from __future__ import annotations

from flask import Blueprint, flash, make_response, redirect, render_template, request, url_for
from flask.typing import ResponseReturnValue

from fieldkit.errors import Refusal
from fieldkit.operations import people
from fieldkit.web import errors, forms, sessions
from fieldkit.web.security import actor, public, signed_in

blueprint = Blueprint("signin", __name__)


@blueprint.get("/signin")
@public
def page() -> ResponseReturnValue:
    return render_template("signin.html", form=forms.SignIn(then=inside(request.args.get("then", ""))), refused="")


@blueprint.post("/signin")
@public
def sign_in() -> ResponseReturnValue:
    form = forms.SignIn()
    if not form.validate_on_submit():
        return render_template("signin.html", form=form, refused=""), 422
    response = make_response(redirect(inside(form.then.data or "") or url_for("home.page"), 303))
    try:
        sessions.begin(response, form.login.data or "", form.password.data or "")
    except Refusal as bad:
        answer = make_response(render_template("signin.html", form=form, refused=bad.sentence), errors.STATUS[bad.code])
        if "seconds" in bad.detail:
            answer.headers["Retry-After"] = str(bad.detail["seconds"])
        return answer
    return response


@blueprint.post("/signout")
@public
def sign_out() -> ResponseReturnValue:
    response = make_response(redirect(url_for("signin.page"), 303))
    sessions.end(response)
    return response


@blueprint.get("/password")
@signed_in
def password() -> ResponseReturnValue:
    return render_template("password.html", form=forms.NewPassword())


@blueprint.post("/password")
@signed_in
def change_password() -> ResponseReturnValue:
    form = forms.NewPassword()
    if form.validate_on_submit():
        try:
            people.set_password(actor(), actor().id, form.password.data or "")
        except Refusal as bad:
            errors.tell(bad)
            return redirect(url_for("signin.password"), 303)
        flash("The password is changed. Sign in with the new one.", "done")
        return redirect(url_for("signin.page"), 303)
    return render_template("password.html", form=form), 422


def inside(path: str) -> str:
    """`path` if it is a page of this server, else "": nobody is sent elsewhere after signing in."""
    plain = path.startswith("/") and not path.startswith(("//", "/\\")) and path.isprintable() and "\\" not in path
    return path if plain else ""
