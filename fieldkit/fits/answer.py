"""The dict that every fit gives: all its keys always, numbers finite, and the sentence.

Twin: static/core/fits/answer.js.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from fieldkit.fits.columns import Refused

Answer = dict[str, Any]


def answer(fit: str, numbers: Answer, refused: Refused | None, says: Callable[[], str]) -> Answer:
    """`numbers` with fit, refused and says. Any number that is not finite becomes null and refuses the fit."""
    held = [True]
    clean = {key: _finite(value, held) for key, value in numbers.items()}
    if refused is None and not held[0]:
        refused = Refused("overflow", "A number in this fit is too large to compute with.")
    return {
        "fit": fit,
        **clean,
        "refused": None if refused is None else refused.to_json(),
        "says": says() if refused is None else refused.says,
    }


def _finite(value: Any, held: list[bool]) -> Any:
    if isinstance(value, float):
        if value - value == 0.0:
            return value + 0.0
        held[0] = False
        return None
    if isinstance(value, list):
        return [_finite(v, held) for v in value]
    if isinstance(value, dict):
        return {key: _finite(v, held) for key, v in value.items()}
    return value
