"""The sums of the kit: the formulas that the station has, as bytes for the tablet's page of sums.

Their form is fieldkit.formula.sums'. Read from the files once and again when one of them changes, because reading tries
every worked example. Not here: putting them into the kit (kit.py).
"""

from __future__ import annotations

import json
from functools import lru_cache
from pathlib import Path

from fieldkit import files

Stamp = tuple[tuple[str, int, int], ...]


def data() -> bytes | None:
    """The sums as JSON; None where a formula file has a problem, which `fieldkit check` names."""
    folder = files.folder("procedures") / "formulas"
    return _made(folder, _stamp(folder))


def _stamp(folder: Path) -> Stamp:
    found = ((path, path.stat()) for path in sorted(folder.glob("*.yaml")))
    return tuple((path.name, held.st_mtime_ns, held.st_size) for path, held in found)


@lru_cache(maxsize=1)
def _made(folder: Path, _: Stamp) -> bytes | None:
    # the library brings a parser along, which a server that only receives runs never needs
    from fieldkit.formula import library, sums

    held = library.load(folder)
    if any(p.weight == "problem" for p in held.problems):
        return None
    return json.dumps(sums.sums(held), ensure_ascii=False, separators=(",", ":")).encode()
