"""Which instrument: `meter: heater_volts` (a role of the cabinet), `meter: HV-2 at hv-compartment` (a hand meter).

Where more is to be said of it, its keys are written: `meter: {name: heater_volts, overdue: refuse, correlated: yes}`.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Literal

from fieldkit.errors import Collector
from fieldkit.sheet.parts import Meter
from fieldkit.steps import words
from fieldkit.steps.words import Written, key
from fieldkit.yaml_source import Mapping, Node

#: the roles that a cabinet's register fills, as DEVELOPERS.md lists them
ROLES = (
    "beam_volts",
    "beam_amps",
    "body_amps",
    "grid_amps",
    "heater_volts",
    "heater_amps",
    "bias_volts",
    "focus_amps",
    "trim_amps",
    "focus_volts",
    "ion_amps",
    "ion_volts",
    "coolant_flow",
    "coolant_inlet",
    "coolant_outlet",
    "coolant_pressure",
    "air_pressure",
    "forward_power",
    "reflected_power",
    "drive_forward",
    "drive_reflected",
    "dew_point",
)

_HAND = re.compile(r"([A-Z][A-Z0-9]*-[A-Z0-9]+)(?: at ([a-z][a-z0-9-]*))?\Z")


def _named(node: Node, found: Collector) -> Meter | None:
    value = words.text(node, found)
    if value is None:
        return None
    if value in ROLES:
        return Meter(role=value)
    match = _HAND.match(value)
    if match:
        return Meter(instrument=match[1], hand_at=match[2])
    remedy = f"{words.near(value, ROLES)}write one of: {', '.join(ROLES)}; or an instrument as in HV-2, or HV-2 at deck"
    found.add(node.place, "unknown-meter", f'"{value}" is neither a meter of the cabinet nor an instrument', remedy)
    return None


NAME = words.Word("a meter of the cabinet, or an instrument and where it is held", _named)


@dataclass(frozen=True, kw_only=True)
class MeterWritten(Written):
    name: Meter = key(NAME, "which one", required=True)
    overdue: Literal["take", "refuse"] = key(
        words.one_of("take", "refuse"), "whether a reading is taken after its calibration has run out", default="take"
    )
    correlated: bool = key(
        words.yes_no, "its readings on one range share their error: in a result it adds up, or cancels", default=False
    )


def _read(node: Node, found: Collector) -> Meter | None:
    if not isinstance(node, Mapping):
        return _named(node, found)
    written = words.read_model(MeterWritten, node, found, "a meter")
    if written is None:
        return None
    return written.name.model_copy(update={"overdue": written.overdue, "correlated": written.correlated})


METER = words.Word("a meter of the cabinet, or an instrument and where it is held; or the keys of a meter", _read)
