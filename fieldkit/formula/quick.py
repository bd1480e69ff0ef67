"""exp and log in a tenth of the time of pairs.py, and nothing where the last bit is in doubt.

Each works out the exact value as a double and a rest, with a bound on what the rest may be wrong by (`doubt`). Where
the double is the nearest one anywhere within that bound it is the answer, the same that pairs.py gives; one time in
some hundred it is not certain, and the caller goes the long way. (The test is A. Ziv's, 1991.)

exp: 2**(k/1024) out of a table, times Taylor's series for the rest of the exponent, below 2**-11.5. log: of c, the
nearest 1024th, out of a table, and the series of log(1 + r), |r| below 2**-10.4. The tables are made by pairs.py. Every
bound is reckoned where it stands, with half a unit in the last place for each operation.

The twin is static/core/quick.js, line by line. Not here: whole ranges and Faults (elementary.py).
"""

from __future__ import annotations

import math

from fieldkit.formula import pairs
from fieldkit.formula.pairs import INV_LN2, LN2_1, LN2_2, LN2_3, Pair

#: the greatest exponent for which exp is asked here: all results are normal doubles
MOST = 700.0

#: adding it and taking it off again rounds to a whole number; this one to a multiple of 2**-41
WHOLE, FINE = 6755399441055744.0, 3072.0
#: the exponent in units of 1/1024 of a doubling; each such unit as two parts, the first of 32 bits
PER_STEP, STEP_1, STEP_2 = INV_LN2 * 1024.0, LN2_1 / 1024.0, (LN2_2 + LN2_3) / 1024.0
THIRD, SIXTH, TWENTY_FOURTH, HUNDRED_TWENTIETH = 1.0 / 3.0, 1.0 / 6.0, 1.0 / 24.0, 1.0 / 120.0
#: ln 2 as a multiple of 2**-41 and the rest
LN2 = (LN2_1 + LN2_2 + FINE) - FINE
LN2_REST = ((LN2_1 - LN2) + LN2_2) + LN2_3

#: what exp may be wrong by, of a result from 1 to 2: 2**-62 as reckoned below, and as much again
EXP_DOUBT = 4.336808689942018e-19
#: what log may be wrong by: 2**-71.9 as reckoned below, and nearly as much again
LOG_DOUBT = 4.235164736271502e-22
#: what a power may be wrong by beyond EXP_DOUBT, of a result from 1 to 2, for each unit of its exponent
POWER_DOUBT = 2.0 * LOG_DOUBT


def _powers() -> tuple[Pair, ...]:
    """2 ** (k / 1024) for k from 0 to 1023."""
    root = pairs.exp((STEP_1, STEP_2))[0]
    found: list[Pair] = [(1.0, 0.0)]
    while len(found) < 1024:
        found.append(pairs.mul(found[-1], root))
    return tuple(found)


def _logs() -> dict[int, tuple[float, float, float, float]]:
    """For c = k / 1024 from below the root of 1/2 to above the root of 2: c, 1 / c, log(c) in parts as LN2 is."""
    found = {}
    for k in range(724, 1450):
        c = k / 1024.0
        hi, lo = pairs.log(c)
        fine = (hi + FINE) - FINE
        found[k] = (c, 1.0 / c, fine, (hi - fine) + lo)
    return found


STEPS = _powers()
LOGS = _logs()
#: 2 ** k for k from -1022 to 1023; a negative place counts from the end
DOUBLINGS = tuple(math.ldexp(1.0, k) for k in (*range(1024), *range(-1022, 0)))


def exp(hi: float, lo: float = 0.0, doubt: float = EXP_DOUBT) -> float:
    """e ** (hi + lo), or NaN; |hi| up to MOST, |lo| at most half a unit of hi's last place.

    `doubt` is more than EXP_DOUBT where hi + lo is itself in doubt.
    """
    n = (hi * PER_STEP + WHOLE) - WHOLE
    k = int(n)
    h, rest = STEPS[k & 1023]
    # n STEP_1 and the first difference are exact; r, below 2**-11.5, is wrong by 2**-65
    r = (hi - n * STEP_1) - (n * STEP_2 - lo)
    # the series leaves off at r**6 / 720, below 2**-78; wrong by 2**-65 + 2**-65, times h up to 2, and two roundings
    # below 2**-10.5, each 2**-64: 2**-62 in all
    rest += h * (r + r * r * (0.5 + r * (SIXTH + r * (TWENTY_FOURTH + r * HUNDRED_TWENTIETH))))
    s = h + rest
    rest -= s - h
    if s + (rest - doubt) == s + (rest + doubt):
        return s * DOUBLINGS[k >> 10]
    return math.nan


def log(x: float) -> Pair:
    """log(x) as a double and a rest, wrong by LOG_DOUBT at most; x > 0."""
    m, e = math.frexp(x)
    if m < pairs.SQRT_HALF:
        m, e = m * 2.0, e - 1
    c, inverse, log_c, rest = LOGS[int(m * 1024.0 + 0.5)]
    # m - c is exact; r is split so that c times its first part, of 31 bits, is exact too
    z = m - c
    r = (z * inverse + FINE) - FINE
    second = (z - r * c) * inverse
    # all multiples of 2**-41 below 2**10: exact
    hi = (e * LN2 + log_c) + r
    r += second
    # the series leaves off at r**7 / 7, below 2**-75; r * r / 2, below 2**-21.8, is wrong by some 2**-73
    rest += e * LN2_REST + (second - r * r * (0.5 - r * (THIRD - r * (0.25 - r * (0.2 - r * SIXTH)))))
    s = hi + rest
    return s, rest - (s - hi)
