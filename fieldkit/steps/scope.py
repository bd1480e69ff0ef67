"""The names that stand in one procedure's formulas and conditions, and what each of them is.

Filled by the compiler before any step is lowered; kinds ask it for trees in SI and for conditions. Asking for
something wrong adds a Problem and gives a tree that is never used, because a file with problems gives no sheet.
Not here: parsing and unit checking themselves (fieldkit.formula), reading values (words).
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field

from fieldkit.errors import Collector, Place
from fieldkit.formula.library import Library
from fieldkit.sheet.model import Rule
from fieldkit.sheet.parts import Tree, Unit
from fieldkit.steps import expression, words
from fieldkit.steps.expression import Named
from fieldkit.yaml_source import Scalar

NOTHING: Tree = {"number": "0"}


@dataclass
class Scope:
    """Everything that a step may refer to. `order` is the place of a step in the file's order."""

    found: Collector
    library: Library
    names: dict[str, Named] = field(default_factory=dict)
    options: dict[str, tuple[str, ...]] = field(default_factory=dict)
    texts: set[str] = field(default_factory=set)
    levels: dict[str, Unit] = field(default_factory=dict)
    meanings: dict[str, str] = field(default_factory=dict)
    origins: dict[str, str] = field(default_factory=dict)
    given_places: dict[str, Place] = field(default_factory=dict)
    steps: dict[str, tuple[int, str]] = field(default_factory=dict)
    sources: tuple[str, ...] = ()
    facts: set[str] = field(default_factory=set)
    rules: tuple[Rule, ...] = ()
    crew: int = 1
    #: order of the step that is being lowered; names given by later steps are not known yet
    now: int = 0
    formulas_used: set[str] = field(default_factory=set)

    def tree(self, scalar: Scalar, unit: Unit | None, offset: int = 0, text: str | None = None) -> Tree:
        """The tree of the formula written in `scalar` (or its part `text` at `offset`), which must fit `unit`."""
        answer = expression.lower(scalar, offset, text, unit, self.visible(), self.library, self.found)
        if answer is None:
            return NOTHING
        self.formulas_used |= answer.formulas
        return answer.tree

    def flag(self, scalar: Scalar) -> Tree:
        """The tree of a formula that says yes or no."""
        answer = expression.lower(scalar, 0, None, "flag", self.visible(), self.library, self.found)
        if answer is None:
            return NOTHING
        self.formulas_used |= answer.formulas
        return answer.tree

    def visible(self) -> dict[str, Named]:
        """The names known at the step that is being lowered: given ones, and those of steps before it or itself."""
        return {n: v for n, v in self.names.items() if v.order <= self.now}

    @contextmanager
    def level(self, tree: Tree, unit: Unit) -> Iterator[None]:
        """Inside, the name `level` is the rung of a ladder."""
        before = self.names.get("level")
        self.names["level"] = Named(words.dimension(unit), tree=tree)
        try:
            yield
        finally:
            del self.names["level"]
            if before is not None:
                self.names["level"] = before

    def must_be_step(self, id_: str, place: Place, before: bool = True) -> bool:
        """Whether `id_` is a step (one before this one); adds a Problem where not."""
        if id_ not in self.steps:
            remedy = f"{words.near(id_, self.steps)}write the id of a step"
            self.found.add(place, "unknown-step", f'there is no step "{id_}"', remedy)
            return False
        if before and self.steps[id_][0] >= self.now:
            self.found.add(
                place, "step-comes-later", f'the step "{id_}" comes later', "name a step that stands before this one"
            )
            return False
        return True

    def must_be_source(self, name: str, place: Place) -> bool:
        """Whether the procedure declares the source under `energy:`; adds a Problem where not."""
        if name in self.sources:
            return True
        remedy = f"{words.near(name, self.sources)}write one of: {', '.join(self.sources)}; or declare it under energy:"
        self.found.add(place, "unknown-source", f'"{name}" is not among the sources of this procedure', remedy)
        return False

    def title_of(self, id_: str) -> str:
        return self.steps[id_][1] if id_ in self.steps else id_

    def says(self, text: str) -> str:
        """A formula in words where it is a single given with a meaning, else as it is written."""
        return self.meanings.get(text.strip(), text.strip())
