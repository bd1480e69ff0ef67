"""A seeded random walk: plausible work, wrong work and nonsense, for any compiled sheet. Also the start of a real one."""

from __future__ import annotations

import json
import random
from pathlib import Path
from typing import Any

import run_driver as drive

from fieldkit.formula import library
from fieldkit.procedure import compile as compiling
from fieldkit.run import answers, clock, decide, events, progress
from fieldkit.sheet.model import Sheet

ROOT = Path(__file__).parent.parent.parent
KINDS = list(events.EVENTS)
JUNK = ("", "6,3.0", "abc", "1e3", "63.0", "-0", "+1", "0", "999999999999999", "−5", " 5", ".5", "5.", "6.30")


def real(name: str) -> Sheet:
    """A procedure of the project, compiled."""
    found, problems = compiling.compile_file(
        ROOT / "procedures" / f"{name}.yaml", library.load(ROOT / "procedures" / "formulas")
    )
    assert found is not None, problems
    return found


def real_start(sheet: Sheet, rng: random.Random | None = None) -> dict[str, Any]:
    """A start command for cabinet B2 of the demonstration's station."""
    station = json.loads((ROOT / "fieldkit" / "demo" / "station.json").read_text())
    cabinet, tube = station["cabinets"]["B2"], station["tubes"]["T-0417"]
    site = station["sites"][cabinet["site"]]
    known = {**site.get("givens", {}), **cabinet["givens"], **tube["givens"]}
    base = drive.tiny_start()
    return base | {
        "procedure": sheet.procedure,
        "edition": sheet.edition,
        "cabinet": "B2",
        "tube": "T-0417",
        "givens": {given.name: known[given.name] for given in sheet.givens},
        "meters": cabinet["meters"],
        "instruments": list(station["instruments"].values()),
        "places": cabinet["places"],
        "earlier": [
            {"procedure": a.procedure, "run": "r0", "ended": "2026-07-31T08:00:00.000+00:00", "outcome": "done"}
            for a in sheet.after
        ],
        "locks": [board_lock(s, f"L-{n}") for n, s in enumerate(isolated(sheet))],
    }


def isolated(sheet: Sheet) -> list[str]:
    return [name for name, declared in sheet.start.items() if declared.state == "locked"]


def board_lock(source: str, number: str) -> dict[str, Any]:
    point = {"beam_supply": "Q1", "rf_drive": "S4"}.get(source, "Q9")
    lock = {"point": point, "sources": [source], "lock": number, "tag": "T", "holder": "vell"}
    return lock | {"holder_name": "J. Vell", "run": "r0", "since": "2026-07-30T10:00:00.000+00:00"}


def declared(sheet: Sheet) -> dict[str, Any]:
    states = {s.name: "off" for s in sheet.sources if s.isolable or s.name in sheet.start}
    states |= {name: found.state for name, found in sheet.start.items()}
    return {"do": "states-declared", "states": states, "ages": dict.fromkeys(states, "36000"), "board_seen": True}


class Walker:
    """Makes the next command from what is open, with a seeded hand."""

    def __init__(self, driver: drive.Driver, seed: int, care: float = 0.75) -> None:
        self.d, self.rng, self.care = driver, random.Random(seed), care

    def command(self) -> dict[str, Any]:
        """Mostly what a careful person would do next; otherwise anything."""
        state, rng = self.d.state, self.rng
        if rng.random() > self.care:
            return self.anything()
        if state["phase"] == "confirm":
            return self.confirm()
        if state["phase"] in ("stopped", "ended", "voided"):
            return self.after()
        progress = self.d.progress
        if state["pending"] or not progress["open"]:
            return self.go_on(progress)
        return self.answer(progress)

    def answer(self, progress: dict[str, Any]) -> dict[str, Any]:
        step, rng, state = progress["step"], self.rng, self.d.state
        control = step["control"]
        kind = next(k for k, c in answers.CONTROLS.items() if c == control["control"])
        more: dict[str, Any] = {}
        if kind == "acknowledged":
            more["heard"] = list(state["started"]["present"])
        elif kind == "read":
            more = self.meter(progress)
            more["text"] = self.reading(self.d.seen(more)["limits"], control)
        elif kind == "proved":
            texts = {p["field"]: self.reading(p["limits"], control) for p in progress["points"]}
            points = [{"name": f[7:], "text": t} for f, t in texts.items() if f.startswith("points.")]
            more = {
                "before": texts["before"],
                "after": texts["after"],
                "points": points,
                **self.meter(progress, one=True),
            }
        elif kind == "locked":
            more = {"lock": f"L-{rng.randrange(100, 999)}", "tag": "T"}
        elif kind == "unlocked":
            on = [lock for lock in state["locks"] if lock["point"] == control["point"]]
            more = {"who": on[0]["holder"], "lock": on[0]["lock"]} if on else {}
        elif kind == "chosen":
            more["value"] = rng.choice(control["options"])["value"]
        elif kind == "released":
            more["who"] = "quill"
        elif kind == "pictured":
            more = {"sha256": "ab" * 32, "media": "image/jpeg", "width": 4, "height": 3, "size": 99}
        elif kind == "remarked":
            more["text"] = "Nothing odd."
        elif kind == "people-counted":
            more["names"] = ["J. Vell"]
        return {"do": kind, **more}

    def meter(self, progress: dict[str, Any], one: bool = False) -> dict[str, Any]:
        """Mostly what is proposed; sometimes another instrument or range, now and then one that there is not."""
        rng, more = self.rng, dict[str, Any]()
        if progress["ranges"] and rng.random() < 0.3:
            more["range"] = rng.choice(progress["ranges"])
        if len(progress["instruments"]) > 1 and not one and rng.random() < 0.2:
            more = {"instrument": rng.choice(progress["instruments"])}
        if rng.random() < 0.05 * (1 - self.care):
            more["range"] = rng.choice(("", "20 V", "2 kV", "none"))
        return more

    def reading(self, limits: dict[str, Any] | None, control: dict[str, Any]) -> str:
        """Mostly inside the limits, sometimes at, near or outside them."""
        rng = self.rng
        low, high = (limits or {}).get("low"), (limits or {}).get("high")
        if low is None and high is None and control.get("unit", {}).get("symbol") == "V":
            return "28.5"
        if rng.random() < 0.1 * (1 - self.care):
            return rng.choice(JUNK)
        a = float(low) if low is not None else (float(high) - abs(float(high)) if high is not None else 1.0)
        b = float(high) if high is not None else a + abs(a) + 1.0
        x = rng.choice((a, b)) if rng.random() < 0.1 else rng.uniform(a, b)
        if self.care < 1 and rng.random() < 0.02 + 0.4 * (1 - self.care):
            x += rng.uniform(-1, 1) * (b - a or 1.0)
        text = f"{x:.{rng.choice((1, 2, 2, 3))}f}"
        return text.replace(".", ",") if rng.random() < 0.1 else text

    def go_on(self, progress: dict[str, Any]) -> dict[str, Any]:
        state, rng = self.d.state, self.rng
        left = [r["left"] for r in progress["reasons"] if r["left"]]
        if left and rng.random() < 0.9:
            self.d.later(max(left) + rng.choice((0, 0.001, 1)))
            return self.answer(self.d.progress) if self.d.progress["open"] else self.anything()
        ways = [m for m in progress["moves"] if m["button"] and m["open"]]
        ways = [m for m in ways if m["manner"] != "stop"] or ways
        if not ways:
            if state["node"] == "@end":
                return {"do": "ended"}
            return (
                {"do": "ended", "outcome": "stopped", "reason": "No way on."} if rng.random() < 0.2 else self.anything()
            )
        return self.way(rng.choice(ways))

    def way(self, move: dict[str, Any]) -> dict[str, Any]:
        more = {"reason": "The meter was settling.", "authority": "quill", "under": "rule 12"}
        return {"do": "went-on", "move": move["move"], **(more if move["manner"] in ("again", "deviation") else {})}

    def confirm(self) -> dict[str, Any]:
        sources = self.d.state["sources"]
        states = {name: source["state"] for name, source in sources.items()}
        if self.rng.random() < 0.1:
            states[self.rng.choice(list(states))] = "unknown"
        same = [n for n in states if states[n] == sources[n]["state"]]
        unbroken = [n for n in same if self.rng.random() < 0.9]
        return {"do": "states-confirmed", "states": states, "unbroken": unbroken}

    def after(self) -> dict[str, Any]:
        rng, items = self.rng, self.d.run.ctx.sheet["make_safe"]
        return rng.choice(
            (
                {"do": "safe-begun"},
                {"do": "safe-step-done", "item": rng.choice(items)["id"]},
                {"do": "safe-ended", "remark": ""},
                {"do": "ended", "outcome": "stopped", "reason": "Made safe."},
                {"do": "reopened", "reason": "Look at step 3.", "returned_by": "quill"},
                {"do": "remarked", "text": "All off."},
                self.correction(),
            )
        )

    def correction(self) -> dict[str, Any]:
        rng, log = self.rng, self.d.state["log"]
        rows = [r for r in log if r["kind"] in answers.CORRECTABLE] or log
        row = rng.choice(rows)
        field = "lock" if row["kind"] == "locked" else rng.choice(row["points"])["field"] if row["points"] else "text"
        text = row["text"]
        if row["kind"] == "read" and rng.random() < 0.7:
            text = self.reading(row["limits"], {})
        else:
            text = rng.choice((*JUNK, "L-77", "480", "3", text))
        return {"do": "corrected", "seq": row["seq"], "field": field, "text": text, "reason": "Misread."}

    def anything(self) -> dict[str, Any]:
        """Commands that may or may not fit, some with wrong or missing fields."""
        rng, d = self.rng, self.d
        steps, moves = list(d.run.ctx.steps), list(d.run.ctx.moves)
        people = ["vell", "arkle", "quill", "nobody", ""]
        pick = rng.randrange(20)
        if pick == 0:
            return {"do": rng.choice(KINDS)}
        if pick == 1:
            return {
                "do": rng.choice(KINDS),
                "step": rng.choice(steps),
                "text": rng.choice(JUNK),
                "move": rng.choice(moves),
            }
        if pick == 2:
            return {
                "do": "went-on",
                "move": rng.choice([*moves, "none"]),
                "reason": rng.choice(("", "why")),
                "authority": rng.choice(people),
            }
        if pick == 3:
            return {"do": "paused", "reason": "Meal."}
        if pick == 4:
            return {"do": "trip-recorded", "indicator": "I10", "done": "Waited.", "kind": rng.choice(("trip", "odd"))}
        if pick == 5:
            return {"do": "person-changed", "to": rng.choice(people)}
        if pick in (6, 7):
            return self.correction()
        if pick == 8:
            d.reload(rng.choice((3, 60, 119, 121, 900, -40)))
            return {"do": "resumed", "cause": "reload"}
        if pick == 9:
            d.later(rng.choice((5, 150, 700)), mono=rng.choice((0, 1, 5)))
            return {"do": "resumed", "cause": "sleep"}
        if pick == 10:
            d.wall_ms += rng.choice((3_600_000, -3_600_000, 2400_000))
            return {"do": "clock-changed"}
        if pick == 11:
            return {"do": "released", "who": rng.choice(people)}
        if pick == 12:
            return {"do": "unlocked", "who": rng.choice(people), "second": rng.choice(people), "checks": self.checks()}
        if pick == 13:
            return {
                "do": "people-counted",
                "names": rng.choice(([], ["J. Vell"], ["J. Vell", "P. Arkle"], "x", [1, " "])),
            }
        if pick == 14:
            return {"do": "remarked", "text": rng.choice(("", "Louder than last month."))}
        if pick == 15:
            return (
                {"do": "safe-step-done", "item": rng.choice(d.run.ctx.sheet["make_safe"])["id"], "done": False}
                if rng.random() < 0.1
                else {"do": "safe-begun"}
            )
        if pick == 16:
            return {"do": "storage-found", "lost": rng.choice((1, "1")), "restored": 1}
        if pick == 17:
            d.later(rng.choice((0.5, 30, 61, 600, 900)))
            return {"do": "waited"}
        if pick == 18:
            return {"do": "read", "text": rng.choice(JUNK), "instrument": rng.choice(("HV-2", "none", ""))}
        return {"do": "ended", "outcome": rng.choice(("done", "stopped", "odd")), "reason": ""}

    def checks(self) -> list[dict[str, str]]:
        names = ["not on site", "tried to reach", "told before return"]
        return [{"name": n, "how": self.rng.choice(("gate book", "gate book", ""))} for n in names]

    def nonsense(self) -> tuple[str, dict[str, Any]] | None:
        """A body that parses and makes no sense here: what a foreign or a faulty tablet might send."""
        rng, ctx = self.rng, self.d.run.ctx
        kind = rng.choice(KINDS)
        text = (drive.VECTORS / "events" / f"{kind}.json").read_text()
        body = json.loads(text)["body"]
        if "step" in body:
            body["step"] = rng.choice([*ctx.steps, "elsewhere", "@end"])
        if "move" in body and rng.random() < 0.8:
            body["move"] = rng.choice([*ctx.moves, "nowhere"])
        if kind == "corrected":
            body["seq"] = rng.randrange(0, self.d.state["seq"] + 3)
        return kind, body


def canonical(part: Any) -> str:
    """JSON text that both languages write alike: keys sorted, whole numbers plain, others with six decimals."""
    return json.dumps(_plain(part), sort_keys=True, ensure_ascii=False, separators=(",", ":"))


def _plain(part: Any) -> Any:
    if isinstance(part, dict):
        return {k: _plain(v) for k, v in part.items()}
    if isinstance(part, list | tuple):
        return [_plain(v) for v in part]
    if isinstance(part, float):
        return int(part) if part.is_integer() else clock.seconds(round(part * 1000))
    return part


def brief(state: dict[str, Any]) -> dict[str, Any]:
    """A state without what seldom changes: the start, and all but the last rows of the log."""
    return {**{k: v for k, v in state.items() if k != "started"}, "log": state["log"][-2:]}


def decided(sheet: Sheet, state: dict[str, Any], step: dict[str, Any]) -> Any:
    return decide.decide(sheet, state, step["command"], step["now"])


def shown(sheet: Sheet, state: dict[str, Any], step: dict[str, Any]) -> Any:
    return progress.progress(sheet, state, step["now"], step.get("using"))


def differences(here: Any, there: Any, path: str = "") -> list[str]:
    """Where two JSON values differ, and how."""
    if isinstance(here, dict) and isinstance(there, dict):
        found = []
        for key in sorted(set(here) | set(there)):
            found += differences(here.get(key, "(none)"), there.get(key, "(none)"), f"{path}.{key}")
        return found
    if isinstance(here, list | tuple) and isinstance(there, list) and len(here) == len(there):
        return [d for i, (a, b) in enumerate(zip(here, there, strict=True)) for d in differences(a, b, f"{path}.{i}")]
    return [] if here == there else [f"{path}: here {here!r:.300}, tablet {there!r:.300}"]
