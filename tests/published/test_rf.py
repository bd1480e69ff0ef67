"""RF power and match against something outside the project; the source stands beside each check."""

from __future__ import annotations

import math
import random

import numpy
import pint
import pytest
import skrf
from published import answer, call
from skrf.media import DefinedGammaZ0

from fieldkit.values import Fault

# Levels. Source: pint's logarithmic units.

_PINT = pint.UnitRegistry(autoconvert_offset_to_baseunit=True)


def test_levels_and_watts_equal_pint() -> None:
    rnd = random.Random(7)
    for _ in range(200):
        level = rnd.uniform(-100, 100)
        watts = float(_PINT.Quantity(level, "dBm").to("W").magnitude)
        assert call("watts_from_dbm", level=level) == pytest.approx(watts, rel=1e-12)
        assert call("dbm_from_watts", power=watts) == pytest.approx(
            float(_PINT.Quantity(watts, "W").to("dBm").magnitude), abs=1e-11
        )


def test_levels_that_everybody_knows() -> None:
    """Source: common practice, no source: 0 dBm is 1 mW, 30 dBm 1 W, 3 dB nearly twice."""
    assert call("watts_from_dbm", level=30.0) == pytest.approx(1.0, rel=1e-14)
    assert call("dbm_from_watts", power=0.001) == 0.0
    assert call("watts_from_dbm", level=33.0) == pytest.approx(2.0, rel=3e-3)


# Couplers. Source: attenuators in cascade by scikit-rf; the meter gets what their scattering matrix lets through.


def test_coupler_power_undoes_a_cascade_of_attenuators() -> None:
    media = DefinedGammaZ0(skrf.Frequency(600, 600, 1, unit="MHz"), z0=50)
    rnd = random.Random(8)
    for _ in range(30):
        power, coupling, cable, pad = (
            rnd.uniform(1e3, 120e3),
            rnd.uniform(40, 70),
            rnd.uniform(0, 3),
            rnd.choice((3, 10, 20)),
        )
        chain = media.attenuator(-coupling) ** media.attenuator(-cable) ** media.attenuator(-pad)
        at_meter = power * abs(chain.s[0, 1, 0]) ** 2
        reading = float(_PINT.Quantity(at_meter, "W").to("dBm").magnitude)
        got = call("coupler_power", reading=reading, coupling=coupling, losses=cable + pad)
        assert got == pytest.approx(power, rel=1e-10)


def test_a_coupler_with_its_sign_turned_round_gives_no_number() -> None:
    beyond = answer("coupler_power", reading=20.0, coupling=60.0, losses=20.001)
    assert isinstance(beyond, Fault) and beyond.code == "out-of-range" and "10 MW" in beyond.says
    assert call("coupler_power", reading=20.0, coupling=60.0, losses=20.0) == pytest.approx(1e7, rel=1e-12)


# Match. Source: circuit theory. A source of 50 ohm feeds a load of any impedance; waves, voltages and powers come from
# Kirchhoff's laws, and scikit-rf gives the standing wave ratio and the level of its scattering parameter.


def _load(rnd: random.Random) -> complex:
    return complex(rnd.uniform(2, 400), rnd.uniform(-200, 200))


def _waves(load: complex) -> tuple[float, float]:
    """Forward and reflected power on a line of 50 ohm, from voltage and current at a load on a source of 2 kV."""
    current = 2000 / (50 + load)
    voltage = current * load
    forward, reflected = (voltage + 50 * current) / 2, (voltage - 50 * current) / 2
    return abs(forward) ** 2 / 50, abs(reflected) ** 2 / 50


def test_match_of_any_load_equals_scikit_rf() -> None:
    rnd = random.Random(9)
    for _ in range(100):
        load = _load(rnd)
        forward, reflected = _waves(load)
        network = skrf.Network(f=[600e6], s=skrf.network.z2s(numpy.array([[[load]]]), 50), z0=50)
        assert call("reflection", forward=forward, reflected=reflected) == pytest.approx(
            network.s_mag[0, 0, 0], rel=1e-9
        )
        assert call("vswr", forward=forward, reflected=reflected) == pytest.approx(network.s_vswr[0, 0, 0], rel=1e-9)
        loss = call("return_loss", forward=forward, reflected=reflected)
        assert loss == pytest.approx(-network.s_db[0, 0, 0], abs=1e-9)
        ratio = float(network.s_vswr[0, 0, 0])
        assert call("reflection_from_vswr", vswr=ratio) == pytest.approx(network.s_mag[0, 0, 0], rel=1e-9)
        assert call("return_loss_from_vswr", vswr=ratio) == pytest.approx(loss, abs=1e-8)
        assert call("vswr_from_return_loss", return_loss=loss) == pytest.approx(ratio, rel=1e-9)


def test_mismatch_loss_is_the_power_that_a_load_does_not_take() -> None:
    """Source: power in the load by Ohm's law, against the most that the source can give (matched)."""
    rnd = random.Random(10)
    for _ in range(100):
        load = _load(rnd)
        taken = abs(2000 / (50 + load)) ** 2 * load.real
        available = 2000**2 / (4 * 50)
        ratio = call("vswr", **dict(zip(("forward", "reflected"), _waves(load), strict=True)))
        assert call("mismatch_loss", vswr=ratio) == pytest.approx(10 * math.log10(available / taken), abs=1e-9)


def test_vswr_is_the_ratio_of_greatest_and_least_voltage_on_a_line() -> None:
    """Source: the two waves added along half a wavelength of line."""
    for forward, reflected in [(50e3, 200.0), (28e3, 1.0), (10e3, 4e3), (100.0, 99.0)]:
        phases = numpy.linspace(0, 2 * math.pi, 20_001)
        voltage = numpy.abs(math.sqrt(forward) + math.sqrt(reflected) * numpy.exp(1j * phases))
        assert call("vswr", forward=forward, reflected=reflected) == pytest.approx(
            voltage.max() / voltage.min(), rel=1e-6
        )


@pytest.mark.parametrize(
    ("ratio", "level", "lost"), [(1.1, 26.44, 0.0099), (1.5, 13.98, 0.177), (2.0, 9.54, 0.512), (3.0, 6.02, 1.249)]
)
def test_match_equals_the_table_that_handbooks_print(ratio: float, level: float, lost: float) -> None:
    """Source: table of VSWR, return loss and mismatch loss as handbooks print it, from memory."""
    assert call("return_loss_from_vswr", vswr=ratio) == pytest.approx(level, abs=0.006)
    assert call("mismatch_loss", vswr=ratio) == pytest.approx(lost, abs=0.0006)


def test_powers_that_cannot_be_have_no_answer() -> None:
    """More comes back than goes: no passive load does that. Nothing comes back: there is no return loss."""
    for name in ("reflection", "vswr", "return_loss"):
        more = answer(name, forward=1000.0, reflected=1000.1)
        assert isinstance(more, Fault) and more.code == "out-of-range", name
    all_back = answer("vswr", forward=1000.0, reflected=1000.0)
    assert isinstance(all_back, Fault) and "below the forward power" in all_back.says
    none = answer("return_loss", forward=1000.0, reflected=0.0)
    assert isinstance(none, Fault) and "above zero" in none.says
    assert call("return_loss", forward=1000.0, reflected=1000.0) == 0.0
    assert call("reflection", forward=1000.0, reflected=1000.0) == 1.0


# Directivity. Source: the leakage of the coupler turned through all phases against the reflected wave.


@pytest.mark.parametrize("directivity", [20.0, 30.0, 36.5])
@pytest.mark.parametrize("true", [0.0, 10.0, 18.0, 26.0, 32.0, 45.0])
def test_directivity_bounds_equal_a_sweep_of_phase(true: float, directivity: float) -> None:
    turned = numpy.exp(1j * numpy.linspace(-math.pi, math.pi, 3601))
    seen = -20 * numpy.log10(numpy.abs(10 ** (-true / 20) + 10 ** (-directivity / 20) * turned))
    arguments = {"return_loss": true, "directivity": directivity}
    assert call("directivity_lowest", **arguments) == pytest.approx(seen.min(), abs=1e-5)
    assert call("directivity_highest", **arguments) == pytest.approx(seen.max(), abs=1e-5)


def test_directivity_bounds_of_the_worked_case() -> None:
    """A true 26 dB with 30 dB of directivity reads 21.8 to 34.7 dB: worked once with a sweep of phase elsewhere."""
    assert call("directivity_lowest", return_loss=26.0, directivity=30.0) == pytest.approx(21.8, abs=0.06)
    assert call("directivity_highest", return_loss=26.0, directivity=30.0) == pytest.approx(34.7, abs=0.06)


def test_where_leakage_and_reflection_can_cancel_there_is_no_highest() -> None:
    for true in (29.95, 30.0, 30.05):
        equal = answer("directivity_highest", return_loss=true, directivity=30.0)
        assert isinstance(equal, Fault) and equal.code == "out-of-range" and "cancel" in equal.says
        assert call("directivity_lowest", return_loss=true, directivity=30.0) == pytest.approx(23.98, abs=0.06)
    assert call("directivity_highest", return_loss=30.2, directivity=30.0) > 60


# Mismatch of source and meter. Source: a voltage source with its impedance, a line of changing length, and the meter's
# impedance, by scikit-rf; the incident wave at the meter is set against the one that a meter of 50 ohm gets.


@pytest.mark.parametrize(("source", "meter"), [(1.2, 1.5), (1.05, 2.0), (1.8, 1.8), (3.0, 1.1)])
def test_mismatch_bounds_equal_a_line_of_changing_length(source: float, meter: float) -> None:
    media = DefinedGammaZ0(skrf.Frequency(600, 600, 1, unit="MHz"), z0=50)
    errors = []
    for degrees in numpy.linspace(0, 180, 181):
        line = media.line(degrees, "deg")
        incident = []
        for load in (50 * meter, 50.0):
            seen = (line ** media.load((load - 50) / (load + 50))).s[0, 0, 0]
            entry = 50 * (1 + seen) / (1 - seen)
            current = 1 / (50 * source + entry)
            incident.append(abs(current * (entry + 50)) / 2)
        errors.append(20 * math.log10(incident[1] / incident[0]))
    assert call("mismatch_lowest", source=source, meter=meter) == pytest.approx(min(errors), abs=1e-6)
    assert call("mismatch_highest", source=source, meter=meter) == pytest.approx(max(errors), abs=1e-6)
