"""Headers on every route, who may have what, sessions, cross-site requests, limits."""

import json
import re
import threading

import pytest
from station_in_tests import PASSWORD, PEOPLE, csrf, jpeg, patient, post, sign_in
from tablet_in_python import TabletInPython

from fieldkit.operations import moment, signin
from fieldkit.operations.actor import ROLES
from fieldkit.store.db import db
from fieldkit.store.tables import SignedIn
from fieldkit.web import security
from fieldkit.web.app import create_app

#: something for every name in a route
VALUES = {
    "digest": "0" * 16,
    "path": "css/none.css",
    "below": "runs/1",
    "person": "vell",
    "enrolment": "enrolment-0",
    "device": "TABLET01",
    "kid": "0" * 64,
    "serial": "T-0417",
    "sha256": "0" * 64,
    "run": "260731-B2-1ABCD",
    "id": "1",
    "preparation": "none",
}


def routes(app):
    """(rule, method, url) for all of the app."""
    adapter = app.url_map.bind("localhost")
    for rule in app.url_map.iter_rules():
        missing = rule.arguments - VALUES.keys()
        assert not missing, f"{rule} has a name that VALUES does not know: {missing}"
        for method in sorted(rule.methods - {"HEAD", "OPTIONS"}):
            url = adapter.build(rule.endpoint, {name: VALUES[name] for name in rule.arguments}, method=method)
            yield rule, method, url


def test_every_view_says_who_may_have_it(app):
    silent = [str(rule) for rule in app.url_map.iter_rules() if not security.access_of(app, rule.endpoint)]
    assert silent == []


def test_the_headers_are_on_every_route_whatever_it_answers(app):
    client = sign_in(app, "orme")
    seen = 0
    for rule, method, url in routes(app):
        for who in (app.test_client(), client):
            answer = who.open(url, method=method)
            seen += 1
            for name in security.HEADERS:
                assert answer.headers.get(name), f"{method} {rule} ({answer.status_code}) lacks {name}"
            policy = answer.headers["Content-Security-Policy"]
            assert "unsafe" not in policy and "frame-ancestors 'none'" in policy, rule
            assert answer.headers.get("Cache-Control"), rule
    assert seen > 40


def test_a_page_that_is_not_there_has_the_headers_too(app):
    for url in ("/none", "/api/none"):
        answer = app.test_client().get(url)
        assert answer.status_code == 404 and answer.headers["Content-Security-Policy"] == security.POLICY


def test_no_page_has_inline_script_or_style(app):
    client = sign_in(app, "orme")
    for url in ("/signin", "/trust", "/admin", "/registers", "/registers/tubes/T-0417", "/password", "/app/"):
        html = client.get(url).text
        assert not re.search(r"<script(?![^>]*\ssrc=)", html), url
        assert not re.search(r"\sstyle=|<style|\son[a-z]+=|javascript:", html), url


def test_strict_transport_is_asked_for_over_tls_only(tmp_path):
    app = create_app(tmp_path / "d", testing=True)
    assert "Strict-Transport-Security" in app.test_client().get("/signin", base_url="https://localhost").headers
    assert "Strict-Transport-Security" not in app.test_client().get("/signin", base_url="http://localhost").headers


@pytest.mark.parametrize("who", [*PEOPLE, None])
def test_role_by_endpoint(app, who):
    """Every desk view with every person: let in exactly where one of their roles is named."""
    client = sign_in(app, who) if who else app.test_client()
    roles = PEOPLE[who][1] if who else ()
    app.config["WTF_CSRF_CHECK_DEFAULT"] = False  # what is looked at here is the role
    for rule, method, url in routes(app):
        access = security.access_of(app, rule.endpoint)
        if access == ("public",) or rule.endpoint == "signin.change_password":
            continue
        answer = client.open(url, method=method)
        if access == ("device",):
            assert answer.status_code == 401 and answer.is_json, f"{method} {rule}"
        elif who is None:
            assert answer.status_code in (302, 401), f"{method} {rule} gave {answer.status_code} to nobody"
            if answer.status_code == 302:
                assert answer.headers["Location"].startswith("/signin")
        elif set(access) & set(roles):
            assert answer.status_code not in (401, 403), f"{method} {rule} refused {who}"
        else:
            assert answer.status_code == 403, f"{method} {rule} gave {answer.status_code} to {who}"


def test_an_unmarked_view_is_refused_to_everybody(bare):
    bare.add_url_rule("/forgotten", "forgotten", lambda: "secret")
    answer = bare.test_client().get("/forgotten")
    assert answer.status_code == 403 and b"secret" not in answer.data


def test_the_tablets_calls_answer_401_json_and_never_a_redirect(app):
    for rule, method, url in routes(app):
        if security.access_of(app, rule.endpoint) == ("device",):
            answer = app.test_client().open(url, method=method)
            assert answer.status_code == 401 and answer.headers["X-Fieldkit"] == "1"
            assert answer.get_json()["refused"]["code"] == "unknown-device"


def test_the_session_id_is_new_at_every_sign_in_and_only_its_hash_is_stored(app):
    client = sign_in(app, "vell")
    first = client.get_cookie("fieldkit-desk").value
    data = {"login": "vell", "password": PASSWORD, "csrf_token": csrf(client.get("/signin").text)}
    client.post("/signin", data=data)
    second = client.get_cookie("fieldkit-desk").value
    assert first != second
    with app.app_context():
        ids = [row.id for row in db.session.query(SignedIn)]
        assert len(ids) == 1 and first not in ids and second not in ids


def test_a_copied_cookie_is_worth_nothing_after_sign_out(app):
    client = sign_in(app, "vell")
    stolen = client.get_cookie("fieldkit-desk").value
    thief = app.test_client()
    thief.set_cookie("fieldkit-desk", stolen)
    assert thief.get("/registers").status_code == 200
    assert post(client, "/registers", "/signout").status_code == 303
    assert thief.get("/registers").status_code == 302
    assert client.get("/registers").status_code == 302


def test_a_session_chosen_by_somebody_else_is_not_taken_over(app):
    client = app.test_client()
    client.set_cookie("fieldkit-desk", "chosen-by-an-attacker")
    data = {"login": "vell", "password": PASSWORD, "csrf_token": csrf(client.get("/signin").text)}
    client.post("/signin", data=data)
    assert client.get_cookie("fieldkit-desk").value != "chosen-by-an-attacker"


def test_the_cookies_over_tls_are_host_bound_secure_and_not_for_scripts(tmp_path):
    app = create_app(tmp_path / "d", testing=True)
    from station_in_tests import furnish

    furnish(app)
    client = app.test_client()
    base = "https://localhost"
    token = csrf(client.get("/signin", base_url=base).text)
    data = {"login": "vell", "password": PASSWORD, "csrf_token": token}
    answer = client.post("/signin", data=data, base_url=base, headers={"Referer": base + "/signin"})
    assert answer.status_code == 303
    cookies = [c for c in answer.headers.getlist("Set-Cookie") if "Expires=Thu, 01 Jan 1970" not in c]
    assert cookies and all(c.startswith("__Host-") for c in cookies)
    for cookie in cookies:
        assert {"Secure", "HttpOnly", "SameSite=Lax", "Path=/"} <= set(cookie.split("; "))
        assert "Domain" not in cookie


def test_a_form_without_its_token_is_refused(app):
    client = sign_in(app, "orme")
    for rule, method, url in routes(app):
        if method == "POST" and not rule.rule.startswith("/api/"):
            answer = client.post(url, data={"login": "x"})
            assert answer.status_code == 400 and "open for too long" in answer.text, rule


@pytest.mark.parametrize(
    ("site", "taken"), [("same-origin", True), (None, True), ("cross-site", False), ("same-site", False)]
)
def test_a_form_from_another_site_is_refused(app, site, taken):
    client = sign_in(app, "orme")
    token = csrf(client.get("/password").text)
    headers = {"Sec-Fetch-Site": site} if site else {}
    answer = client.post("/password", data={"csrf_token": token, "password": "a new one of words"}, headers=headers)
    assert answer.status_code == (303 if taken else 403)


def test_signing_in_leads_back_to_a_page_of_this_server_only(app):
    for then, expected in (
        ("/registers", "/registers"),
        ("https://evil.example/", "/"),
        ("//evil.example/", "/"),
        ("/\\evil.example", "/"),
        ("\t//evil.example", "/"),
    ):
        client = app.test_client()
        token = csrf(client.get("/signin").text)
        data = {"login": "vell", "password": PASSWORD, "then": then, "csrf_token": token}
        assert client.post("/signin", data=data).headers["Location"] == expected


def test_another_host_name_is_refused(app):
    answer = app.test_client().get("/signin", base_url="http://evil.example")
    assert answer.status_code == 400


def test_a_wrong_password_says_so_slows_down_and_locks_nobody_out(app, monkeypatch):
    at = moment.now()
    monkeypatch.setattr(moment, "now", lambda: at)  # the waits are of one second and more, a machine may be as slow
    client = app.test_client()
    statuses = []
    for _ in range(7):
        data = {"login": "vell", "password": "wrong", "csrf_token": csrf(client.get("/signin").text)}
        answer = client.post("/signin", data=data)
        statuses.append(answer.status_code)
    assert statuses == [401] * 4 + [429] * 3 and int(answer.headers["Retry-After"]) >= 1
    # somebody else is not slowed, and the same person from elsewhere is not locked out
    assert sign_in(app, "arkle")
    data = {"login": "vell", "password": PASSWORD, "csrf_token": csrf(client.get("/signin").text)}
    answer = client.post("/signin", data=data, environ_base={"REMOTE_ADDR": "192.0.2.9"})
    assert answer.status_code == 303


def test_too_large_is_refused_before_it_is_read(app, tablet):
    limit = 512 * 1024
    body = json.dumps({"chain": "TABLET01.E", "events": ["x" * limit]}).encode()
    answer = tablet.call("POST", "/api/runs/r1/events", body)
    assert answer.status_code == 413 and answer.get_json()["refused"]["code"] == "too-large"
    answer = tablet.call("PUT", "/api/pictures/" + "0" * 64, b"x" * (8 * 1024 * 1024 + 1))
    assert answer.status_code == 413
    client = sign_in(app, "orme")
    media = "multipart/form-data; boundary=x"
    answer = client.post("/registers/tubes/T-0417/first", data=b"x" * (9 * 1024 * 1024), content_type=media)
    assert answer.status_code == 413


def test_a_packed_body_is_not_unpacked(app, tablet):
    import gzip

    body = gzip.compress(b"0" * 10_000_000)
    headers = {
        "Authorization": "Fieldkit " + tablet.token("POST", "/api/runs/r1/events", body),
        "Content-Encoding": "gzip",
    }
    answer = tablet.client.post("/api/runs/r1/events", data=body, headers=headers)
    assert answer.status_code == 415


def test_signing_in_at_once_from_many_threads_gives_many_sessions(app, monkeypatch):
    patient(app, monkeypatch)
    made, failed = [], []

    def work():
        try:
            with app.app_context():
                made.append(signin.sign_in("vell", PASSWORD, "192.0.2.1")[1])
                db.session.remove()
        except Exception as bad:
            failed.append(bad)

    threads = [threading.Thread(target=work) for _ in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert failed == [] and len(set(made)) == 8


def test_a_picture_is_sent_out_only_as_the_copy_made_here_and_may_do_nothing(app, tablet):
    data = jpeg() + b"<script>alert(1)</script>"
    sha256 = tablet.send_picture(data).get_json()["sha256"]
    answer = sign_in(app, "vell").get(f"/registers/pictures/{sha256}.jpg")
    assert answer.status_code == 200 and b"script" not in answer.data
    assert answer.headers["Content-Security-Policy"] == security.SANDBOX
    assert answer.headers["X-Content-Type-Options"] == "nosniff"


def test_roles_are_a_closed_set():
    assert set(ROLES) == {"technician", "supervisor", "administrator", "writer"}


def test_the_tablet_double_is_not_more_trusted_than_a_tablet(app):
    stranger = TabletInPython(app.test_client(), device="STRANGER")
    assert stranger.get("/api/kit").status_code == 401
