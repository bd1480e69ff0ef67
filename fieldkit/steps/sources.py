"""The energy sources that a procedure may name, in the order of their lanes, with the words for them.

A closed list, the one of the cabinet registers: rails, rules and the safety proof know each by name. Which of them a
place is reached by is the cabinet's register's business, not the procedure's. To add a source: one line here.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Energy:
    name: str
    #: "the beam supply is off": title with its article and verb
    title: str
    short: str
    isolable: bool = True
    plural: bool = False

    @property
    def is_(self) -> str:
        return f"the {self.title} {'are' if self.plural else 'is'}"


SOURCES: dict[str, Energy] = {
    e.name: e
    for e in (
        Energy("beam_supply", "beam supply", "beam"),
        Energy("tube_link", "tube link", "link"),
        Energy("heater", "heater", "heater"),
        Energy("bias", "bias", "bias"),
        Energy("magnets", "magnets", "mag", plural=True),
        Energy("ion_pump", "ion pump", "ion"),
        Energy("rf_drive", "RF drive", "drive"),
        Energy("rf_return", "RF return", "return"),
        Energy("coolant", "coolant", "cool"),
        Energy("air", "air", "air"),
        Energy("auxiliaries", "auxiliaries", "aux", plural=True),
        Energy("stored_charge", "stored charge", "charge", isolable=False),
        Energy("x_rays", "X-rays", "X-ray", isolable=False, plural=True),
        Energy("heat", "heat", "heat", isolable=False),
    )
}

#: what follows which source: it cannot be locked, and is computed from that source and time
FOLLOWS = {"beam_supply": ("stored_charge", "x_rays"), "heater": ("heat",)}

#: the states that a procedure may set or ask for; `locked`, `proved`, `earthed` are set by their own steps only
SETTABLE = ("off", "on", "standby", "cut-off")
ISOLATED = ("locked", "proved", "earthed")


def says_state(source: str, states: tuple[str, ...]) -> str:
    """ "the bias is on or cut-off"."""
    words = {"proved": "proved dead"}
    return f"{SOURCES[source].is_} {' or '.join(words.get(s, s) for s in states)}"
