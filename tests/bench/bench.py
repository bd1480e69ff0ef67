"""How a bench says what it measured: a floor, and everything else as a multiple of it. Nothing is judged here.

Make a `Ratios` with the floor, `add` what was measured, hand it to the fixture `show` (conftest.py), which prints it
after the last test.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any


@dataclass
class Ratios:
    """A title, the floor that everything is held against, and what was measured; all in seconds."""

    title: str
    floor: str
    seconds: float
    rows: list[tuple[str, float]] = field(default_factory=list)

    def add(self, name: str, seconds: float) -> None:
        self.rows.append((name, seconds))

    def lines(self) -> list[str]:
        told = [f"{self.title}:", self._line(self.floor, self.seconds)]
        return told + [self._line(name, seconds) for name, seconds in self.rows]

    def _line(self, name: str, seconds: float) -> str:
        return f"  {name:<58} {seconds * 1000:9.1f} ms  {seconds / self.seconds:7.2f} x"


@dataclass
class Watch:
    """Least wall time and least processor time, in seconds, of the goes so far."""

    wall: float = float("inf")
    processor: float = float("inf")

    def go(self, work: Callable[[], Any]) -> Any:
        wall, processor = time.perf_counter(), time.process_time()
        done = work()
        self.processor = min(self.processor, time.process_time() - processor)
        self.wall = min(self.wall, time.perf_counter() - wall)
        return done
