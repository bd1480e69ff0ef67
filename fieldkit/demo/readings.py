"""What the meters of the invented cabinets would show, by step; invented, for the demonstration only.

A modelled amplifier with drift, noise and faults is a matter of its own; here are the few readings that the two
shipped procedures ask for, as a healthy tube would give them. A ladder's readings depend on the rung's voltage.
"""

from __future__ import annotations

#: step id -> what is typed, warm-up of T-0417 in B2
WARM_UP = {
    "sticks_home": "3",
    "air_pressure": "402",
    "coolant_flow": "48.2",
    "dew_point": "12.1",
    "coolant_inlet": "24.0",
    "ion_voltage": "3.70",
    "ion_cold": "0.4",
    "inrush": "17.5",
    "ion_warming": "1.3",
    "heater_found": "6.21",
    "heater_left": "6.30",
    "ion_hump": "2.8",
    "bias_voltage": "-119.6",
    "grid_current": "0.1",
    "focus": "22.60",
    "trim": "4.00",
    "focus_volts": "26.9",
    "field_focus": "3.4",
    "field_trim": "1.2",
    "heater_amps_10": "9.82",
    "heater_warm": "6.30",
    "heater_amps_warm": "9.80",
    "ion_warm": "1.7",
}

#: the first readings of T-0533 in B1, still warming
OPEN = {
    "history": "cold",
    "sticks_home": "3",
    "air_pressure": "396",
    "coolant_flow": "40.1",
    "dew_point": "12.0",
    "coolant_inlet": "23.8",
    "ion_voltage": "3.65",
    "ion_cold": "0.9",
    "inrush": "23.3",
    "ion_warming": "1.9",
    "heater_found": "5.96",
    "heater_left": "6.00",
}

#: one text for every visit of these, bring-up of T-0417 in B2
BRING_UP = {
    "sticks_home": "3",
    "history": "cold",
    "ready_heater_volts": "6.30",
    "ready_heater_amps": "9.80",
    "ready_flow": "48.2",
    "dew_point": "12.1",
    "ready_inlet": "24.2",
    "ready_outlet": "24.4",
    "ready_air": "401",
    "ready_focus": "22.60",
    "ready_trim": "4.00",
    "ready_focus_volts": "27.8",
    "ready_ion_volts": "3.70",
    "ready_ion": "1.7",
    "ready_bias": "-119.6",
    "ready_drive": "0.02",
    "plugs_home": "4",
    "first_kv": "18.0",
    "first_beam": "0.00",
    "first_body": "0.1",
    "xray_1m_first": "0.10",
    "xray_5cm_first": "0.12",
    "climb_beam": "0.00",
    "climb_body": "0.2",
    "climb_bias": "-119.6",
    "top_kv": "32.0",
    "xray_1m_top": "0.11",
    "xray_5cm_top": "0.14",
    "top_ion": "0.6",
    "top_body": "0.2",
    "stop_kv": "18.0",
    "kv_10s": "5.2",
    "next": "lock",
}


def bring_up() -> dict[str, str | list[str]]:
    """Every reading of the bring-up: the climb to 32 kV with one fall-back for gas at 26 kV."""
    climb = ["18", "20", "22", "24", "26", "24", "26", "28", "30", "32"]
    ion = ["0.6", "0.7", "0.9", "1.1", "5.8", "1.2", "1.4", "1.5", "1.6", "1.8"]
    return {**BRING_UP, "climb_kv": [f"{kv}.0" for kv in climb], "climb_ion": ion}
