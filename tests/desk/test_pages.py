"""The desk's pages as a browser without JavaScript gets them: what stands where, who sees what, what a form does."""

from __future__ import annotations

import base64
import json
import re
import xml.etree.ElementTree as ET

import played_run as play
import pytest
from desk_in_tests import ORME, QUILL, SHA, Chain, raw
from station_in_tests import csrf, held, post, sign_in

from fieldkit.operations import devices, enrol
from fieldkit.trust import jws, keys

RUN = "260731-B2-1AAAA"
PAGE = f"/desk/records/{RUN}"


def words(html: str) -> str:
    """The page's text, tags taken out."""
    return re.sub(r"\s+", " ", re.sub(r"<[^>]+>", " ", html))


@pytest.fixture
def supervisor(desk):
    return sign_in(desk.app, "orme")


def test_the_landing_lists_what_waits_with_its_weightiest_points_first(desk, supervisor):
    desk.waiting(eventful=True)
    # begun before, so that nothing of it is compared with the eventful one as its tube's last run
    desk.waiting("260731-B2-2BBBB", hours=2)
    html = supervisor.get("/desk/records").text
    text = words(html)
    assert "2 records wait for a signature, oldest first" in text
    assert text.index(RUN) < text.index("260731-B2-2BBBB")
    assert text.index("Deviation") < text.index("Fail, taken again") < text.index("And 2 more.")
    assert "Nothing in it asks for attention." in text


def test_a_supervisor_lands_on_the_records(desk, supervisor):
    assert supervisor.get("/").headers["Location"] == "/desk/records"


def test_the_record_says_the_sentence_first_then_attention_then_readings_by_margin(desk, supervisor):
    desk.waiting(eventful=True)
    html = supervisor.get(PAGE).text
    text = words(html)
    order = ["All 17 steps were done.", "Energy over the run", "Look at these first", "Deviation", "Readings",
             "Technician", "Checked by the server", "Return with a reason", "Countersign", "Deviations", "Corrections",
             "Locks"]  # fmt: skip
    places = [text.index(words) for words in order]
    assert places == sorted(places)
    readings = re.findall(r'<td class="r num">([^<]*)</td>', html)
    assert readings[0].startswith("−") and len(readings) == 7
    assert "5.0 µA" in text and "Every verdict recomputed the same" in text


def test_every_reading_lock_wait_correction_and_picture_is_on_the_page(desk, supervisor):
    desk.waiting(eventful=True)
    html = supervisor.get(PAGE).text
    text = words(html)
    for said in ("52 5.2 µA", "point in the wrong place", "41, tag 7", "proving unit KS-1",
                 "15 min 50 s of at least 15 min",
                 "“Doors are shut.”", "Meter not settled.", "Nothing odd.", "HV-2", "not proved"):  # fmt: skip
        assert said in text, said
    assert f"{PAGE}/pictures/{SHA}" in html


def test_drawings_stand_in_the_page_with_their_sentences_and_no_inline_style(desk, supervisor):
    desk.waiting(eventful=True)
    html = supervisor.get(PAGE).text
    svgs = re.findall(r"<svg.*?</svg>", html, re.S)
    assert len(svgs) > 12
    for svg in svgs:
        assert ET.fromstring(svg).get("aria-label") or ET.fromstring(svg).get("aria-hidden")
    assert "style=" not in html and "<script>" not in html and " onclick" not in html


def test_words_of_people_are_escaped(desk, supervisor):
    pen = desk.pen(RUN).isolate().release().warm().read("heater", "6.30").read("ion", "0.4")
    pen.answer("worked-out", "power", value="63").answer("released", "hold", who="arkle", statement="<b>shut</b>")
    pen.signed("arkle", "released")
    shot = {"sha256": SHA, "media": "image/jpeg", "width": 320, "height": 200, "size": 9000, "note": '"><script>'}
    pen.answer("pictured", "picture", **shot).answer("remarked", "remark", text="<img src=x onerror=alert(1)>")
    desk.arrive(pen.end())
    for url in (PAGE, f"{PAGE}/events", "/desk/records"):
        html = supervisor.get(url).text
        assert "<img src=x" not in html and "<b>shut" not in html and '"><script>' not in html


def test_the_events_page_shows_each_event_and_what_was_kept_aside(desk, supervisor):
    pen = desk.waiting()
    desk.tablet.send(Chain(RUN, pen.state["chain"]), [pen.texts[5].replace("0.1.0", "0.1.1")])
    html = supervisor.get(f"{PAGE}/events").text
    assert len(re.findall(r'<tr id="e\d+">', html)) == len(pen.texts)
    assert "Kept aside" in html and "forked-chain" in html
    record = words(supervisor.get(PAGE).text)
    assert "Chain not whole" in record and "Events kept aside" in record
    assert "The chain of events is not whole." in record and ">Countersign<" not in supervisor.get(PAGE).text


def test_an_open_run_is_read_only(desk, supervisor):
    desk.arrive(desk.pen(RUN).isolate(), picture=None)
    html = supervisor.get(PAGE).text
    assert "The run is not over" in words(html) and "This run is not over." in words(html)
    assert f"{PAGE}/return" not in html and f"{PAGE}/countersign" not in html
    assert supervisor.get(f"{PAGE}/countersign").status_code == 422
    assert supervisor.get(f"{PAGE}/return").status_code == 422


def test_a_rehearsal_is_marked(desk, supervisor):
    desk.arrive(play.clean(desk.pen(RUN, rehearsal=True), SHA))
    assert "no record of real work" in supervisor.get(PAGE).text
    assert "Rehearsal." in supervisor.get("/desk/records").text


def test_returning_is_a_form_with_a_reason_and_a_token(desk, supervisor):
    desk.waiting()
    form = f"{PAGE}/return"
    assert supervisor.post(form, data={"reason": "Which meter?"}).status_code == 400
    empty = post(supervisor, form, form, {"reason": ""})
    assert empty.status_code == 200 and "Give a reason; it is kept." in empty.text
    answer = post(supervisor, form, form, {"reason": "Which meter?"})
    assert answer.status_code == 303 and answer.headers["Location"] == "/desk/records"
    text = words(supervisor.get("/desk/records").text)
    assert "Returned, with the technician" in text and "Which meter?" in text
    assert "Which meter?" in words(supervisor.get(PAGE).text)


@pytest.mark.parametrize("login", ["vell", "drafts"])
def test_others_look_at_most_and_decide_nothing(desk, login):
    desk.waiting()
    client = sign_in(desk.app, login)
    reads = login == "vell"
    page = client.get(PAGE)
    assert page.status_code == (200 if reads else 403)
    assert f"{PAGE}/countersign" not in page.text
    for method, url in [("GET", f"{PAGE}/return"), ("GET", f"{PAGE}/countersign"), ("GET", "/desk/key")]:
        assert client.open(url, method=method).status_code == 403
    token = csrf(client.get("/password" if client.get("/password").status_code == 200 else "/").text)
    for url in (f"{PAGE}/return", f"{PAGE}/prepare", "/desk/prepared/none/finish", "/desk/key"):
        assert client.post(url, data={"csrf_token": token}).status_code == 403, url


def test_a_picture_is_the_copy_made_here_and_may_do_nothing(desk, supervisor):
    desk.waiting()
    answer = supervisor.get(f"{PAGE}/pictures/{SHA}")
    assert answer.content_type == "image/jpeg" and answer.data[:2] == b"\xff\xd8"
    assert "sandbox" in answer.headers["Content-Security-Policy"]
    assert supervisor.get(f"{PAGE}/pictures/{'0' * 64}").status_code == 404


class Script:
    """The calls that static/desk makes, with the page's token."""

    def __init__(self, client, page: str):
        self.client = client
        self.token = re.search(r'data-csrf="([^"]+)"', client.get(page).text)[1]

    def post(self, url: str, body: dict):
        return self.client.post(
            url, data=json.dumps(body), content_type="application/json", headers={"X-CSRFToken": self.token}
        )


def test_countersigning_over_the_wire_and_downloading_the_file(desk, supervisor):
    pen = desk.waiting()
    with desk.app.app_context():
        key, kid = desk.key(ORME)
    script = Script(supervisor, f"{PAGE}/countersign")
    made = script.post(f"{PAGE}/prepare", {"kid": kid, "paper": "A4"}).get_json()
    pdf = supervisor.get(made["file"])
    assert pdf.content_type == "application/pdf" and pdf.data.startswith(b"%PDF-")
    assert supervisor.get(f"{PAGE}/record.pdf").status_code == 404
    signature = base64.b64encode(raw(key, base64.b64decode(made["to_sign"]))).decode()
    done = script.post(made["finish"], {"signature": signature})
    assert done.status_code == 200, done.text
    file = supervisor.get(done.get_json()["file"])
    assert file.data[: made["length"]] == pdf.data[: made["length"]]
    assert "attachment" in file.headers["Content-Disposition"]
    text = words(supervisor.get(PAGE).text)
    assert "Countersigned K. Orme" in text and "Download the PDF" in text
    assert "arrived after this record" not in text
    late = pen.write("remarked", {"step": "remark", "text": "Late.", "move": None})
    desk.arrive(late, picture=None, texts=late.texts[-1:])
    assert "1 event arrived after this record was countersigned." in words(supervisor.get(PAGE).text)
    assert "Late." in supervisor.get(f"{PAGE}/events").text


@pytest.mark.parametrize(
    ("body", "code"),
    [({}, "bad-request"), ({"kid": "0" * 64, "paper": "A3"}, "bad-request"),
     ({"kid": "0" * 64, "paper": "A4"}, "unknown-key"),
     ([], "bad-request")],
)  # fmt: skip
def test_a_wrong_question_is_refused_in_json(desk, supervisor, body, code):
    desk.waiting()
    answer = Script(supervisor, f"{PAGE}/countersign").post(f"{PAGE}/prepare", body)
    assert answer.status_code in (400, 422)
    assert answer.get_json()["refused"]["code"] == code


def test_a_call_without_the_pages_token_is_refused(desk, supervisor):
    desk.waiting()
    answer = supervisor.post(f"{PAGE}/prepare", data="{}", content_type="application/json")
    assert answer.status_code == 400


def test_the_state_of_another_persons_enrolment_is_not_told(desk, supervisor):
    with desk.app.app_context():
        station, mine = held(desk.app), keys.new()
        proof = jws.sign({"device": "desk", "nonce": devices.challenge(station)}, mine, "fieldkit-enrol")
        asked = enrol.ask_at_desk(QUILL, station, keys.to_jwk(mine.public_key()), proof)
    assert supervisor.get(f"/desk/key/{asked}").status_code == 404
