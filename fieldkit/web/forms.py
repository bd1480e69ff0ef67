"""Forms of the desk (WTForms, CSRF by Flask-WTF). They say what a person may type; the operations judge it.

Not here: the forms behind the tablet's control templates (step_form.py). No form here records a reading.
"""

from __future__ import annotations

from flask_wtf import FlaskForm
from wtforms import HiddenField, PasswordField, SelectMultipleField, StringField, TextAreaField
from wtforms.fields.choices import SelectChoice
from wtforms.validators import InputRequired, Length
from wtforms.widgets import CheckboxInput, ListWidget

from fieldkit.operations.actor import ROLES

ROLE_TITLES = {
    "technician": "Technician: records runs on a tablet",
    "supervisor": "Supervisor: reviews, returns and countersigns",
    "administrator": "Administrator: people, tablets, registers",
    "writer": "Procedure writer",
}


def _needed(says: str) -> list[object]:
    return [InputRequired(says), Length(max=200, message="Use at most 200 characters.")]


class Roles(SelectMultipleField):
    widget = ListWidget(prefix_label=False)
    option_widget = CheckboxInput()


class SignIn(FlaskForm):
    login = StringField("Name", _needed("Type your sign-in name."))
    password = PasswordField("Password", _needed("Type your password."))
    then = HiddenField()


class SignOut(FlaskForm):
    """Only the token."""


class NewPerson(FlaskForm):
    login = StringField("Sign-in name", _needed("Give a sign-in name."))
    name = StringField("Name, as it is to stand on records", _needed("Give the name."))
    password = PasswordField("First password, at least 10 characters", _needed("Give a first password."))
    roles = Roles("Roles", choices=[SelectChoice(role, ROLE_TITLES[role]) for role in ROLES])


class ChangePerson(FlaskForm):
    roles = Roles("Roles", choices=[SelectChoice(role, ROLE_TITLES[role]) for role in ROLES])


class NewPassword(FlaskForm):
    password = PasswordField("New password, at least 10 characters", _needed("Type the new password."))


class Issue(FlaskForm):
    """Open the signing authority for one enrolment."""

    passphrase = PasswordField("Passphrase of the signing authority", _needed("Type the passphrase."))
    note = StringField("How the person was known to be who they are", _needed("Say how, for example: known in person."))


class Reason(FlaskForm):
    reason = TextAreaField("Reason", _needed("Give a reason; it is kept."))
