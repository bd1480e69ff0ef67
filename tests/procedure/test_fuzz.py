"""Whatever bytes a file has, the compiler answers with problems or a sheet, in time, and never with an exception."""

from __future__ import annotations

import random
import re
import time
from pathlib import Path

import pytest

from fieldkit.files import folder
from fieldkit.formula import library
from fieldkit.formula.library import Library
from fieldkit.procedure.compile import compile_bytes
from fieldkit.sheet import model

STEPS = Path(__file__).resolve().parents[1] / "steps"
BIG = [folder("procedures") / f"{name}.yaml" for name in ("warm-up", "hv-bring-up")]
JUNK = [
    "",
    " ",
    "-",
    ":",
    "{",
    "}",
    "[",
    "]",
    "#",
    "'",
    '"',
    "&a",
    "*a",
    "!t",
    "\t",
    "\n",
    "\x00",
    "\xff",
    "|",
    ">",
    "%",
    "é",
    "1e999",
]


@pytest.fixture(scope="module")
def formulas() -> Library:
    return library.load(folder("procedures") / "formulas")


def answers(data: bytes, formulas: Library) -> None:
    """Compiles, and holds what the answer promises: a sheet that reads back, or a problem with a place and a code."""
    sheet, problems = compile_bytes(data, "fuzz.yaml", formulas)
    stops = [p for p in problems if p.weight == "problem"]
    assert (sheet is None) == bool(stops)
    for p in problems:
        assert p.place.line >= 1 and p.place.column >= 1 and p.place.width >= 1
        assert re.fullmatch(r"[a-z0-9]+(-[a-z0-9]+)*", p.code)
    if sheet is not None:
        assert model.from_bytes(model.to_bytes(sheet)) == sheet
        ids = {step.id for step in sheet.steps}
        assert all(move.origin in ids and move.to in ids | {"@end", "@safe"} for move in sheet.moves)


def mutated_bytes(rng: random.Random, data: bytes) -> bytes:
    """A few random changes to the bytes: changed, cut, doubled, or junk put in."""
    out = bytearray(data)
    for _ in range(rng.randint(1, 4)):
        at = rng.randrange(len(out))
        match rng.randrange(4):
            case 0:
                out[at] = rng.randrange(256)
            case 1:
                del out[at : at + rng.randint(1, 40)]
            case 2:
                out[at:at] = out[at : at + rng.randint(1, 80)]
            case _:
                out[at:at] = rng.choice(JUNK).encode("utf-8", "surrogateescape")
        if not out:
            out += b"x"
    return bytes(out)


def mutated_words(rng: random.Random, data: bytes) -> bytes:
    """A file that is still nearly YAML: words, values and lines exchanged, dropped or moved."""
    lines = data.decode().split("\n")
    words = re.findall(r"[A-Za-z0-9_.]+", data.decode())
    for _ in range(rng.randint(1, 3)):
        at = rng.randrange(len(lines))
        match rng.randrange(5):
            case 0:
                lines[at] = re.sub(r"[A-Za-z0-9_.]+$", rng.choice(words), lines[at])
            case 1:
                lines[at] = re.sub(r"[a-z_]+(?=:)", rng.choice(words), lines[at], count=1)
            case 2:
                del lines[at]
                lines = lines or ["x"]
            case 3:
                lines.insert(at, rng.choice(lines))
            case _:
                key, colon, _ = lines[at].partition(":")
                lines[at] = f"{key}{colon} {rng.choice(['{}', '[]', '[[a]]', '{a: b}', '- x', rng.choice(words)])}"
    return "\n".join(lines).encode()


@pytest.mark.parametrize("mutate", [mutated_bytes, mutated_words])
def test_no_mutation_of_a_small_file_gives_a_traceback(mutate, formulas: Library) -> None:
    rng = random.Random(20260731)
    files = [path.read_bytes() for path in sorted(STEPS.glob("*.yaml"))]
    for _ in range(1200):
        answers(mutate(rng, rng.choice(files)), formulas)


@pytest.mark.parametrize("mutate", [mutated_bytes, mutated_words])
def test_no_mutation_of_a_shipped_procedure_gives_a_traceback(mutate, formulas: Library) -> None:
    rng = random.Random(731)
    for path in BIG:
        data = path.read_bytes()
        for _ in range(40):
            answers(mutate(rng, data), formulas)


def hostile() -> dict[str, bytes]:
    """Files made to hurt: each must be answered quickly all the same."""
    small = (STEPS / "act.yaml").read_text()
    deep = "steps:\n" + "".join(f"{'  ' * n}- when: heater on\n{'  ' * n}  steps:\n" for n in range(14))
    chain = "(" * 900 + "1 A" + ")" * 900
    return {
        "aliases": b"a: &a [x, x]\nb: &b [*a, *a]\nc: [*b, *b]\n",
        "nesting": b"[" * 100_000,
        "nesting of blocks": deep.encode(),
        "big": b"a: " + b"x" * 5_000_000,
        "many keys": b"".join(b"k%d: v\n" % n for n in range(15_000)),
        "long line": small.replace("title: ", "title: " + "x" * 150_000).encode(),
        "one long formula": small.replace("held: yes", f"not_before: {chain} after heater_on").encode(),
        "many bad steps": ("steps:\n" + "- x\n" * 20_000).encode(),
        "many near names": (small + "".join(f"k{n}: {{}}\n" for n in range(3_000))).encode(),
        "not text": bytes(range(256)) * 100,
        "empty": b"",
        "only a number": b"1",
    }


def spent(data: bytes, formulas: Library) -> float:
    """Processor seconds that compiling takes."""
    begun = time.process_time()
    compile_bytes(data, "timed.yaml", formulas)
    return time.process_time() - begun


@pytest.fixture(scope="module")
def real(formulas: Library) -> float:
    """What the largest shipped procedure takes here: machines differ, and a busy one is slow for both."""
    data = max((path.read_bytes() for path in BIG), key=len)
    return min(spent(data, formulas) for _ in range(5))


@pytest.mark.parametrize("name", hostile())
def test_a_hostile_file_takes_no_longer_than_a_few_real_ones(name: str, formulas: Library, real: float) -> None:
    """Six times a real one was the most when this was written; what grows with the square would be hundreds."""
    data = hostile()[name]
    assert any(spent(data, formulas) < 20 * real for _ in range(3))
    sheet, problems = compile_bytes(data, "hostile.yaml", formulas)
    assert sheet is None
    assert any(p.weight == "problem" for p in problems)
