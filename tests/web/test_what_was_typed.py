"""What a person typed and the desk refused stands in the form again, but for passwords and a second entry that differs."""

from __future__ import annotations

import io

from station_in_tests import post, sign_in


def test_a_person_who_was_refused_stands_in_the_form_again_without_the_password(app):
    admin = sign_in(app, "orme")
    answer = post(admin, "/admin", "/admin/people", {"login": "tern", "name": "M. Tern", "password": "short"})
    assert answer.status_code == 422
    assert 'value="M. Tern"' in answer.text and 'value="tern"' in answer.text and "short" not in answer.text
    assert '<details class="card" open><summary>Add a person' in answer.text


def test_a_nameplate_without_its_photograph_keeps_what_was_read_from_the_plate(app):
    technician = sign_in(app, "vell")
    page = "/registers/tubes/T-0417"
    names = [part.split('"')[0] for part in technician.get(page).text.split('name="value-')[1:]]
    typed = {f"value-{name}": f"{n}.5" for n, name in enumerate(names)}
    answer = post(technician, page, page + "/first", {**typed, "photograph": (io.BytesIO(b""), "")})
    assert names and answer.status_code == 422 and "needs its photograph" in answer.text
    assert all(f'name="value-{name}" value="{n}.5"' in answer.text for n, name in enumerate(names))
