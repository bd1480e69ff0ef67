"""Registers, nameplates entered twice, pictures, procedures, the lock board."""

import copy
import io
import json

import pytest
from PIL import Image
from station_in_tests import SEED, YAML, jpeg, sheet
from tablet_in_python import RunOnTablet

from fieldkit.errors import Refusal
from fieldkit.operations import board, kit, pictures, procedures, registers
from fieldkit.operations.actor import HOUSE, Actor
from fieldkit.store.db import db
from fieldkit.store.tables import Picture

VELL = Actor("vell", "J. Vell", ("technician",))
ARKLE = Actor("arkle", "P. Arkle", ("technician",))
PLATE = {"heater_voltage": {"texts": ["6.30"], "unit": "V"}, "beam_levels": {"texts": ["18", "20"], "unit": "kV"}}


def code_of(call):
    with pytest.raises(Refusal) as refused:
        call()
    return refused.value.code


def changed(path, value):
    seed = copy.deepcopy(SEED)
    at = seed
    for name in path[:-1]:
        at = at[name]
    at[path[-1]] = value
    return seed


@pytest.mark.parametrize(
    ("path", "value", "says"),
    [
        (("cabinets", "B2", "site"), "elsewhere", "no site"),
        (("cabinets", "B2", "meters", "beam_volts"), "PV-9", "not in the register"),
        (("cabinets", "B2", "places", "deck"), ["beam_suply"], "none of its sources"),
        (("cabinets", "B2", "points", "Q1", "sources"), ["beam"], "none of its sources"),
        (("tubes", "T-0417", "cabinet"), "B9", "no cabinet"),
        (("tubes", "T-0417", "givens", "heater_voltage", "texts"), "6.30", "wrong at"),
        (("instruments", "PV-2", "colour"), "red", "wrong at"),
        (("sites", "skarrow-fell", "card", "telephone"), None, "wrong at"),
    ],
)
def test_a_register_that_is_wrong_is_refused_whole_naming_the_place(inside, path, value, says):
    before = kit.registers_now()
    with pytest.raises(Refusal, match=says) as refused:
        registers.load(HOUSE, changed(path, value))
    assert refused.value.code == "bad-register"
    assert kit.registers_now() == before


def test_loading_again_brings_up_to_date_and_removes_nothing(inside):
    seed = changed(("tubes", "T-0417", "hours"), "17300")
    del seed["tubes"]["T-0533"]
    registers.load(HOUSE, seed)
    found = registers.tubes()
    assert found["T-0417"].data.hours == "17300" and "T-0533" in found


def test_a_nameplate_counts_after_two_entries_by_two_people_with_a_photograph(inside):
    assert not registers.tube("T-0417").confirmed
    assert code_of(lambda: registers.enter_nameplate(VELL, "T-0417", PLATE, "0" * 64)) == "no-photograph"
    photograph = pictures.put(jpeg(), "vell")
    registers.enter_nameplate(VELL, "T-0417", PLATE, photograph)
    assert not registers.tube("T-0417").confirmed
    assert code_of(lambda: registers.confirm_nameplate(VELL, "T-0417", PLATE)) == "same-person"
    registers.confirm_nameplate(ARKLE, "T-0417", PLATE)
    found = registers.tube("T-0417")
    assert found.confirmed and found.photograph == photograph
    assert found.givens["heater_voltage"] == {"texts": ["6.30"], "unit": "V", "source": "nameplate of T-0417"}
    assert kit.registers_now()["tubes"]["T-0417"]["confirmed"] is True


@pytest.mark.parametrize(
    "second",
    [
        {**PLATE, "heater_voltage": {"texts": ["6.3"], "unit": "V"}},
        {**PLATE, "heater_voltage": {"texts": ["63.0"], "unit": "V"}},
        {**PLATE, "beam_levels": {"texts": ["18"], "unit": "kV"}},
        {"heater_voltage": PLATE["heater_voltage"]},
    ],
    ids=["digits", "ten times", "a level fewer", "a value left out"],
)
def test_two_entries_that_differ_stand_neither_and_the_values_are_not_told(inside, second):
    registers.enter_nameplate(VELL, "T-0417", PLATE, pictures.put(jpeg(), "vell"))
    with pytest.raises(Refusal) as refused:
        registers.confirm_nameplate(ARKLE, "T-0417", second)
    assert refused.value.code == "entries-differ" and "6.30" not in refused.value.sentence
    found = registers.tube("T-0417")
    assert not found.confirmed and found.waiting is None
    assert code_of(lambda: registers.confirm_nameplate(ARKLE, "T-0417", PLATE)) == "nothing-entered"


def test_a_new_entry_does_not_unsettle_the_one_that_counts_until_it_counts_itself(inside):
    photograph = pictures.put(jpeg(), "vell")
    registers.enter_nameplate(VELL, "T-0417", PLATE, photograph)
    registers.confirm_nameplate(ARKLE, "T-0417", PLATE)
    newer = {**PLATE, "heater_voltage": {"texts": ["6.25"], "unit": "V"}}
    registers.enter_nameplate(ARKLE, "T-0417", newer, photograph)
    assert registers.tube("T-0417").givens["heater_voltage"]["texts"] == ["6.30"]
    registers.confirm_nameplate(VELL, "T-0417", newer)
    assert registers.tube("T-0417").givens["heater_voltage"]["texts"] == ["6.25"]


def test_the_page_takes_a_nameplate_twice_and_does_not_show_the_first_to_the_second(app):
    from station_in_tests import csrf, sign_in

    page = "/registers/tubes/T-0417"
    first, second = sign_in(app, "vell"), sign_in(app, "arkle")
    values = {f"value-{n}": " ".join(g["texts"]) for n, g in SEED["tubes"]["T-0417"]["givens"].items()}
    values["value-heater_voltage"] = "6.37"
    data = {**values, "csrf_token": csrf(first.get(page).text), "photograph": (io.BytesIO(jpeg()), "plate.jpg")}
    first.post(f"{page}/first", data=data, content_type="multipart/form-data")
    shown = second.get(page).text
    assert "Enter it again" in shown and "6.37" not in shown and "6.30" not in shown
    assert "Enter it again" not in first.get(page).text
    second.post(f"{page}/second", data={**values, "csrf_token": csrf(shown)})
    assert "Its nameplate counts" in second.get(page).text


def test_a_picture_is_kept_as_received_and_shown_as_made_here(inside):
    out = io.BytesIO()
    exif = Image.Exif()
    exif[0x0112], exif[0x010E] = 6, "where it was taken"  # turned by 90 degrees; a description
    Image.new("RGB", (40, 30), (200, 30, 30)).save(out, "JPEG", exif=exif)
    data = out.getvalue() + b"PK\x03\x04 hidden behind the image"
    digest = pictures.put(data, "vell")
    row = db.session.get(Picture, digest)
    assert row.original == data and (row.width, row.height) == (30, 40)
    assert b"hidden" not in row.data and b"where it was" not in row.data
    with Image.open(io.BytesIO(row.data)) as made:
        assert made.format == "JPEG" and not made.getexif()


def test_a_picture_with_very_many_pixels_is_refused_before_it_is_unpacked(inside):
    out = io.BytesIO()
    Image.new("1", (30_000, 30_000)).save(out, "PNG")
    assert len(out.getvalue()) < 200_000
    assert code_of(lambda: pictures.put(out.getvalue(), "vell")) == "too-large"


def test_a_large_picture_is_made_smaller(inside):
    made = pictures.reencode(jpeg(size=(4000, 1000)))
    assert (made.width, made.height) == (2400, 600)


def test_an_edition_is_never_changed(inside):
    import hashlib

    other = b"procedure: test-check\nedition: 1\n# changed\n"
    changed_sheet = sheet().model_copy(update={"source_sha256": hashlib.sha256(other).hexdigest()})
    assert code_of(lambda: procedures.release(HOUSE, changed_sheet, other)) == "edition-taken"
    assert code_of(lambda: procedures.release(HOUSE, sheet(), other)) == "wrong-source"
    newer = changed_sheet.model_copy(update={"edition": 2})
    digest = procedures.release(HOUSE, newer, other)
    assert [(r.edition, r.sheet, r.proved) for r in procedures.released()] == [(2, digest, False)]


def test_releasing_the_same_again_changes_nothing(inside):
    before = procedures.released()
    procedures.release(HOUSE, sheet(), YAML)
    assert procedures.released() == before


# the lock board


def lock(point, number, holder="vell", run="260731-B2-L1"):
    return {
        "point": point,
        "sources": ["beam_supply"],
        "lock": number,
        "tag": "T1",
        "holder": holder,
        "holder_name": "J. Vell",
        "run": run,
        "since": "2026-07-31T12:00:00+00:00",
    }


def earth(stick, run="260731-B2-L1"):
    return {
        "stick": stick,
        "point": "deck bus",
        "source": "beam_supply",
        "run": run,
        "since": "2026-07-31T12:00:00+00:00",
    }


def send(tablet, run):
    assert tablet.send(run, run.texts).get_json()["kept"] == []


def test_locks_and_earths_outlive_the_run_and_the_next_one_starts_from_them(app, tablet, sheet_sha):
    first = RunOnTablet(tablet, "260731-B2-L1", sheet_sha)
    first.start()
    first.end(locks=(lock("Q1", "7"), lock("Q2", "8")), earths=(earth("E2"),))
    first.sign("vell")
    send(tablet, first)
    with app.app_context():
        found = board.boards(["B2", "B1"])
        assert [one["lock"] for one in found["B2"].locks] == ["7", "8"] and found["B2"].earths == [earth("E2")]
        assert found["B1"].locks == []
        db.session.remove()
    second = RunOnTablet(tablet, "260731-B2-L2", sheet_sha)
    second.start(locks=[lock("Q1", "7"), lock("Q2", "8")], earths=[earth("E2")])
    second.end(locks=(lock("Q2", "8"),))
    send(tablet, second)
    with app.app_context():
        found = board.boards(["B2"])["B2"]
        assert [one["point"] for one in found.locks] == ["Q2"] and found.earths == []


def test_the_order_of_runs_is_that_of_the_moments_whatever_the_offset_or_name(app, tablet, sheet_sha):
    """16:00+05:00 is earlier than 12:00Z, though its text sorts later."""
    for run_id, wall, locks in (
        ("260731-B2-ZLATE", "2026-07-31T12:00:00+00:00", ()),
        ("260731-B2-AEARL", "2026-07-31T16:00:00+05:00", (lock("Q1", "7"),)),
    ):
        run = RunOnTablet(tablet, run_id, sheet_sha)
        run.start(locks=[lock("Q1", "7")] if not locks else [])
        run.texts[0] = run.texts[0].replace("2026-07-31T12:00:00+00:00", wall, 1)
        run.end(locks=locks)
        send(tablet, run)
    with app.app_context():
        assert board.boards(["B2"])["B2"].locks == []


def test_an_open_runs_locks_are_on_the_board(app, tablet, sheet_sha):
    run = RunOnTablet(tablet, "260731-B2-L3", sheet_sha)
    run.start(locks=[lock("Q1", "7")])
    send(tablet, run)
    with app.app_context():
        assert [one["lock"] for one in board.boards(["B2"])["B2"].locks] == ["7"]


def test_two_locks_of_two_people_on_one_point_are_two(app, tablet, sheet_sha):
    run = RunOnTablet(tablet, "260731-B2-L4", sheet_sha)
    run.start()
    run.end(locks=(lock("Q1", "7"), lock("Q1", "9", holder="arkle")))
    send(tablet, run)
    with app.app_context():
        assert [one["holder"] for one in board.boards(["B2"])["B2"].locks] == ["vell", "arkle"]


def test_finished_runs_are_told_to_the_next_tablet(app, tablet, sheet_sha):
    run = RunOnTablet(tablet, "260731-B2-L5", sheet_sha)
    run.start()
    run.end()
    run.sign("vell")
    send(tablet, run)
    rehearsal = RunOnTablet(tablet, "260731-B2-L6", sheet_sha)
    rehearsal.start(rehearsal=True)
    rehearsal.end()
    send(tablet, rehearsal)
    with app.app_context():
        found = board.earlier()
    ended = json.loads(run.texts[1])["at"]["wall"]
    assert found == {"T-0417": [{"procedure": "test-check", "run": run.run, "ended": ended, "outcome": "done"}]}
