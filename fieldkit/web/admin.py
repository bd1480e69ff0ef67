"""What an administrator does at the desk: people, enrolments that wait, tablets, and what needs to be looked at."""

from __future__ import annotations

from flask import Blueprint, flash, redirect, render_template, url_for
from flask.typing import ResponseReturnValue

from fieldkit.errors import Refusal
from fieldkit.operations import devices, enrol, notices, people, procedures, runs
from fieldkit.web import errors, forms
from fieldkit.web.app import here
from fieldkit.web.security import actor, allowed

blueprint = Blueprint("admin", __name__, url_prefix="/admin")
NAV = [("People and tablets", "admin.page", ("administrator",))]
ADMIN = allowed("administrator")


def _back() -> ResponseReturnValue:
    return redirect(url_for("admin.page"), 303)


def _says(form: forms.FlaskForm) -> str:
    return " ".join(says for of_field in form.errors.values() for says in of_field)


@blueprint.get("")
@ADMIN
def page() -> ResponseReturnValue:
    return _shown(None)


def _shown(new: forms.NewPerson | None) -> str:
    """The page; a new person who was refused stands in the form again, without the password."""
    everyone = people.everyone()
    names = {p.id: p.name for p in everyone}
    return render_template(
        "admin/page.html",
        waiting=enrol.waiting(),
        people=[(p, forms.ChangePerson(roles=list(p.roles), formdata=None)) for p in everyone],
        names=names,
        keys=enrol.keys_of(),
        devices=devices.everything(),
        notices=notices.latest(20),
        kept=[k for k in runs.kept() if k.settled is None],
        procedures=procedures.released(),
        new_person=new or forms.NewPerson(formdata=None),
        adding=new is not None,
        issue=forms.Issue(formdata=None),
        reason=forms.Reason(formdata=None),
        role_titles=forms.ROLE_TITLES,
    )


@blueprint.post("/people")
@ADMIN
def add_person() -> ResponseReturnValue:
    form = forms.NewPerson()
    if not form.validate_on_submit():
        flash(_says(form), "refused")
        return _shown(form), 422
    try:
        people.add(
            actor(), form.login.data or "", form.name.data or "", tuple(form.roles.data or ()), form.password.data or ""
        )
        flash(f"{form.name.data} can sign in now. On each tablet they enrol themselves.", "done")
    except Refusal as bad:
        errors.tell(bad)
        return _shown(form), 422
    return _back()


@blueprint.post("/people/<person>/roles")
@ADMIN
def set_roles(person: str) -> ResponseReturnValue:
    form = forms.ChangePerson()
    try:
        people.set_roles(actor(), person, tuple(form.roles.data or ()))
        flash(
            "The roles are changed. Certificates already issued keep the roles that they say.",
            "done",
        )
    except Refusal as bad:
        errors.tell(bad)
    return _back()


@blueprint.post("/people/<person>/out")
@ADMIN
def put_out(person: str) -> ResponseReturnValue:
    return _active(
        person, False, "is out of use; what they signed stays. Their keys are revoked below, tablet by tablet."
    )


@blueprint.post("/people/<person>/back")
@ADMIN
def put_back(person: str) -> ResponseReturnValue:
    return _active(person, True, "can sign in again.")


def _active(person: str, active: bool, says: str) -> ResponseReturnValue:
    try:
        people.set_active(actor(), person, active)
        flash(f"{people.get(person).name} {says}", "done")
    except Refusal as bad:
        errors.tell(bad)
    return _back()


@blueprint.post("/people/<person>/password")
@ADMIN
def set_password(person: str) -> ResponseReturnValue:
    form = forms.NewPassword()
    try:
        people.set_password(actor(), person, form.password.data or "")
        flash("The password is changed, and every session of that person has ended.", "done")
    except Refusal as bad:
        errors.tell(bad)
    return _back()


@blueprint.post("/enrolments/<enrolment>/issue")
@ADMIN
def issue(enrolment: str) -> ResponseReturnValue:
    """Opens the signing authority with its passphrase, for this one certificate."""
    form = forms.Issue()
    if not form.validate_on_submit():
        flash(_says(form), "refused")
        return _back()
    try:
        enrol.issue(actor(), here(), enrolment, form.passphrase.data or "", form.note.data or "")
        flash("The certificate is issued. A tablet fetches it when online, a desk browser when it looks again.", "done")
    except Refusal as bad:
        errors.tell(bad)
    return _back()


@blueprint.post("/enrolments/<enrolment>/refuse")
@ADMIN
def refuse(enrolment: str) -> ResponseReturnValue:
    form = forms.Reason()
    try:
        enrol.refuse(actor(), enrolment, form.reason.data or "")
        flash("The enrolment is refused; the person can ask again.", "done")
    except Refusal as bad:
        errors.tell(bad)
    return _back()


@blueprint.post("/devices/<device>/revoke")
@ADMIN
def revoke_device(device: str) -> ResponseReturnValue:
    form = forms.Reason()
    try:
        devices.revoke(actor(), device, form.reason.data or "")
        flash("The tablet is out of use, with every key on it. What it still sends is kept and shown here.", "done")
    except Refusal as bad:
        errors.tell(bad)
    return _back()


@blueprint.post("/keys/<kid>/revoke")
@ADMIN
def revoke_key(kid: str) -> ResponseReturnValue:
    try:
        enrol.revoke_key(actor(), kid)
        flash("The key is revoked from now on; what it signed before stays as it is.", "done")
    except Refusal as bad:
        errors.tell(bad)
    return _back()
