"""Strict YAML: texts stay texts, and everything that is refused is refused with its place."""

from __future__ import annotations

import random

import pytest

from fieldkit import yaml_source
from fieldkit.yaml_source import Mapping, Scalar, Sequence, read


def _codes(text: str | bytes) -> list[tuple[str, int, int]]:
    data = text if isinstance(text, bytes) else text.encode()
    return [(p.code, p.place.line, p.place.column) for p in read(data, "x.yaml")[1]]


@pytest.mark.parametrize(
    "word", ["no", "on", "12:30", "1e3", "010", "0x1F", "~", "null", "2026-01-01", "1_000", ".inf"]
)
def test_a_scalar_is_the_text_that_was_written(word: str) -> None:
    node, problems = read(f"a: {word}\n".encode(), "x.yaml")
    assert problems == []
    assert isinstance(node, Mapping)
    assert node.get("a") == Scalar(word, "plain", node.entries[0].value.place)


def test_nodes_know_line_and_column() -> None:
    node, problems = read(b"steps:\n  - read: 'Heater'\n    limits: below 5 A\n", "x.yaml")
    assert problems == [] and isinstance(node, Mapping)
    steps = node.get("steps")
    assert isinstance(steps, Sequence) and isinstance(steps.items[0], Mapping)
    entry = steps.items[0].entry("limits")
    assert entry is not None and (entry.key_place.line, entry.key_place.column) == (3, 5)
    assert isinstance(entry.value, Scalar)
    assert (entry.value.at(6).line, entry.value.at(6).column) == (3, 19)
    quoted = steps.items[0].get("read")
    assert isinstance(quoted, Scalar) and quoted.style == "single" and quoted.at(0).column == 12


def test_order_of_keys_is_kept() -> None:
    node, _ = read(b"z: 1\na: 2\nm: 3\n", "x.yaml")
    assert isinstance(node, Mapping) and node.keys() == ("z", "a", "m")


REFUSED = [
    ("limit: 5\nlimit: 50\n", [("duplicate-key", 2, 1)]),
    ("a: {b: 1, b: 2}\n", [("duplicate-key", 1, 11)]),
    ("a: &x 1\nb: *x\n", [("anchor", 1, 4), ("alias", 2, 4)]),
    ("a: !!python/object:os.system x\n", [("tag", 1, 4)]),
    ("a: !local x\n", [("tag", 1, 4)]),
    ("%YAML 1.1\n---\na: 1\n", [("directive", 1, 1)]),
    ("a: 1\n---\nb: 2\n", [("several-documents", 2, 1)]),
    ("a: 1\n\tb: 2\n", [("tab", 2, 1), ("yaml-syntax", 2, 3)]),
    ("a: 1 # x\ty\n", [("tab", 1, 9)]),
    ("a: x\x07y\n", [("control-character", 1, 5)]),
    ("a: x\u202ey\n", [("control-character", 1, 5)]),
    ('a: "x\\0y"\n', [("control-character", 1, 4)]),
    ('a: "\\uD800"\n', [("control-character", 1, 4)]),
    ("\ufeffa: 1\n", [("byte-order-mark", 1, 1)]),
    ("a: 1\r\nb: 2\r\n", [("line-ends", 1, 1)]),
    ("? [a, b]\n: 1\n", [("key-not-plain", 1, 3)]),
    ("<<: {a: 1}\n", [("key-not-plain", 1, 1)]),
    ("", [("empty-file", 1, 1)]),
    ("# only a comment\n", [("empty-file", 1, 1)]),
    ("a: b: c\n", [("yaml-syntax", 1, 5)]),
    ("a: [1, 2\nb: 3\n", [("yaml-syntax", 2, 2)]),
    ("a: 'x\n", [("yaml-syntax", 2, 1)]),
    ("a: %x\n", [("yaml-syntax", 1, 4)]),
    ("a: *nowhere\n", [("alias", 1, 4)]),
    (b"a: \xff\n", [("not-utf-8", 1, 4)]),
    (b"a: 1\nb: \xc3\x28\n", [("not-utf-8", 2, 4)]),
]


@pytest.mark.parametrize(("text", "codes"), REFUSED)
def test_refused_with_line_and_column(text: str | bytes, codes: list[tuple[str, int, int]]) -> None:
    assert _codes(text) == codes


def test_everything_wrong_is_told_at_once() -> None:
    text = "a: &x 1\na: 2\nb: !t 3\nc: x\x01\nd: *x\n"
    assert [c for c, _, _ in _codes(text)] == ["anchor", "duplicate-key", "tag", "control-character", "alias"]


def test_deep_and_big_files_are_refused_without_an_exception() -> None:
    assert [c for c, _, _ in _codes("[" * 5000)] == ["too-deep"]
    assert [c for c, _, _ in _codes("a: " + "[" * 31 + "]" * 31)] == ["too-deep"]
    assert _codes("a: " + "[" * 29 + "]" * 29) == []
    assert [c for c, _, _ in _codes(b"a: " + b"x" * yaml_source.MAX_BYTES)] == ["file-too-big"]
    assert [c for c, _, _ in _codes("[" + "1," * 60_000 + "]")] == ["too-many-pieces"]


def test_an_alias_bomb_is_refused_line_by_line() -> None:
    text = "a: &a [x, x]\nb: &b [*a, *a]\nc: [*b, *b]\n"
    assert [c for c, _, _ in _codes(text)] == ["anchor", "anchor", "alias", "alias", "alias", "alias"]


def test_no_bytes_at_all_make_it_raise() -> None:
    """Random bytes, and a good file with random pieces of grammar thrown in, from a fixed seed."""
    rnd = random.Random(20260803)
    good = b"steps:\n  - read: Heater volts\n    id: v\n    limits: {low: 6.1 V, high: '6.5 V'}\n  - [a, b]\n"
    pieces = [b"&a ", b"*a", b"!!x ", b"{", b"}", b"[", b"]", b": ", b"- ", b"? ", b"|", b">", b"%", b"---\n", b"...\n"]
    pieces += [
        b"\t",
        b"\r\n",
        b"\x00",
        b"\xff",
        b"\xef\xbb\xbf",
        b'"',
        b"'",
        b"\\",
        b"#",
        b"@",
        b"`",
        b"<<: ",
        b"\xe2\x80\xa8",
    ]
    refused = 0
    for _ in range(1500):
        data = bytearray(good)
        for _ in range(rnd.randint(1, 5)):
            at = rnd.randint(0, len(data))
            data[at : at + rnd.randint(0, 3)] = rnd.choice(pieces) if rnd.random() < 0.8 else rnd.randbytes(3)
        node, problems = read(bytes(data), "x.yaml")
        assert node is not None or problems
        refused += bool(problems)
    assert refused > 700


def test_every_problem_says_what_to_do() -> None:
    for text, _ in REFUSED:
        for problem in read(text if isinstance(text, bytes) else text.encode(), "x.yaml")[1]:
            assert problem.message and problem.remedy
