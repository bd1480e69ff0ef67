"""NIST Statistical Reference Datasets for nonlinear regression, https://www.itl.nist.gov/div898/strd/, in the public domain.

Typed rows, certified parameters and standard deviations to eleven digits, and both starts that NIST gives. The typing was
compared with the files that public test suites carry; a wrong digit would move a parameter by more than the checks allow.
"""

from __future__ import annotations

from typing import NamedTuple


class Curve(NamedTuple):
    """Of the formula in x and b1, b2, ...: readings, starts, certified parameters, deviations, and residual s."""

    formula: str
    x: list[float]
    y: list[float]
    starts: tuple[list[float], list[float]]
    parameters: list[float]
    deviations: list[float]
    s: float


def _numbers(text: str) -> list[float]:
    return [float(word) for word in text.split()]


MISRA1A = Curve(
    "b1 * (1 - exp(-(b2 * x)))",
    _numbers("77.6 114.9 141.1 190.8 239.9 289.0 332.8 378.4 434.8 477.3 536.8 593.1 689.1 760.0"),
    _numbers("10.07 14.73 17.94 23.93 29.61 35.18 40.02 44.82 50.76 55.05 61.01 66.40 75.47 81.78"),
    ([500.0, 0.0001], [250.0, 0.0005]),
    [2.3894212918e2, 5.5015643181e-4],
    [2.7070075241, 7.2668688436e-6],
    1.0187876330e-1,
)
BOXBOD = Curve(
    "b1 * (1 - exp(-(b2 * x)))",
    _numbers("1 2 3 5 7 10"),
    _numbers("109 149 149 191 213 224"),
    ([1.0, 1.0], [100.0, 0.75]),
    [2.1380940889e2, 5.4723748542e-1],
    [1.2354515176e1, 1.0455993237e-1],
    1.7088072423e1,
)
DANWOOD = Curve(
    "b1 * x ^ b2",
    _numbers("1.309 1.471 1.490 1.565 1.611 1.680"),
    _numbers("2.138 3.421 3.597 4.340 4.882 5.660"),
    ([1.0, 5.0], [0.7, 4.0]),
    [7.6886226176e-1, 3.8604055871],
    [1.8281973860e-2, 5.1726610913e-2],
    3.2853114039e-2,
)
MGH17 = Curve(
    "b1 + b2 * exp(-(x * b4)) + b3 * exp(-(x * b5))",
    [10.0 * k for k in range(33)],
    _numbers(
        ".844 .908 .932 .936 .925 .908 .881 .850 .818 .784 .751 .718 .685 .658 .628 .603 .580 .558 .538 .522 .506 "
        ".490 .478 .467 .457 .448 .438 .431 .424 .420 .414 .411 .406"
    ),
    ([50.0, 150.0, -100.0, 1.0, 2.0], [0.5, 1.5, -1.0, 0.01, 0.02]),
    [3.7541005211e-1, 1.9358469127, -1.4646871366, 1.2867534640e-2, 2.2122699662e-2],
    [2.0723153551e-3, 2.2031669222e-1, 2.2175707739e-1, 4.4861358114e-4, 8.9471996575e-4],
    1.3970497866e-3,
)
#: metal distance and ultrasonic response
_CHWIRUT2 = _numbers("""
 .500 92.9000 1.000 57.1000 1.750 31.0500 3.750 11.5875 5.750 8.0250 .875 63.6000 2.250 21.4000 3.250 14.2500
5.250  8.4750  .750 63.8000 1.750 26.8000 2.750 16.4625 4.750 7.1250 .625 67.3000 1.250 41.0000 2.250 21.1500
4.250  8.1750  .500 81.5000 3.000 13.1200  .750 59.9000 3.000 14.6200 1.500 32.9000 6.000 5.4400 3.000 12.5600
6.000  5.4400 1.500 32.0000 3.000 13.9500  .500 75.8000 2.000 20.0000 4.000 10.4200  .750 59.5000 2.000 21.6700
5.000  8.5500  .750 62.0000 2.250 20.2000 3.750  7.7600 5.750  3.7500 3.000 11.8100  .750 54.7000 2.500 23.7000
4.000 11.5500  .750 61.3000 2.500 17.7000 4.000  8.7400  .750 59.2000 2.500 16.3000 4.000  8.6200  .500 81.0000
6.000  4.8700 3.000 14.6200  .500 81.7000 2.750 17.1700  .500 81.3000 1.750 28.9000
""")
CHWIRUT2 = Curve(
    "exp(-(b1 * x)) / (b2 + b3 * x)",
    _CHWIRUT2[0::2],
    _CHWIRUT2[1::2],
    ([0.1, 0.01, 0.02], [0.15, 0.008, 0.010]),
    [1.6657666537e-1, 5.1653291286e-3, 1.2150007096e-2],
    [3.8303286810e-2, 6.6621605126e-4, 1.5304234767e-3],
    3.1717133040,
)
SETS = {"Misra1a": MISRA1A, "BoxBOD": BOXBOD, "DanWood": DANWOOD, "MGH17": MGH17, "Chwirut2": CHWIRUT2}
