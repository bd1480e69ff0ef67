"""Run vectors: a script of moments on a sheet, and what must come of it. tests/vectors/runs/*.json.

A moment is one of

    {"later": [seconds by the wall, by the running timer]}   {"reload": seconds the page was gone}   {"set_clock": seconds}
    {"do": command}                       becomes events; signatures that are due follow
    {"refuse": command, "code": code}     is refused
    {"see": {key of progress: value}}     what progress says now; beside it may stand "using": {"instrument", "range"}
    {"record": [kind, body, by]}          an event that decide would not make
    {"sign": [person, meaning]}

`sheet` names another frozen sheet than tiny. `state` is the whole state at the end, `texts` the events. `python tests/support/run_vectors.py` plays every script
again and writes what comes of it: only for a change that was meant, and every difference is to be read.
"""

from __future__ import annotations

import json
import sys
from pathlib import Path
from typing import Any

FOLDER = Path(__file__).resolve().parent.parent / "vectors" / "runs"


def driver(vector: dict[str, Any]) -> Any:
    import run_driver

    return run_driver.Driver(run_driver.frozen(vector.get("sheet", "tiny")))


def play(vector: dict[str, Any]) -> tuple[Any, list[dict[str, Any]], list[Any]]:
    """The driver at the end; the steps for the twin; and what was said at each step that says something."""
    d, steps, said = driver(vector), [], []
    for moment in vector["script"]:
        what, value = next(iter(moment.items()))
        if what == "later":
            d.later(*value)
        elif what == "reload":
            d.reload(value)
        elif what == "set_clock":
            d.wall_ms += value * 1000
        elif what in ("do", "refuse"):
            steps.append({"command": value, "now": d.now})
            said.append(d.ask(**value))
            before = len(d.texts)
            if what == "do":
                d.do(**value)
            steps += [{"text": text} for text in d.texts[before:]]
        elif what == "see":
            using = moment.get("using")
            steps.append({"now": d.now, "using": using})
            said.append(d.seen(using))
        else:
            d.record(*value) if what == "record" else d.sign(*value)
            steps.append({"text": d.texts[-1]})
    return d, steps, said


def written(vector: dict[str, Any]) -> dict[str, Any]:
    """The vector with what its script gives now."""
    d, _, said = play(vector)
    left = iter(said)
    script = []
    for moment in vector["script"]:
        if "do" in moment or "refuse" in moment or "see" in moment:
            answer = next(left)
            if "refuse" in moment:
                moment = {**moment, "code": answer["refused"]["code"]}
            if "see" in moment:
                moment = {**moment, "see": {key: answer[key] for key in moment["see"]}}
        script.append(moment)
    return {**vector, "script": script, "texts": d.texts, "state": d.state}


def main() -> None:
    for path in sorted(FOLDER.glob("*.json")):
        made = written(json.loads(path.read_text()))
        path.write_text(json.dumps(made, ensure_ascii=False, indent=1) + "\n")


if __name__ == "__main__":
    sys.path.insert(0, str(Path(__file__).resolve().parent.parent.parent))
    main()
