"""exp, log, pow, sin, cos, atan, erf from + - * / and exact scaling: the same numbers on every machine.

The platform's own functions differ in the last bit between languages, so a verdict could too. These work in pairs of
doubles (a number is hi + lo), which leaves the rounding to a double as the only error that counts: within 2 units in
the last place of the exact value, held against mpmath. For exp, log and pow there is a short way (quick.py), taken
where it is certain to give the same. The twin is static/core/elementary.js, line by line;
tests/vectors/elementary/ and the differential test hold the two together, bit for bit.

Each takes finite doubles and gives a finite double or a Fault: overflow, domain, divide-by-zero, out-of-range (sin and
cos beyond 1,000,000 rad). Underflow gives zero or a subnormal. Never an exception, never NaN.

Methods (textbook): exp by 64-fold argument reduction and Taylor's series; log by 2 atanh((m-1)/(m+1)); pow by both;
sin, cos by Cody and Waite's reduction with pi/2 in four parts; atan about the nearest eighth; erf by the series
2/sqrt(pi) exp(-x^2) sum 2^n x^(2n+1)/(2n+1)!!, whose terms all have one sign. Pair arithmetic: T. J. Dekker 1971,
D. E. Knuth (two-sum). Constants: mpmath, 400 bits.
"""

from __future__ import annotations

import math

from fieldkit.formula import pairs, quick
from fieldkit.formula.pairs import Pair
from fieldkit.formula.quick import MOST
from fieldkit.values import Fault

TWO_OVER_PI = 0.6366197723675814
PIO2_1, PIO2_2, PIO2_3, PIO2_4 = 1.5707963267341256, 6.077100506303966e-11, 2.0222662487111665e-21, 8.4784276603689e-32
PIO2: Pair = (1.5707963267948966, 6.123233995736766e-17)
TWO_OVER_SQRT_PI: Pair = (1.1283791670955126, 1.533545961316588e-17)
ATAN_EIGHTHS: tuple[Pair, ...] = (
    (0.0, 0.0),
    (0.12435499454676144, -3.1253241424539383e-18),
    (0.24497866312686414, 1.0698755618734451e-17),
    (0.35877067027057225, -2.4623815582638635e-17),
    (0.4636476090008061, 2.2698777452961687e-17),
    (0.5585993153435624, -5.4556305485916264e-18),
    (0.6435011087932844, 1.5834785051444286e-17),
    (0.7188299996216245, -2.1478388444456983e-17),
    (0.7853981633974483, 3.061616997868383e-17),
)

LARGEST_ANGLE = 1_000_000.0


def exp(x: float) -> float | Fault:
    if -MOST < x < MOST:
        near = quick.exp(x)
        if near == near:
            return near
    if x > 710.0:
        return _too_large("exp")
    if x < -746.0:
        return 0.0
    e, k = pairs.exp((x, 0.0))
    value = pairs.scale(e[0], k)
    return _too_large("exp") if math.isinf(value) else value


def log(x: float) -> float | Fault:
    """The natural logarithm; domain for x <= 0."""
    if x <= 0.0:
        return Fault("domain", "The logarithm needs a number above zero.")
    near, rest = quick.log(x)
    if near + (rest - quick.LOG_DOUBT) == near + (rest + quick.LOG_DOUBT):
        return near
    return pairs.log(x)[0]


def pow(x: float, y: float) -> float | Fault:
    """x ** y. x ** 0 is 1; 0 to a negative power divides by zero; a negative x needs a whole y."""
    if y == 0.0 or x == 1.0:
        return 1.0
    if x == 0.0:
        return 0.0 if y > 0.0 else Fault("divide-by-zero", "Zero to a negative power divides by zero.")
    if y == 2.0:
        square = x * x
        return _too_large("the power") if math.isinf(square) else square
    odd = False
    if x < 0.0:
        if y != math.floor(y):
            return Fault("domain", "A negative number needs a whole power.")
        odd = y * 0.5 != math.floor(y * 0.5)
    near = _near_power(abs(x), y)
    if near == near:
        return -near if odd else near
    ln = pairs.log(abs(x))
    rough = y * ln[0]
    if rough > 710.0:
        return _too_large("the power")
    if rough < -746.0:
        return -0.0 if odd else 0.0
    e, k = pairs.exp(pairs.times(ln, y))
    value = pairs.scale(e[0], k)
    if math.isinf(value):
        return _too_large("the power")
    return -value if odd else value


def _near_power(x: float, y: float) -> float:
    """x ** y the short way, or NaN; x > 0."""
    ln, rest = quick.log(x)
    if abs(y * ln) >= MOST:
        return math.nan
    hi, lo = pairs.two_prod(ln, y)
    return quick.exp(hi, lo + y * rest, quick.EXP_DOUBT + abs(y) * quick.POWER_DOUBT)


def _quadrant(x: float) -> tuple[Pair, int]:
    """x less the nearest multiple n of pi/2, and n modulo 4."""
    n = math.floor(x * TWO_OVER_PI + 0.5)
    r = pairs.two_sum(x, -(n * PIO2_1))
    r = pairs.add(pairs.add(r, (-(n * PIO2_2), 0.0)), (-(n * PIO2_3), 0.0))
    return pairs.add(r, (-(n * PIO2_4), 0.0)), n - 4 * math.floor(n / 4)


def _series(r: Pair, first: int) -> Pair:
    """Taylor's alternating series in r**2 over (first + 2 n)!: cos for 0, sin(r)/r for 1."""
    square = pairs.mul(r, r)
    square = (-square[0], -square[1])
    total = pairs.FACTORIAL[first + 24]
    for n in range(first + 22, -1, -2):
        total = pairs.add(pairs.mul(total, square), pairs.FACTORIAL[n])
    return total


def _turned(x: float, ahead: int) -> float | Fault:
    if abs(x) > LARGEST_ANGLE:
        return Fault("out-of-range", "The angle is beyond 1,000,000 rad.")
    r, quarter = _quadrant(x)
    quarter = (quarter + ahead) % 4
    value = _series(r, 0)[0] if quarter % 2 == 1 else pairs.mul(_series(r, 1), r)[0]
    return -value if quarter >= 2 else value


def sin(x: float) -> float | Fault:
    """The sine of x in rad."""
    return x if x == 0.0 else _turned(x, 0)


def cos(x: float) -> float | Fault:
    """The cosine of x in rad."""
    return _turned(x, 1)


def atan(x: float) -> float:
    """The angle in rad, between -pi/2 and pi/2, whose tangent is x."""
    a = abs(x)
    if a > 1152921504606846976.0:
        value = PIO2[0] + (PIO2[1] - 1.0 / a)
        return -value if x < 0.0 else value
    y = pairs.div((1.0, 0.0), (a, 0.0)) if a > 1.0 else (a, 0.0)
    k = math.floor(8.0 * y[0] + 0.5)
    c = k * 0.125
    t = pairs.div(pairs.add(y, (-c, 0.0)), pairs.add((1.0, 0.0), pairs.times(y, c)))
    square = pairs.mul(t, t)
    square = (-square[0], -square[1])
    total = pairs.ODD[11]
    for n in range(10, -1, -1):
        total = pairs.add(pairs.mul(total, square), pairs.ODD[n])
    angle = pairs.mul(total, t)
    if k > 0:
        angle = pairs.add(ATAN_EIGHTHS[k], angle)
    if a > 1.0:
        angle = pairs.add(PIO2, (-angle[0], -angle[1]))
    return -angle[0] if x < 0.0 else angle[0]


def erf(x: float) -> float:
    """The error function: the chance that a normal value lies within x sqrt(2) standard deviations of the mean."""
    a = abs(x)
    if a >= 6.0:
        return -1.0 if x < 0.0 else 1.0
    square = pairs.two_prod(a, a)
    double = (2.0 * square[0], 2.0 * square[1])
    term: Pair = (1.0, 0.0)
    total: Pair = (1.0, 0.0)
    n = 1
    while term[0] > total[0] * 1e-22:
        term = pairs.mul(pairs.mul(term, double), pairs.ODD[n])
        total = pairs.add(total, term)
        n += 1
    e, k = pairs.exp((-square[0], -square[1]))
    value = pairs.scale(pairs.times(pairs.mul(pairs.mul(total, e), TWO_OVER_SQRT_PI), a)[0], k)
    return -value if x < 0.0 else value


def _too_large(what: str) -> Fault:
    return Fault("overflow", f"The result of {what} is too large.")
