"""Arithmetic on pairs of doubles, and exp and log of such pairs: a number is hi + lo, good to some 30 digits.

The long way round, for whatever the short way (quick.py) leaves in doubt. The twin is static/core/pairs.js, line by
line. Not here: the functions of the language (elementary.py), which say what is promised and by which methods.
"""

from __future__ import annotations

import math

Pair = tuple[float, float]

INV_LN2 = 1.4426950408889634
LN2_1, LN2_2, LN2_3 = 0.6931471803691238, 1.9082149288430703e-10, 4.275175589747649e-20
SQRT_HALF = 0.7071067811865476


def two_sum(a: float, b: float) -> Pair:
    s = a + b
    t = s - a
    return s, (a - (s - t)) + (b - t)


def fast(a: float, b: float) -> Pair:
    s = a + b
    return s, b - (s - a)


def two_prod(a: float, b: float) -> Pair:
    p = a * b
    t = 134217729.0 * a
    ah = t - (t - a)
    al = a - ah
    t = 134217729.0 * b
    bh = t - (t - b)
    bl = b - bh
    return p, ((ah * bh - p) + ah * bl + al * bh) + al * bl


def add(a: Pair, b: Pair) -> Pair:
    s, e = two_sum(a[0], b[0])
    t, f = two_sum(a[1], b[1])
    s, e = fast(s, e + t)
    return fast(s, e + f)


def mul(a: Pair, b: Pair) -> Pair:
    p, e = two_prod(a[0], b[0])
    return fast(p, e + (a[0] * b[1] + a[1] * b[0]))


def times(a: Pair, b: float) -> Pair:
    p, e = two_prod(a[0], b)
    return fast(p, e + a[1] * b)


def div(a: Pair, b: Pair) -> Pair:
    q1 = a[0] / b[0]
    p = times(b, q1)
    r = add(a, (-p[0], -p[1]))
    q2 = r[0] / b[0]
    p = times(b, q2)
    r = add(r, (-p[0], -p[1]))
    q3 = r[0] / b[0]
    s = fast(q1, q2)
    return add(s, (q3, 0.0))


def _inverse_factorials() -> tuple[Pair, ...]:
    found: list[Pair] = [(1.0, 0.0)]
    for n in range(1, 27):
        found.append(div(found[-1], (float(n), 0.0)))
    return tuple(found)


#: 1 / n!
FACTORIAL = _inverse_factorials()
#: 1 / (2 n + 1)
ODD = tuple(div((1.0, 0.0), (2.0 * n + 1.0, 0.0)) for n in range(140))


def scale(x: float, k: int) -> float:
    """x * 2**k in two exact steps and at most one rounding; infinite beyond the range."""
    half = k // 2
    return (x * math.ldexp(1.0, half)) * math.ldexp(1.0, k - half)


def exp(x: Pair) -> tuple[Pair, int]:
    """e**x as a pair near 1 and a power of two; |x| below 800."""
    k = math.floor(x[0] * INV_LN2 + 0.5)
    r = add(two_sum(x[0], -(k * LN2_1)), (x[1], 0.0))
    r = add(add(r, (-(k * LN2_2), 0.0)), (-(k * LN2_3), 0.0))
    r = (r[0] * 0.015625, r[1] * 0.015625)
    s = FACTORIAL[9]
    for n in range(8, 0, -1):
        s = add(mul(s, r), FACTORIAL[n])
    e = mul(s, r)
    for _ in range(6):
        e = add((2.0 * e[0], 2.0 * e[1]), mul(e, e))
    return add((1.0, 0.0), e), k


def log(x: float) -> Pair:
    """ln x as a pair; x > 0."""
    m, e = math.frexp(x)
    if m < SQRT_HALF:
        m, e = m * 2.0, e - 1
    s = div((m - 1.0, 0.0), two_sum(m, 1.0))
    square = mul(s, s)
    total = ODD[15]
    for n in range(14, -1, -1):
        total = add(mul(total, square), ODD[n])
    total = mul(total, s)
    total = (2.0 * total[0], 2.0 * total[1])
    if e == 0:
        return total
    rest = add((e * LN2_2, 0.0), (e * LN2_3, 0.0))
    return add((e * LN2_1, 0.0), add(rest, total))
