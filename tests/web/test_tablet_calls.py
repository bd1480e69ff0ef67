"""Signed requests, enrolment over the wire, the kit, the shell."""

import hashlib
import json

import pytest
from station_in_tests import PASSPHRASE, PASSWORD, held, issue, jpeg, post, sign_in
from tablet_in_python import TabletInPython

from fieldkit.operations import devices
from fieldkit.trust import jws, keys


def manifest(tablet, app):
    token = tablet.get("/api/kit").get_json()["manifest"]
    return jws.verify(token, held(app).receipt.public_key(), "fieldkit-kit").payload


def test_enrolment_from_asking_to_the_certificate(app):
    tablet = TabletInPython(app.test_client(), device="TABLET09", name="Tablet 9")
    assert tablet.enrol("vell", PASSWORD).get_json()["status"] == "waiting"
    assert tablet.take_certificate("vell")["status"] == "waiting"
    assert tablet.get("/api/kit").get_json()["refused"]["code"] == "waiting-device"
    admin = sign_in(app, "orme")
    page = admin.get("/admin").text
    assert "J. Vell on Tablet 9" in page
    path = f"/admin/enrolments/{tablet.enrolments['vell']}/issue"
    post(admin, "/admin", path, {"passphrase": "not this one", "note": "known in person"})
    assert "does not open the key" in admin.get("/admin").text
    assert tablet.take_certificate("vell")["status"] == "waiting"
    post(admin, "/admin", path, {"passphrase": PASSPHRASE, "note": "known in person"})
    answer = tablet.take_certificate("vell")
    assert answer["status"] == "issued" and answer["authority"] == held(app).authority_pem
    assert tablet.get("/api/kit").status_code == 200


def test_asking_twice_gives_the_same_enrolment(app):
    tablet = TabletInPython(app.test_client())
    first = tablet.enrol("vell", PASSWORD).get_json()
    assert tablet.enrol("vell", PASSWORD).get_json() == first


@pytest.mark.parametrize(
    ("login", "password", "status", "code"),
    [
        ("vell", "wrong password", 401, "wrong-password"),
        ("nobody", PASSWORD, 401, "wrong-password"),
        ("drafts", PASSWORD, 422, "no-signing-role"),
    ],
)
def test_who_may_not_enrol(app, login, password, status, code):
    answer = TabletInPython(app.test_client()).enrol(login, password)
    assert answer.status_code == status and answer.get_json()["refused"]["code"] == code


def test_a_device_id_belongs_to_one_key(app, tablet):
    other = TabletInPython(app.test_client(), device=tablet.device)
    assert other.enrol("arkle", PASSWORD).get_json()["refused"]["code"] == "bad-device"


def test_a_persons_key_belongs_to_one_person(app, tablet):
    tablet.people["arkle"] = tablet.people["vell"]
    assert tablet.enrol("arkle", PASSWORD).get_json()["refused"]["code"] == "taken"


def test_the_proof_must_be_for_this_tablet(app):
    tablet = TabletInPython(app.test_client())
    key = keys.new()
    body = {
        "name": "vell",
        "password": PASSWORD,
        "device": {"id": "TABLET01", "name": "T", "jwk": keys.to_jwk(tablet.key.public_key())},
        "person_jwk": keys.to_jwk(key.public_key()),
        "proof": jws.sign({"device": "TABLET02", "nonce": tablet.nonce()}, key, "fieldkit-enrol"),
    }
    assert app.test_client().post("/api/enrol", json=body).get_json()["refused"]["code"] == "bad-signature"


def test_an_enrolment_is_told_only_to_its_tablet(app, tablet):
    other = TabletInPython(app.test_client(), device="TABLET02")
    other.enrol("arkle", PASSWORD)
    assert other.get(f"/api/enrolment/{tablet.enrolments['vell']}").status_code == 404


@pytest.mark.parametrize(
    ("changed", "status"),
    [
        ({"method": "PUT"}, 401),
        ({"path": "/api/inbox"}, 401),
        ({"body": "0" * 64}, 401),
        ({"nonce": "1700000000.abcd.ef"}, 401),
        ({"nonce": None}, 401),
        ({}, 200),
    ],
)
def test_a_request_that_differs_from_what_was_signed_is_refused(tablet, changed, status):
    token = tablet.token("GET", "/api/kit", changed=changed)
    answer = tablet.client.get("/api/kit", headers={"Authorization": f"Fieldkit {token}"})
    assert answer.status_code == status


def test_the_query_is_part_of_what_is_signed(tablet):
    token = tablet.token("GET", "/api/runs/r1/head?chain=TABLET01.A")
    headers = {"Authorization": f"Fieldkit {token}"}
    assert tablet.client.get("/api/runs/r1/head?chain=TABLET01.A", headers=headers).get_json() == {
        "seq": -1,
        "head": "",
    }
    assert tablet.client.get("/api/runs/r1/head?chain=TABLET01.B", headers=headers).status_code == 401


def test_a_nonce_grows_old_and_is_of_this_server(app, tmp_path):
    from fieldkit.errors import Refusal
    from fieldkit.operations import station

    mine, other = held(app), station.open(tmp_path / "other")
    nonce = devices.challenge(mine, 1000.0)
    devices.check_nonce(mine, nonce, 1000.0 + devices.NONCE_SECONDS)
    for station_, at in ((mine, 1001.0 + devices.NONCE_SECONDS), (other, 1000.0)):
        with pytest.raises(Refusal) as refused:
            devices.check_nonce(station_, nonce, at)
        assert refused.value.code == "old-nonce"


def test_an_algorithm_of_the_tokens_own_choice_is_refused(tablet):
    import base64

    head = base64.urlsafe_b64encode(b'{"alg":"none","kid":"TABLET01","typ":"fieldkit-request"}').rstrip(b"=").decode()
    answer = tablet.client.get("/api/kit", headers={"Authorization": f"Fieldkit {head}.e30."})
    assert answer.status_code == 401


def test_every_blob_of_the_kit_is_what_its_hash_says(app, tablet):
    found = manifest(tablet, app)
    names = {blob["name"] for blob in found["blobs"]}
    assert {"sheet/test-check", "source/test-check", "registers", "controls"} <= names
    for blob in found["blobs"]:
        answer = tablet.get(f"/api/blob/{blob['sha256']}")
        assert hashlib.sha256(answer.data).hexdigest() == blob["sha256"] and len(answer.data) == blob["size"]


def test_the_same_content_is_the_same_kit_and_other_content_another(app, tablet):
    first = manifest(tablet, app)
    assert manifest(tablet, app)["kit"] == first["kit"]
    tablet.enrol("arkle", PASSWORD)
    issue(app, tablet, "arkle")
    assert manifest(tablet, app)["kit"] != first["kit"]


def test_the_registers_in_the_kit_have_the_form_that_was_agreed(app, tablet):
    blobs = {blob["name"]: blob["sha256"] for blob in manifest(tablet, app)["blobs"]}
    found = json.loads(tablet.get(f"/api/blob/{blobs['registers']}").data)
    wanted = "station sites cabinets tubes instruments people board earlier units".split()
    assert set(wanted) <= set(found)
    assert found["tubes"]["T-0417"]["confirmed"] is False  # nobody has entered it twice
    assert found["people"]["vell"]["certificates"] and "password" not in json.dumps(found["people"])
    assert found["board"] == {"B1": {"earths": [], "locks": []}, "B2": {"earths": [], "locks": []}}


def test_the_control_templates_hold_nobodys_data_and_no_token(app, tablet):
    blobs = {blob["name"]: blob["sha256"] for blob in manifest(tablet, app)["blobs"]}
    html = tablet.get(f"/api/blob/{blobs['controls']}").text
    assert html.count("<template") >= 15 and "csrf" not in html and "Vell" not in html


def test_a_picture_gets_a_receipt_and_damage_is_told(app, tablet):
    data = jpeg()
    answer = tablet.send_picture(data).get_json()
    found = jws.verify(answer["receipt"], held(app).receipt.public_key(), "fieldkit-receipt").payload
    assert found["sha256"] == answer["sha256"] == hashlib.sha256(data).hexdigest() and found["size"] == len(data)
    assert tablet.send_picture(data).status_code == 200
    sha256 = hashlib.sha256(data).hexdigest()
    assert tablet.call("PUT", f"/api/pictures/{sha256}", data[:-5]).get_json()["refused"]["code"] == "wrong-digest"


@pytest.mark.parametrize(
    "data", [b"<svg xmlns='http://www.w3.org/2000/svg'><script/></svg>", b"%PDF-1.7", b"", jpeg()[:200]]
)
def test_what_is_no_picture_is_refused(tablet, data):
    answer = tablet.send_picture(data)
    assert answer.status_code == 415 and answer.get_json()["refused"]["code"] == "not-a-picture"


@pytest.mark.parametrize(
    "body",
    [b"", b"[]", b'{"chain": 1, "events": []}', b'{"chain": "T.A", "chain": "T.B"}', b'{"a": NaN}', b"[" * 90_000],
)
def test_a_request_that_cannot_be_read_is_refused_in_words(tablet, body):
    answer = tablet.call("POST", "/api/runs/r1/events", body)
    assert answer.status_code == 422 and answer.get_json()["refused"]["code"] == "damaged-request"


def test_names_with_paths_in_them_are_refused(tablet):
    body = json.dumps({"chain": "../x.y", "events": []}).encode()
    assert tablet.call("POST", "/api/runs/r1/events", body).status_code == 422
    assert tablet.get("/api/blob/..%2f..%2fsecret").status_code in (401, 404)


# the shell


def test_the_shell_is_the_same_bytes_for_everybody_and_sets_no_cookie(app):
    signed = sign_in(app, "orme")
    answers = [app.test_client().get("/app/"), app.test_client().get("/app/run/1"), signed.get("/app/")]
    assert len({a.data for a in answers}) == 1
    assert all("Set-Cookie" not in a.headers and a.status_code == 200 for a in answers)
    assert b"csrf" not in answers[0].data and b"Orme" not in answers[0].data


def test_the_workers_list_names_every_file_with_the_hash_that_it_has(app):
    client = app.test_client()
    answer = client.get("/sw.js")
    assert answer.headers["Cache-Control"] == "no-cache" and answer.content_type.startswith("text/javascript")
    first = answer.text.splitlines()[0]
    shell = json.loads(first.removeprefix("const SHELL = ").rstrip(";"))
    assert shell["page"] == "/app/" and shell["build"].encode() in client.get("/app/").data
    urls = [file["url"] for file in shell["files"]]
    assert urls[0] == "/app/" and len(set(urls)) == len(urls)
    assert any("/tablet/main.js" in url for url in urls) and not any("/desk" in url for url in urls)
    for file in shell["files"]:
        found = client.get(file["url"])
        assert found.status_code == 200 and hashlib.sha256(found.data).hexdigest() == file["sha256"], file["url"]
    assert client.get("/version.json").get_json()["build"] == shell["build"]


def test_everything_that_the_page_asks_for_is_in_the_workers_list(app):
    import re

    client = app.test_client()
    shell = json.loads(client.get("/sw.js").text.splitlines()[0].removeprefix("const SHELL = ").rstrip(";"))
    urls = {file["url"] for file in shell["files"]}
    asked = set(re.findall(r'(?:src|href)="(/[^"#]+)"', client.get("/app/").text))
    assert asked and asked - urls == set()


def test_a_changed_static_file_changes_the_worker(app, monkeypatch):
    from fieldkit.web import assets, tablet

    before = tablet.make(app)
    held_ = app.extensions["fieldkit-assets"]
    changed = {**held_.sha256, "css/tablet.css": "0" * 64}
    monkeypatch.setitem(app.extensions, "fieldkit-assets", assets.Assets(held_.folder, changed, held_.hash))
    assert tablet.make(app).build != before.build


def test_the_kill_switch_takes_caches_and_never_what_was_recorded(app, monkeypatch):
    monkeypatch.setenv("SW_KILL", "1")
    text = app.test_client().get("/sw.js").text
    assert (
        "unregister" in text
        and "caches.delete" in text
        and "indexedDB" not in text
        and "addEventListener('fetch'" not in text
    )


def test_static_files_may_be_kept_for_ever_and_only_under_their_hash(app):
    client = app.test_client()
    url = app.extensions["fieldkit-assets"].url("css/tablet.css")
    assert "immutable" in client.get(url).headers["Cache-Control"]
    assert client.get("/static/0000000000000000/css/tablet.css").status_code == 404
    assert client.get(url.replace("css/tablet.css", "../fieldkit.db")).status_code == 404
