"""exp and log for fits: numbers in, numbers out; what is too large is infinite, and the answer is then refused.

Twin: static/core/fits/logs.js.
"""

from __future__ import annotations

import math

from fieldkit.formula import elementary


def ln(x: float) -> float:
    """The natural logarithm of a number above zero."""
    value = elementary.log(x)
    return value if isinstance(value, float) else math.inf


def e_to(x: float) -> float:
    """e**x; infinite where that is too large, or `x` is."""
    if x - x != 0.0:
        return math.inf
    value = elementary.exp(x)
    return value if isinstance(value, float) else math.inf


def ratio(a: float, b: float) -> float:
    """a / b, infinite for b = 0: the same in both languages."""
    return a / b if b != 0.0 else math.inf
