"""What the tests of many folders share: the JavaScript twins, asked through one node process.

A request is (name, args). Doubles travel as their bits, so that equal means equal in every bit, and the answers of both
languages are compared in the wire form of tests/js/twins.mjs.
"""

from __future__ import annotations

import json
import os
import shutil
import struct
import subprocess
from collections.abc import Callable, Iterable
from pathlib import Path
from typing import Any

import pytest

from fieldkit import values
from fieldkit.errors import Refusal
from fieldkit.formula import elementary, slopes, spread
from fieldkit.formula.evaluate import evaluate
from fieldkit.formula.functions import FUNCTIONS

TESTS = Path(__file__).resolve().parent

# what a command prints is broken into lines by the width of the terminal; here it has one width, whoever runs it
os.environ["COLUMNS"] = "100"


def encode(x: Any) -> Any:
    """A Python value in the wire form."""
    if isinstance(x, float):
        return {"bits": struct.pack(">d", x).hex()}
    if isinstance(x, values.Fault):
        return {"fault": x.code, "says": x.says}
    if isinstance(x, Refusal):
        return {"refused": x.code, "sentence": x.sentence}
    if isinstance(x, values.Dec):
        return {"digits": str(x.digits), "scale": x.scale}
    if isinstance(x, dict):
        return {k: encode(v) for k, v in x.items()}
    if isinstance(x, list | tuple):
        return [encode(v) for v in x]
    return x


def decode(x: Any) -> Any:
    """A value of a vector file: {"double": "0.1"} is a double, {"digits": ..} a Dec, {"factor": ..} a unit."""
    if isinstance(x, list):
        return [decode(v) for v in x]
    if not isinstance(x, dict):
        return x
    if set(x) == {"double"}:
        return float(x["double"])
    if set(x) == {"digits", "scale"}:
        return values.Dec(int(x["digits"]), x["scale"])
    if "fault" in x:
        return values.Fault(x["fault"], x.get("says", ""))
    return {k: decode(v) for k, v in x.items()}


class _Unit:
    def __init__(self, factor: str, offset: str) -> None:
        self.factor, self.offset = factor, offset


def _python(do: str, args: list[Any]) -> Any:
    given = [_Unit(**a) if isinstance(a, dict) and set(a) == {"factor", "offset"} else a for a in args]
    if do == "evaluate":
        return evaluate(*given)
    if do == "gradient":
        found = slopes.prepare(given[0], given[3]).gradient(given[1], given[2])
        return {"value": found.value, "of": found.of if isinstance(found.of, values.Fault) else list(found.of.items())}
    if do == "spread":
        parts = spread.contributions(dict(given[0]), {name: dict(own) for name, own in given[1]})
        return {"contributions": list(parts.items()), "u": spread.standard(parts)}
    if do == "functions":
        return [[n, str(f.least), "null" if f.most is None else str(f.most), f.on_series] for n, f in FUNCTIONS.items()]
    if do == "faults":
        return list(values.FAULTS)
    return getattr(elementary if hasattr(elementary, do) and do in ELEMENTARY else values, do)(*given)


ELEMENTARY = ("exp", "log", "pow", "sin", "cos", "atan", "erf")


def plain(x: Any) -> Any:
    """A value in wire form as vectors write it: codes without sentences, counts and doubles alike by their bits."""
    if isinstance(x, int) and not isinstance(x, bool):
        x = encode(float(x))
    if isinstance(x, dict) and set(x) == {"double"}:
        x = encode(float(x["double"]))
    if isinstance(x, dict) and ("refused" in x or "fault" in x):
        return {k: v for k, v in x.items() if k in ("refused", "fault")}
    return x


class Twins:
    """Asks both languages the same questions. Answers come in the wire form; {"threw": True} where it raised."""

    encode = staticmethod(encode)
    decode = staticmethod(decode)

    def wrong(self, cases: list[dict[str, Any]]) -> list[Any]:
        """The cases that do not answer as expected, in either language."""
        requests = [(c["do"], decode(c["args"])) for c in cases]
        found = []
        for language in (self.python, self.javascript):
            for case, answer in zip(cases, language(requests), strict=True):
                got = answer if "threw" in answer else plain(answer["value"])
                if got != plain(case["expect"]):
                    found.append((language.__name__, case["name"], got, case["expect"]))
        return found

    def python(self, requests: Iterable[tuple[str, list[Any]]]) -> list[Any]:
        answers = []
        for do, args in requests:
            try:
                answers.append({"value": encode(_python(do, args))})
            except (ValueError, OverflowError):
                answers.append({"threw": True})
        return answers

    def javascript(self, requests: Iterable[tuple[str, list[Any]]]) -> list[Any]:
        lines = "".join(json.dumps({"do": do, "args": encode(args)}) + "\n" for do, args in requests)
        node = shutil.which("node")
        assert node, "these tests need node"
        done = subprocess.run(
            [node, str(TESTS / "js" / "twins.mjs")],
            input=lines,
            capture_output=True,
            text=True,
            check=True,
            timeout=120,
        )
        answers = [json.loads(line) for line in done.stdout.splitlines()]
        return [{"threw": True} if "threw" in a else a for a in answers]


@pytest.fixture(scope="session")
def twins() -> Twins:
    if shutil.which("node") is None:
        pytest.skip("node is not installed, so the JavaScript twins cannot be asked")
    return Twins()


@pytest.fixture(scope="session")
def vectors() -> Callable[[str], list[dict[str, Any]]]:
    """All cases of a folder of tests/vectors, each with exactly one expectation: {name, do, args, expect}.

    A file of formulas gives the names, series and formulas that its cases share once, at its top.
    """

    def read(folder: str) -> list[dict[str, Any]]:
        found: list[dict[str, Any]] = []
        for path in sorted((TESTS / "vectors" / folder).glob("*.json")):
            data = json.loads(path.read_text(encoding="utf-8"))
            if isinstance(data, dict):
                shared = [data["names"], data["series"], data["formulas"]]
                data = [c | {"do": "evaluate", "args": [c["tree"], *shared]} for c in data["cases"]]
            found += data
        return found

    return read
