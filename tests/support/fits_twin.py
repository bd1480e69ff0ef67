"""Both twins of fieldkit.fits, asked the same: answers come with every number as the bits of its double."""

from __future__ import annotations

import json
import struct
import subprocess
from pathlib import Path
from typing import Any

from fieldkit import fits, values

SCRIPT = Path(__file__).resolve().parents[1] / "js" / "core" / "fits.mjs"


def bits(x: Any) -> Any:
    """A copy with all numbers, counts too, as {"bits": ...}."""
    if isinstance(x, bool) or x is None or isinstance(x, str):
        return x
    if isinstance(x, int | float):
        return {"bits": struct.pack(">d", float(x)).hex()}
    if isinstance(x, dict):
        return {key: bits(v) for key, v in x.items()}
    return [bits(v) for v in x]


def wire(x: Any) -> Any:
    """A copy that JSON can carry: numbers that it does not know as {"bits": ...}."""
    if isinstance(x, float) and x - x != 0.0:
        return bits(x)
    if isinstance(x, dict):
        return {key: wire(v) for key, v in x.items()}
    return [wire(v) for v in x] if isinstance(x, list) else x


def marked(axis: str, value: float, u: float | None) -> str:
    """A `show` of the caller's own."""
    return f"<{axis} {values.round12(value)}{'' if u is None else ' ' + values.round12(u)}>"


def python(asked: list[dict[str, Any]]) -> list[Any]:
    """The answers, plain."""
    found = []
    for one in asked:
        call = fits.FITS[one["fit"]]
        found.append(call(*one["args"], show=marked) if _shown(one) else call(*one["args"]))
    return found


def _shown(one: dict[str, Any]) -> bool:
    return bool(one.get("show"))


def javascript(asked: list[dict[str, Any]], names: bool = False) -> list[Any]:
    """The answers in bits; a request with `show` gives all arguments, for JavaScript has none by name."""
    text = json.dumps({"names": names, "asked": wire(asked)})
    done = subprocess.run(["node", str(SCRIPT)], input=text, capture_output=True, text=True, timeout=120)
    assert done.returncode == 0, done.stderr[-2000:]
    found: list[Any] = json.loads(done.stdout)
    return found
