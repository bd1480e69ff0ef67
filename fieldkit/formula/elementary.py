"""exp, log, pow, sin, cos, atan, erf from + - * / and exact scaling: the same numbers on every machine.

The platform's own functions differ in the last bit between languages, so a verdict could too. These work in pairs of
doubles (a number is hi + lo), which leaves the rounding to a double as the only error that counts: within 2 units in
the last place of the exact value, held against mpmath. The twin is static/core/elementary.js, line by line;
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

from fieldkit.values import Fault

Pair = tuple[float, float]

INV_LN2 = 1.4426950408889634
LN2_1, LN2_2, LN2_3 = 0.6931471803691238, 1.9082149288430703e-10, 4.275175589747649e-20
TWO_OVER_PI = 0.6366197723675814
PIO2_1, PIO2_2, PIO2_3, PIO2_4 = 1.5707963267341256, 6.077100506303966e-11, 2.0222662487111665e-21, 8.4784276603689e-32
PIO2: Pair = (1.5707963267948966, 6.123233995736766e-17)
TWO_OVER_SQRT_PI: Pair = (1.1283791670955126, 1.533545961316588e-17)
SQRT_HALF = 0.7071067811865476
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


def _two_sum(a: float, b: float) -> Pair:
    s = a + b
    t = s - a
    return s, (a - (s - t)) + (b - t)


def _fast(a: float, b: float) -> Pair:
    s = a + b
    return s, b - (s - a)


def _two_prod(a: float, b: float) -> Pair:
    p = a * b
    t = 134217729.0 * a
    ah = t - (t - a)
    al = a - ah
    t = 134217729.0 * b
    bh = t - (t - b)
    bl = b - bh
    return p, ((ah * bh - p) + ah * bl + al * bh) + al * bl


def _add(a: Pair, b: Pair) -> Pair:
    s, e = _two_sum(a[0], b[0])
    t, f = _two_sum(a[1], b[1])
    s, e = _fast(s, e + t)
    return _fast(s, e + f)


def _mul(a: Pair, b: Pair) -> Pair:
    p, e = _two_prod(a[0], b[0])
    return _fast(p, e + (a[0] * b[1] + a[1] * b[0]))


def _times(a: Pair, b: float) -> Pair:
    p, e = _two_prod(a[0], b)
    return _fast(p, e + a[1] * b)


def _div(a: Pair, b: Pair) -> Pair:
    q1 = a[0] / b[0]
    p = _times(b, q1)
    r = _add(a, (-p[0], -p[1]))
    q2 = r[0] / b[0]
    p = _times(b, q2)
    r = _add(r, (-p[0], -p[1]))
    q3 = r[0] / b[0]
    s = _fast(q1, q2)
    return _add(s, (q3, 0.0))


def _inverse_factorials() -> tuple[Pair, ...]:
    found: list[Pair] = [(1.0, 0.0)]
    for n in range(1, 27):
        found.append(_div(found[-1], (float(n), 0.0)))
    return tuple(found)


#: 1 / n!
FACTORIAL = _inverse_factorials()
#: 1 / (2 n + 1)
ODD = tuple(_div((1.0, 0.0), (2.0 * n + 1.0, 0.0)) for n in range(140))


def _scale(x: float, k: int) -> float:
    """x * 2**k in two exact steps and at most one rounding; infinite beyond the range."""
    half = k // 2
    return (x * math.ldexp(1.0, half)) * math.ldexp(1.0, k - half)


def _exp(x: Pair) -> tuple[Pair, int]:
    """e**x as a pair near 1 and a power of two; |x| below 800."""
    k = math.floor(x[0] * INV_LN2 + 0.5)
    r = _add(_two_sum(x[0], -(k * LN2_1)), (x[1], 0.0))
    r = _add(_add(r, (-(k * LN2_2), 0.0)), (-(k * LN2_3), 0.0))
    r = (r[0] * 0.015625, r[1] * 0.015625)
    s = FACTORIAL[9]
    for n in range(8, 0, -1):
        s = _add(_mul(s, r), FACTORIAL[n])
    e = _mul(s, r)
    for _ in range(6):
        e = _add((2.0 * e[0], 2.0 * e[1]), _mul(e, e))
    return _add((1.0, 0.0), e), k


def _log(x: float) -> Pair:
    """ln x as a pair; x > 0."""
    m, e = math.frexp(x)
    if m < SQRT_HALF:
        m, e = m * 2.0, e - 1
    s = _div((m - 1.0, 0.0), _two_sum(m, 1.0))
    square = _mul(s, s)
    total = ODD[15]
    for n in range(14, -1, -1):
        total = _add(_mul(total, square), ODD[n])
    total = _mul(total, s)
    total = (2.0 * total[0], 2.0 * total[1])
    if e == 0:
        return total
    rest = _add((e * LN2_2, 0.0), (e * LN2_3, 0.0))
    return _add((e * LN2_1, 0.0), _add(rest, total))


def exp(x: float) -> float | Fault:
    if x > 710.0:
        return _too_large("exp")
    if x < -746.0:
        return 0.0
    e, k = _exp((x, 0.0))
    value = _scale(e[0], k)
    return _too_large("exp") if math.isinf(value) else value


def log(x: float) -> float | Fault:
    """The natural logarithm; domain for x <= 0."""
    if x <= 0.0:
        return Fault("domain", "The logarithm needs a number above zero.")
    return _log(x)[0]


def pow(x: float, y: float) -> float | Fault:
    """x ** y. x ** 0 is 1; 0 to a negative power divides by zero; a negative x needs a whole y."""
    if y == 0.0 or x == 1.0:
        return 1.0
    if x == 0.0:
        return 0.0 if y > 0.0 else Fault("divide-by-zero", "Zero to a negative power divides by zero.")
    odd = False
    if x < 0.0:
        if y != math.floor(y):
            return Fault("domain", "A negative number needs a whole power.")
        odd = y * 0.5 != math.floor(y * 0.5)
    ln = _log(abs(x))
    rough = y * ln[0]
    if rough > 710.0:
        return _too_large("the power")
    if rough < -746.0:
        return -0.0 if odd else 0.0
    e, k = _exp(_times(ln, y))
    value = _scale(e[0], k)
    if math.isinf(value):
        return _too_large("the power")
    return -value if odd else value


def _quadrant(x: float) -> tuple[Pair, int]:
    """x less the nearest multiple n of pi/2, and n modulo 4."""
    n = math.floor(x * TWO_OVER_PI + 0.5)
    r = _two_sum(x, -(n * PIO2_1))
    r = _add(_add(r, (-(n * PIO2_2), 0.0)), (-(n * PIO2_3), 0.0))
    return _add(r, (-(n * PIO2_4), 0.0)), n - 4 * math.floor(n / 4)


def _series(r: Pair, first: int) -> Pair:
    """Taylor's alternating series in r**2 over (first + 2 n)!: cos for 0, sin(r)/r for 1."""
    square = _mul(r, r)
    square = (-square[0], -square[1])
    total = FACTORIAL[first + 24]
    for n in range(first + 22, -1, -2):
        total = _add(_mul(total, square), FACTORIAL[n])
    return total


def _turned(x: float, ahead: int) -> float | Fault:
    if abs(x) > LARGEST_ANGLE:
        return Fault("out-of-range", "The angle is beyond 1,000,000 rad.")
    r, quarter = _quadrant(x)
    quarter = (quarter + ahead) % 4
    value = _series(r, 0)[0] if quarter % 2 == 1 else _mul(_series(r, 1), r)[0]
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
    y = _div((1.0, 0.0), (a, 0.0)) if a > 1.0 else (a, 0.0)
    k = math.floor(8.0 * y[0] + 0.5)
    c = k * 0.125
    t = _div(_add(y, (-c, 0.0)), _add((1.0, 0.0), _times(y, c)))
    square = _mul(t, t)
    square = (-square[0], -square[1])
    total = ODD[11]
    for n in range(10, -1, -1):
        total = _add(_mul(total, square), ODD[n])
    angle = _mul(total, t)
    if k > 0:
        angle = _add(ATAN_EIGHTHS[k], angle)
    if a > 1.0:
        angle = _add(PIO2, (-angle[0], -angle[1]))
    return -angle[0] if x < 0.0 else angle[0]


def erf(x: float) -> float:
    """The error function: the chance that a normal value lies within x sqrt(2) standard deviations of the mean."""
    a = abs(x)
    if a >= 6.0:
        return -1.0 if x < 0.0 else 1.0
    square = _two_prod(a, a)
    double = (2.0 * square[0], 2.0 * square[1])
    term: Pair = (1.0, 0.0)
    total: Pair = (1.0, 0.0)
    n = 1
    while term[0] > total[0] * 1e-22:
        term = _mul(_mul(term, double), ODD[n])
        total = _add(total, term)
        n += 1
    e, k = _exp((-square[0], -square[1]))
    value = _scale(_times(_mul(_mul(total, e), TWO_OVER_SQRT_PI), a)[0], k)
    return -value if x < 0.0 else value


def _too_large(what: str) -> Fault:
    return Fault("overflow", f"The result of {what} is too large.")
