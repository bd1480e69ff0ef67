"""What the names in a sheet's formulas mean while a run goes on, and which gates that opens.

    context(sheet)              the sheet as plain values with its indexes; every function of the run takes either
    scope(ctx, state, at)       the flat map of names and series (DEVELOPERS.md, "Names") at a moment
    value(ctx, scope, tree)     a tree's value: float, bool, str, or a Fault
    reasons(ctx, scope, gate)   why a gate is closed; empty where it is open

Twin: static/core/names.js. To add a name: an arm in `scope`, and a line in DEVELOPERS.md.
"""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

from fieldkit import values
from fieldkit.formula import evaluate as evaluation
from fieldkit.formula import slopes
from fieldkit.run import clock
from fieldkit.sheet.model import Sheet
from fieldkit.values import Fault

#: states in which a source cannot hurt where hands are
DEAD = ("proved", "earthed")
#: states of a source that is not isolated and not off
LIVE = ("on", "standby", "cut-off", "unknown")
#: sources that follow another and are never locked, as registers name them
FOLLOWS = {"stored_charge": "beam_supply", "x_rays": "beam_supply", "heat": "heater"}


@dataclass
class Context:
    """A sheet and its indexes. Made by `context`; nothing in it changes but what is kept to save work."""

    sheet: dict[str, Any]
    steps: dict[str, dict[str, Any]]
    moves: dict[str, dict[str, Any]]
    leaving: dict[str, list[dict[str, Any]]]
    sources: dict[str, dict[str, Any]]
    #: every name that any tree mentions
    mentioned: set[str]
    #: sources that some step of the sheet earths
    earthed: set[str]
    #: step id -> sources that a wait counted from it depends on
    depends: dict[str, set[str]]
    #: what a name of the sheet is worth before it has a value
    missing: dict[str, Fault]
    #: values of the givens of the run that was asked about last
    givens: tuple[dict[str, Any] | None, Scope] | None = None
    #: trees of the sheet made ready, by identity
    ready: dict[int, tuple[dict[str, Any], evaluation.Prepared]] = field(default_factory=dict)
    #: the same of those whose uncertainty was asked for
    sloped: dict[int, tuple[dict[str, Any], slopes.Prepared]] = field(default_factory=dict)


@dataclass(frozen=True)
class Scope:
    names: dict[str, Any]
    series: dict[str, list[float]]


_RECENT: OrderedDict[int, tuple[Sheet | dict[str, Any], Context]] = OrderedDict()


def context(sheet: Sheet | dict[str, Any] | Context) -> Context:
    """The sheet ready for the run. Remembers the last few sheets, by identity."""
    if isinstance(sheet, Context):
        return sheet
    kept = _RECENT.get(id(sheet))
    if kept is not None and kept[0] is sheet:
        return kept[1]
    made = _context(sheet.model_dump(mode="json") if isinstance(sheet, Sheet) else sheet)
    _RECENT[id(sheet)] = (sheet, made)
    while len(_RECENT) > 8:
        _RECENT.popitem(last=False)
    return made


def _context(sheet: dict[str, Any]) -> Context:
    leaving: dict[str, list[dict[str, Any]]] = {step["id"]: [] for step in sheet["steps"]}
    for move in sheet["moves"]:
        leaving.setdefault(move["origin"], []).append(move)
    depends: dict[str, set[str]] = {}
    for step in sheet["steps"]:
        control = step["control"]
        if control["control"] == "wait" and control["depends"] and control["clock"].startswith("since:"):
            depends.setdefault(control["clock"][len("since:") :], set()).add(control["depends"])
    return Context(
        sheet=sheet,
        steps={step["id"]: step for step in sheet["steps"]},
        moves={move["id"]: move for move in sheet["moves"]},
        leaving=leaving,
        sources={source["name"]: source for source in sheet["sources"]},
        mentioned=mentioned([sheet["steps"], sheet["moves"], sheet["start"]]),
        earthed={s["control"]["source"] for s in sheet["steps"] if s["control"]["control"] == "earth"},
        depends=depends,
        missing=_missing(sheet["steps"]),
    )


def _missing(steps: list[dict[str, Any]]) -> dict[str, Fault]:
    """Faults for the names of steps that were not answered yet."""
    found: dict[str, Fault] = {}
    for step in steps:
        said = f"“{step['title']}”"
        if step["control"]["control"] in ("number", "result"):
            found[step["id"]] = Fault("missing", f"{said} has no value yet.")
        if step["control"]["control"] == "choice":
            found[f"choice:{step['id']}"] = Fault("missing", f"{said} has no answer yet.")
        for head in ("since", "oldest-since"):
            found[f"{head}:{step['id']}"] = Fault("missing", f"{said} was not done yet.")
    return found


def mentioned(part: Any) -> set[str]:
    """Every name in every tree of a part of the sheet."""
    return set(_mentioned(part))


def _mentioned(part: Any) -> Iterator[str]:
    if isinstance(part, list):
        for one in part:
            yield from _mentioned(one)
    elif isinstance(part, dict):
        if set(part) == {"name"} and isinstance(part["name"], str):
            yield part["name"]
        for one in part.values():
            if isinstance(one, dict | list):
                yield from _mentioned(one)


def scope(ctx: Context, state: dict[str, Any], at: dict[str, Any] | None = None) -> Scope:
    """Names and series in a state; `at` is now, or None for the moment of the last event."""
    if at is None:
        total = state["clock"]
        least, greatest = (clock.millis(total["least"]) or 0, clock.millis(total["greatest"]) or 0) if total else (0, 0)
    else:
        least, greatest = clock.now(state["clock"], at)
    fixed = _givens(ctx, state["started"])
    names: dict[str, Any] = {**ctx.missing, **fixed.names}
    series: dict[str, list[float]] = dict(fixed.series)
    for name in ctx.mentioned:
        head, _, rest = name.partition(":")
        if rest:
            found = _asked(ctx, state, head, rest)
            if found is not None:
                names[name] = found
    for name, source in state["sources"].items():
        names[f"state:{name}"] = stands(ctx, state, name)
        names[f"age:{name}"] = _age(least, source["least"])
        names[f"oldest:{name}"] = _age(greatest, source["greatest"])
    for name, done in state["done"].items():
        names[f"since:{name}"] = _age(least, done["least"])
        names[f"oldest-since:{name}"] = _age(greatest, done["greatest"])
    for name, chosen in state["choices"].items():
        names[f"choice:{name}"] = chosen
    for name, kept in state["values"].items():
        if kept["si"] is not None:
            names[name] = _float(kept["si"])
    for name, column in state["series"].items():
        series[name] = [_float(si) for si in column]
    names["earths"] = float(len(state["earths"]))
    return Scope(names, series)


def _float(text: str) -> float:
    return values.to_float(values.dec(text))


def _age(total: int, mark: str) -> float:
    return (total - (clock.millis(mark) or 0)) / 1000.0


def _givens(ctx: Context, started: dict[str, Any] | None) -> Scope:
    """Names and series of the givens; they never change in a run, so the last run's are kept."""
    if ctx.givens and ctx.givens[0] is started:
        return ctx.givens[1]
    names: dict[str, Any] = {}
    series: dict[str, list[float]] = {}
    found = started["givens"] if started else {}
    for given in ctx.sheet["givens"]:
        kept = found.get(given["name"])
        if kept is None or not kept["texts"]:
            continue
        if given["kind"] == "text":
            names[given["name"]] = kept["texts"][0]
            continue
        numbers = [n for n in (number(text, given["unit"]) for text in kept["texts"]) if n is not None]
        if given["kind"] == "levels":
            series[given["name"]] = numbers
        elif numbers:
            names[given["name"]] = numbers[0]
    ctx.givens = (started, Scope(names, series))
    return ctx.givens[1]


def number(text: str, unit: dict[str, Any] | None) -> float | None:
    """The SI value of a given as the register wrote it; None where it is no number."""
    typed = values.typed(text)
    if not isinstance(typed, values.Dec):
        return None
    scale = unit or {"factor": "1", "offset": "0"}
    shown = values.mul(typed, values.dec(scale["factor"]))
    return values.to_float(values.add(shown, values.dec(scale["offset"])))


def _asked(ctx: Context, state: dict[str, Any], head: str, rest: str) -> Any:
    """Names that have a value from the start, worked out only where the sheet mentions them."""
    if head == "fact":
        return rest in state["facts"]
    if head == "count":
        return float(count(ctx, state, rest))
    if head == "in":
        hands = state["hands"]
        return float(sum(len(names) for names in hands.values()) if rest == "anywhere" else len(hands.get(rest, [])))
    if head == "lock":
        return any(lock["point"] == rest for lock in state["locks"])
    if head == "safe":
        return safe(ctx, state, rest)
    return None


def count(ctx: Context, state: dict[str, Any], name: str) -> int:
    """A counter's value now; it begins at its lower bound, 0 where the sheet gives none."""
    low = ctx.sheet["counters"].get(name, [0, 0])[0]
    return int(state["counters"].get(name, low))


def safe(ctx: Context, state: dict[str, Any], place: str) -> bool:
    """Every isolable source that reaches the place is proved dead, and earthed where this sheet earths it.

    The cabinet's register says what reaches a place; an unmapped place is reached by all. A source that reaches it
    and that the sheet does not know makes it unsafe. Of what follows another source stored charge and X-rays are
    asked, where the sheet knows the beam supply; heat is not: a hand thermometer tells.
    """
    places = state["started"]["places"] if state["started"] else {}
    reaching = places.get(place)
    if reaching is None:
        known = [name for name, source in ctx.sources.items() if source["isolable"]]
        reaching = [*known, *(name for names in places.values() for name in names)]
    return all(_harmless(ctx, state, name) for name in reaching)


def _harmless(ctx: Context, state: dict[str, Any], name: str) -> bool:
    """The source cannot hurt hands that it reaches."""
    followed = FOLLOWS.get(name)
    if followed is not None and (name == "heat" or followed not in ctx.sources):
        return True
    if name == "x_rays":
        return stands(ctx, state, name) == "off"
    asked = followed or name
    held = state["sources"].get(asked)
    return held is not None and held["state"] in (("earthed",) if asked in ctx.earthed else DEAD)


def stands(ctx: Context, state: dict[str, Any], name: str) -> str:
    """The state of a source; of what follows another, as far as that one tells it.

    X-rays are on while the beam supply is; charge is stored from then until the beam supply is proved dead.
    """
    if name not in FOLLOWS or ctx.sources.get(name, {}).get("isolable"):
        return str(state["sources"][name]["state"])
    beam = state["sources"].get("beam_supply", {}).get("state", "unknown")
    if name == "heat" or beam == "on":
        return "unknown" if name == "heat" else "on"
    if name == "x_rays":
        return "unknown" if beam in LIVE else "off"
    return "off" if beam in DEAD else "unknown"


def value(ctx: Context, where: Scope, tree: dict[str, Any]) -> Any:
    """The value of a tree of the sheet, in its JSON form: float, bool, str, or a Fault."""
    kept = ctx.ready.get(id(tree))
    if kept is None or kept[0] is not tree:
        kept = ctx.ready[id(tree)] = (tree, evaluation.prepare(tree, ctx.sheet["formulas"]))
    found: evaluation.Value = kept[1].value(where.names, where.series)
    return found


def gradient(ctx: Context, where: Scope, tree: dict[str, Any]) -> slopes.Slopes | Fault:
    """How the value of a tree of the sheet changes, in SI, with each name and each place of a column that it uses."""
    kept = ctx.sloped.get(id(tree))
    if kept is None or kept[0] is not tree:
        kept = ctx.sloped[id(tree)] = (tree, slopes.prepare(tree, ctx.sheet["formulas"]))
    found: slopes.Slopes | Fault = kept[1].gradient(where.names, where.series).of
    return found


def reasons(ctx: Context, where: Scope, gate: list[dict[str, Any]], skip: str | None = None) -> list[dict[str, Any]]:
    """Why a gate is closed, one reason for every condition that does not hold: {"says", "left"}.

    `left` is in seconds, or None where time alone does not open it. `skip` leaves out conditions about that step's
    own answer, which cannot be known before it is given.
    """
    found = []
    for condition in gate:
        if skip is not None and not own(skip).isdisjoint(_with_series(condition["tree"])):
            continue
        if value(ctx, where, condition["tree"]) is True:
            continue
        found.append({"says": f"Opens when {condition['says']}.", "left": left(ctx, where, condition)})
    return found


def own(step: str) -> set[str]:
    """The names that a step's own answer gives."""
    return {step, f"choice:{step}", f"since:{step}", f"oldest-since:{step}", f"count:again:{step}"}


def _with_series(part: Any) -> set[str]:
    found = set(_mentioned(part))
    if isinstance(part, dict):
        if isinstance(part.get("series"), str):
            found.add(part["series"])
        for one in part.values():
            if isinstance(one, dict | list):
                found |= _with_series(one)
    elif isinstance(part, list):
        for one in part:
            found |= _with_series(one)
    return found


def left(ctx: Context, where: Scope, condition: dict[str, Any]) -> float | None:
    """Seconds until the condition's clock has counted enough; None where it has not started, or has no clock."""
    if condition["clock"] is None or condition["least"] is None:
        return None
    counted, least = where.names.get(condition["clock"]), value(ctx, where, condition["least"])
    if isinstance(counted, bool) or isinstance(least, bool):
        return None
    if not isinstance(counted, float) or not isinstance(least, float):
        return None
    return max(0.0, least - counted)
