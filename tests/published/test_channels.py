"""Channels, pilot, mask and authorised power against something outside the project; the source stands beside each."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy
import pytest
from published import answer, call

from fieldkit.values import Fault

# Channels. Source: 47 CFR 73.603(a) as amended on 22 November 2021, its rows 14 to 36 as printed (MHz).

_PRINTED = """
14 470-476  15 476-482  16 482-488  17 488-494  18 494-500  19 500-506  20 506-512  21 512-518  22 518-524  23 524-530
24 530-536  25 536-542  26 542-548  27 548-554  28 554-560  29 560-566  30 566-572  31 572-578  32 578-584  33 584-590
34 590-596  35 596-602  36 602-608
"""
_ROWS = [
    (int(n), *map(int, band.split("-"))) for n, band in zip(_PRINTED.split()[::2], _PRINTED.split()[1::2], strict=True)
]


def test_channels_equal_the_printed_table() -> None:
    assert [row[0] for row in _ROWS] == list(range(14, 37))
    for channel, low, high in _ROWS:
        assert call("channel_lower_edge", channel=float(channel)) == low * 1e6
        assert call("channel_centre", channel=float(channel)) == (low + high) / 2 * 1e6


@pytest.mark.parametrize("channel", [13.0, 37.0, 20.5, 14.0000001])
def test_no_channel_outside_the_table_or_between_its_rows(channel: float) -> None:
    """37 is 608 to 614 MHz, radio astronomy (47 CFR 73.603(c))."""
    for name in ("channel_lower_edge", "channel_centre", "pilot_frequency"):
        value = answer(name, channel=channel)
        assert isinstance(value, Fault) and value.code == "out-of-range"


# Pilot. Source: 309.440559 kHz above the edge as public texts print it; two printed forms of the symbol rate, 4.5 MHz
# / 286 x 684 and 1539/143 MHz (10.762 238 MHz), in exact fractions.


def test_the_pilot_is_177_over_572_megahertz_above_the_edge() -> None:
    rate = Fraction(9, 2) / 286 * 684
    assert rate == Fraction(1539, 143)
    above = (6 - rate / 2) / 2
    assert above == Fraction(177, 572)
    assert float(above) * 1e3 == pytest.approx(309.440559, abs=5e-7)
    for channel, low, _ in _ROWS:
        exact = (low + above) * 1_000_000
        assert call("pilot_frequency", channel=float(channel)) == pytest.approx(float(exact), abs=1e-6)


# Mask. Source: 47 CFR 74.794(a)(2)(iii), edition of October 2013: at least 47 dB in the first 500 kHz, 11.5 (df + 3.6)
# between 0.5 and 6 MHz, more than 6 MHz off at least 110 dB (110 from memory). Rows worked by hand from the text.


@pytest.mark.parametrize(
    ("megahertz", "decibel"),
    [
        (0, 47), (0.1, 47), (0.499999, 47), (0.5, 47.15), (1, 52.9), (1.5, 58.65), (2, 64.4), (3, 75.9), (4, 87.4),
        (5, 98.9), (6, 110.4), (6.000001, 110), (12, 110), (600, 110),
    ],
)  # fmt: skip
def test_the_mask_keeps_to_the_inequalities_of_the_text(megahertz: float, decibel: float) -> None:
    assert call("mask_attenuation", offset=megahertz * 1e6) == pytest.approx(decibel, abs=1e-9)


def test_the_mask_lies_beside_its_sister_in_the_same_text() -> None:
    """Source: the stringent mask of 47 CFR 74.794(a)(2)(ii), 47 + 11.5 (df - 0.5) from 0.5 to 3 MHz: 0.15 dB less."""
    for megahertz in numpy.linspace(0.5, 3, 26):
        sister = 47 + 11.5 * (float(megahertz) - 0.5)
        assert call("mask_attenuation", offset=float(megahertz) * 1e6) - sister == pytest.approx(0.15, abs=1e-9)


def test_a_reading_in_another_bandwidth_is_converted_as_noise_is() -> None:
    """Source: white noise by numpy, its power summed in bands of 10, 30 and 100 kHz and of 500 kHz; and -12.22 dB for 30 kHz."""
    rng = numpy.random.default_rng(12)
    bins = numpy.abs(rng.normal(size=(400, 500)) + 1j * rng.normal(size=(400, 500))) ** 2  # one bin a kilohertz
    wide = 10 * math.log10(bins.sum(axis=1).mean())
    for kilohertz in (10, 30, 100):
        narrow = 10 * math.log10(bins[:, :kilohertz].sum(axis=1).mean())
        reading = 80.0 + wide - narrow
        got = call("mask_reading_in_500_khz", attenuation=reading, bandwidth=kilohertz * 1e3)
        assert got == pytest.approx(80.0, abs=0.1)
    change = call("mask_reading_in_500_khz", attenuation=60.0, bandwidth=30e3) - 60.0
    assert change == pytest.approx(-12.22, abs=0.005)
    assert call("mask_reading_in_500_khz", attenuation=60.0, bandwidth=500e3) == 60.0


# Authorised power. Source: 80 % and 110 % of 47 CFR 73.1560(c)(1), edition of October 2013, as -0.97 and +0.41 dB.


@pytest.mark.parametrize(("decibel", "percent"), [(-0.97, 80), (0.41, 110), (0.0, 100)])
def test_percent_of_authorised_equals_the_limits_in_decibel(decibel: float, percent: float) -> None:
    """Half a hundredth of a decibel, by which the printed figures are rounded, is 0.12 %."""
    authorised = 28e3
    measured = call("watts_from_dbm", level=call("dbm_from_watts", power=authorised) + decibel)
    assert call("percent_of_authorised", power=measured, authorised=authorised) == pytest.approx(
        percent / 100, abs=1.3e-3
    )
