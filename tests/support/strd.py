"""NIST Statistical Reference Datasets (StRD, https://www.itl.nist.gov/div898/strd/), in the public domain.

Norris is read from the scipy wheel. Pontius is typed here: its rows were compared with several public test files that
carry them and agree, and a wrong digit in any row would move a coefficient by more than the checks allow.
"""

from __future__ import annotations

import importlib.resources
from typing import NamedTuple


class Certified(NamedTuple):
    x: list[float]
    y: list[float]
    coefficients: list[float]
    deviations: list[float]
    s: float


def norris() -> Certified:
    """A straight line: ozone monitors. Certified values and data from the file in scipy."""
    text = importlib.resources.files("scipy.stats").joinpath("tests/data/nist_linregress/Norris.dat").read_text()
    lines = text.splitlines()
    rows = [[float(v) for v in line.split()] for line in lines[60:96]]
    b0, b1 = (line.split() for line in lines if line.strip().startswith(("B0 ", "B1 ")))
    s = next(line.split() for line in lines if line.strip().startswith("Standard Deviation   "))
    return Certified(
        [row[1] for row in rows],
        [row[0] for row in rows],
        [float(b0[1]), float(b1[1])],
        [float(b0[2]), float(b1[2])],
        float(s[2]),
    )


#: deflection of a load cell, two rounds of 20 loads
PONTIUS_Y = """
.11019 .21956 .32949 .43899 .54803 .65694 .76562 .87487 .98292 1.09146
1.20001 1.30822 1.41599 1.52399 1.63194 1.73947 1.84646 1.95392 2.06128 2.16844
.11052 .22018 .32939 .43886 .54798 .65739 .76596 .87474 .98300 1.09150
1.20004 1.30818 1.41613 1.52408 1.63159 1.73965 1.84696 1.95445 2.06177 2.16829
"""


def pontius() -> Certified:
    """A parabola: load cell calibration. Certified values: NIST StRD Pontius."""
    return Certified(
        [150_000.0 * k for k in range(1, 21)] * 2,
        [float(v) for v in PONTIUS_Y.split()],
        [0.673565789473684e-03, 0.732059160401003e-06, -0.316081871345029e-14],
        [0.107938612033077e-03, 0.157817399981659e-09, 0.486652849992036e-16],
        0.205177424076185e-03,
    )
