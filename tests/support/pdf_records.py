"""A record made by hand, with something in every section, for looking at pages. Invented; numbers as in the studies."""

from __future__ import annotations

import hashlib

from fieldkit.record import context, lines, model
from fieldkit.record.lines import Limits, Note, Reading

SHEET, HEAD = hashlib.sha256(b"sheet").hexdigest(), hashlib.sha256(b"head").hexdigest()
LANES = (
    (
        "beam_supply",
        "Beam supply",
        "Beam",
        (("locked", 12.97), ("proved", 13.2), ("off", 14.1), ("on", 14.6), ("off", 16.5)),
    ),
    ("heater", "Heater", "Heater", (("off", 12.97), ("on", 14.15))),
    ("bias", "Bias", "Bias", (("off", 12.97), ("on", 14.42))),
    ("magnets", "Magnets", "Magnets", (("off", 12.97), ("on", 14.1))),
    ("coolant", "Coolant", "Coolant", (("off", 12.97), ("on", 13.8))),
    (
        "rf_drive",
        "RF drive",
        "RF drive",
        (("locked", 12.97), ("proved", 13.25), ("off", 15.7), ("on", 15.8), ("off", 16.45)),
    ),
    ("ion_pump", "Ion pump", "Ion pump", (("on", 12.97),)),
)


def _limits(low, high, says, caution=(None, None)):
    return Limits(low=low, high=high, caution_low=caution[0], caution_high=caution[1], says=says)


def reading(seq, number, title, text, unit, u, limits, margin, verdict="pass", **named):
    base = dict(
        seq=seq,
        at="2026-07-31T14:31:07+01:00",
        time="14:31:07",
        by_name="J. Vell",
        step=f"s{number}",
        number=number,
        title=title,
        level="",
        text=text,
        value=text.replace("−", "-"),
        unit=unit,
        u=u,
        limits=limits,
        plate=None,
        margin=margin,
        margin_u="3.1",
        verdict=verdict,
        reason="",
        near=False,
        untypical=False,
        overdue=False,
        protects=False,
        instrument="DM-04",
        words="",
    )
    return Reading(**{**base, **named})


def readings(count: int = 1):
    one = (
        reading(
            12, "3", "Deck bus, dead", "502", "V", "6", _limits("450", None, "at least 450"), "52", part="tester before"
        ),
        reading(12, "3", "Deck bus, dead", "3", "V", "2", _limits(None, "50", "at most 50"), "47", part="deck bus"),
        reading(
            20, "9", "Coolant flow", "48.2", "L/min", "0.6", _limits("40.0", None, "at least 40.0", ("42", None)), "8.2"
        ),
        reading(
            31,
            "16",
            "Bias voltage",
            "-119.6",
            "V",
            "0.4",
            _limits("-125.0", "-115.0", "-125.0 to -115.0"),
            "4.6",
            old=(
                lines.OldValue(
                    text="-11.96", seq=31, reason="point in the wrong place", by_name="J. Vell", time="14:29:31"
                ),
            ),
        ),
        reading(
            33,
            "17",
            "Heater voltage, warm",
            "6.48",
            "V",
            "0.03",
            _limits("6.10", "6.50", "6.10 to 6.50", ("6.2", "6.4")),
            "0.02",
            "conditional pass",
            plate="6.30",
        ),
        reading(
            44,
            "22",
            "Body current",
            "46",
            "mA",
            "1.2",
            _limits(None, "40", "at most 40", (None, "36")),
            "-6",
            "fail",
            level="30 kV",
            deviation=1,
        ),
        reading(
            45,
            "22",
            "Beam current",
            "0.32",
            "A",
            "0.01",
            _limits("0.28", "0.36", "0.28 to 0.36"),
            "0.04",
            level="26 kV",
        ),
        reading(
            46,
            "23",
            "Beam power",
            "8.32",
            "kW",
            None,
            None,
            None,
            "not judged",
            reason="no limit",
            kind="result",
            instrument=None,
        ),
    )
    return one * count


def _note(seq, says, title="", number="7"):
    return Note(
        seq=seq,
        at="2026-07-31T13:10:00+01:00",
        time="13:10:00",
        by_name="J. Vell",
        number=number,
        title=title,
        says=says,
    )


def record(
    count: int = 1, rehearsal: bool = False, proved: bool = False, pictures: tuple = (), **named
) -> model.Record:
    """The record; `count` times its readings and its log."""
    kid = hashlib.sha256(b"kid").hexdigest()
    data = dict(
        head=model.Head(
            station="Skarrow Fell",
            site="skarrow",
            site_name="Skarrow Fell",
            cabinet="B2",
            tube="T-0417",
            tube_says="inductive output tube, 17 200 heater hours",
            run="0731-B2-2",
            procedure="hv-bring-up",
            edition=4,
            title="High-voltage bring-up",
            purpose="Bring the beam supply from zero to working voltage.",
            sheet=SHEET,
            proved=proved,
            rehearsal=rehearsal,
            outcome="done",
            outcome_reason="",
            recorder="j.vell",
            recorder_name="J. Vell",
            present=("J. Vell", "S. Quill"),
            tablet="tablet 3",
            started="2026-07-31T12:58:02+01:00",
            ended="2026-07-31T16:44:12+01:00",
            started_utc="2026-07-31T11:58:02+00:00",
            ended_utc="2026-07-31T15:44:12+00:00",
            zone="+01:00",
            day="31 July 2026",
            from_time="12:58",
            to_time="16:44",
        ),
        summary="On 31 July 2026, from 12:58 to 16:44, all 31 steps were done. Of 46 readings 44 pass, 1 passes "
        "conditionally and 1 failed and was accepted as a deviation.",
        short="All 31 steps were done.",
        counts=model.Counts(
            steps_done=31,
            steps=31,
            readings=46,
            passed=44,
            conditional=1,
            deviations=1,
            retaken=0,
            failed=0,
            not_judged=0,
            events=180,
        ),
        before=(),
        after=(),
        before_says="beam supply off, RF drive off, ion pump on",
        after_says="beam supply off, heater on, handed to operation",
        lanes=tuple(
            lines.Lane(
                source=s,
                title=t,
                short=n,
                spans=tuple(
                    lines.Span(
                        second=int(at * 3600), state=state, seq=i, warming=(s == "heater" and state == "on" and False)
                    )
                    for i, (state, at) in enumerate(spans)
                ),
            )
            for s, t, n, spans in LANES
        ),
        from_second=int(12.97 * 3600),
        to_second=int(16.74 * 3600),
        attention=(
            model.Attention(
                n=1,
                code="deviation",
                tag="Deviation",
                tone="dev",
                title="Body current at 30 kV",
                value="46",
                unit="mA",
                struck="",
                says="Above 40 mA by 6 mA, meter ±1.2 mA.",
                by="S. Quill 15:26: “Maker’s letter allows 50 mA for 10 h.”",
                seq=44,
                second=55560,
                lane=0,
            ),
            model.Attention(
                n=2,
                code="conditional",
                tag="Conditional pass",
                tone="con",
                title="Heater voltage, warm",
                value="6.48",
                unit="V",
                struck="",
                says="Margin 0.02 V is smaller than the meter’s ±0.03 V.",
                by="Last run 6.25 V.",
                seq=33,
                second=52200,
                lane=1,
            ),
            model.Attention(
                n=3,
                code="near",
                tag="Near a limit",
                tone="",
                title="Coolant flow at full power",
                value="41.6",
                unit="L/min",
                struck="",
                says="In the caution band above 40 L/min.",
                by="Flow was 48.2 L/min at 13:50.",
                seq=50,
                second=57840,
                lane=4,
            ),
            model.Attention(
                n=4,
                code="correction",
                tag="Correction",
                tone="",
                title="Bias voltage",
                value="-119.6",
                unit="V",
                struck="-11.96",
                says="Put right after 14 s: “point in the wrong place”.",
                by="J. Vell 14:29.",
                seq=31,
                second=51900,
                lane=2,
            ),
        ),
        readings=readings(count),
        formulas=(lines.FormulaLine(name="beam_power", meaning="Power in the beam", reference="P = U I; definition"),),
        deviations=(
            lines.Deviation(
                n=1,
                seq=44,
                at="",
                time="15:26:40",
                step="s22",
                number="22",
                title="Body current, 30 kV",
                value="46",
                unit="mA",
                limits="at most 40",
                says="Above 40 mA by 6 mA",
                reason="Maker’s letter allows 50 mA for 10 h.",
                under="maker’s letter",
                authority="s.quill",
                authority_name="S. Quill",
            ),
        ),
        retakes=(),
        corrections=(
            lines.Correction(
                seq=32,
                of_seq=31,
                at="",
                time="14:29:31",
                step="s16",
                number="16",
                title="Bias voltage",
                part="",
                old="-11.96",
                new="-119.6",
                unit="V",
                reason="Point in the wrong place",
                by_name="J. Vell",
                after_s=14,
            ),
        ),
        locks=(
            lines.LockLine(
                point="Q2, beam supply isolator",
                sources=("beam_supply",),
                lock="L-07",
                tag="T-07",
                holder_name="J. Vell",
                on_seq=5,
                on_time="13:04:10",
                from_run="",
                off_seq=30,
                off_time="14:03:55",
                off_by="J. Vell",
                left_on=False,
            ),
            lines.LockLine(
                point="RF patch",
                sources=("rf_drive",),
                lock="L-08",
                tag="",
                holder_name="S. Quill",
                on_seq=None,
                on_time="2026-07-30 16:10",
                from_run="0730-B2-1",
                off_seq=None,
                off_time="",
                off_by="",
                left_on=True,
            ),
        ),
        earths=(
            lines.EarthLine(
                stick="E1",
                point="deck bus",
                source="beam_supply",
                on_seq=13,
                on_time="13:20:01",
                from_run="",
                off_seq=28,
                off_time="13:58:00",
                left_on=False,
            ),
        ),
        proofs=(
            lines.Proof(
                seq=12,
                at="",
                time="13:18:00",
                by_name="J. Vell",
                number="3",
                title="Deck bus, dead",
                instrument="DM-04",
                known_source="tester’s own source",
                verdict="pass",
                values=("tester before 502 V, pass", "deck bus 3 V, pass", "tester after 501 V, pass"),
            ),
        ),
        waits=(
            lines.Wait(
                seq=35,
                time="14:24:00",
                number="15",
                title="Heater warm-up",
                least="900",
                counted="920",
                greatest="1112",
                says="15 min asked for, 15 min 20 s counted.",
                flag="The tablet’s clock was set forward during the wait; the running timer counts.",
            ),
        ),
        holds=(
            lines.Hold(
                seq=19,
                time="14:30:00",
                number="19",
                title="Ready for high voltage",
                statement="Hands out, covers on, doors shut.",
                who="s.quill",
                name="S. Quill",
            ),
        ),
        people=(_note(14, "in at the deck: J. Vell"), _note(27, "out of the deck: J. Vell, 1 of 1")),
        cautions=(_note(3, "DANGER, high voltage and X-rays. Heard by J. Vell and S. Quill.", number="1"),),
        remarks=(_note(60, "Flow meter window is dirty."),),
        trips=(),
        gaps=(_note(34, "The tablet’s clock was set forward by 3 min 12 s."),),
        safe=(),
        choices=(),
        pictures=pictures,
        signatures=(
            lines.Signature(
                seq=20,
                person="s.quill",
                name="S. Quill",
                role="Second person",
                meaning="released",
                statement="I released hold point 19 and allowed deviation 1.",
                time="2026-07-31T15:26:40+01:00",
                kid=kid,
                covers=19,
                holds=True,
                says="",
            ),
            lines.Signature(
                seq=179,
                person="j.vell",
                name="J. Vell",
                role="Technician",
                meaning="performed",
                statement="I did this work and these are my readings.",
                time="2026-07-31T16:51:08+01:00",
                kid=kid,
                covers=178,
                holds=True,
                says="",
            ),
        ),
        review=None,
        instruments=(
            lines.InstrumentLine(
                id="DM-04",
                reads="voltage",
                unit="V",
                range="0 to 1000 V",
                resolution="1",
                accuracy="0.5 % of reading + 3 digits",
                calibrated_to="2027-02-01",
                certificate="C-1182",
                used=True,
                overdue=False,
            ),
        ),
        givens=(
            lines.GivenLine(
                name="heater_voltage",
                meaning="Heater voltage on the nameplate",
                value="6.30",
                unit="V",
                source="nameplate of T-0417",
            ),
        ),
        log=tuple(
            lines.LogLine(
                seq=i,
                at="",
                time="13:00:00",
                by_name="J. Vell",
                kind="confirmed",
                number=str(i),
                title="A step",
                says="done",
                sha256=hashlib.sha256(bytes([i % 256])).hexdigest(),
            )
            for i in range(30 * count)
        ),
        chain=lines.Chain(chains=("d.1",), count=180, head=HEAD, whole=True, disagree=()),
        next_person="The heater is on. Nothing is locked in B2.",
        verify=(
            "Get the signing authority’s certificate from the station, not from this file.",
            "Run fieldkit verify FILE --ca CERTIFICATE.",
        ),
        context=context.Context(station="Skarrow Fell", proved=proved),
    )
    return model.Record(**{**data, **named})
