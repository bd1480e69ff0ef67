"""A range of an instrument in words: its name, its span, its accuracy; and until when the calibration holds.

Of the record and of the registers' page alike. `found` is a range as the register has it, `unit` its unit as shown.
"""

from __future__ import annotations

from typing import Any

from fieldkit.record import words

Plain = dict[str, Any]


def name(found: Plain, unit: str) -> str:
    """The range's name with its unit as people read it; "" where it has none."""
    text = str(found["name"])
    symbol = str(found["unit"])
    return text.removesuffix(symbol) + unit if symbol and text.endswith(f" {symbol}") else text


def span(found: Plain, unit: str) -> str:
    """From where to where it reads: "0 to 20 V"; "" where neither end is known."""
    low, high = found["low"], found["high"]
    return words.minus(f"{low or ''} to {high or ''} {unit}".strip()) if low or high else ""


def accuracy(found: Plain, unit: str) -> str:
    """±(percent of reading + percent of range + digits), what is not nothing of it; "" where nothing is stated."""
    parts = (
        f"{found['percent']} % of reading" if _some(found["percent"]) else "",
        f"{found['percent_of_range']} % of range" if _some(found["percent_of_range"]) else "",
        f"{found['digits']} × {found['resolution']} {unit}".strip() if _some(found["digits"]) else "",
    )
    stated = [part for part in parts if part]
    return f"±({' + '.join(stated)})" if stated else ""


def holds(instrument: Plain) -> str:
    """Where and how long the accuracy holds: "18 to 28 °C, calibrated 30 November 2025 for 12 months"."""
    warm = instrument["temperature"]
    said = [words.minus(f"{warm['low']} to {warm['high']} °C")] if warm else []
    if instrument["calibrated_on"]:
        months = instrument["interval_months"]
        since = f"calibrated {words.day(instrument['calibrated_on'])}"
        said.append(f"{since} for {words.count(months, 'month')}" if months else since)
    return ", ".join(said)


def _some(number: str | None) -> bool:
    return (number or "0").strip("0.") != ""
