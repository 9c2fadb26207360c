"""The answer for a machine as JSON for other programs: SI values, null where not known."""

from __future__ import annotations

import json
from dataclasses import asdict
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.document.verdict import governing
from actuator_sizing.report.json_results import plain

if TYPE_CHECKING:
    from actuator_sizing.sizing.machine import Machine, MachineAxis
    from actuator_sizing.sizing.machine_bus import CommonBus

SCHEMA = "actuator-sizing/machine/1"


def machine_dict(machine: Machine) -> dict[str, Any]:
    """The answer as plain data.

    Parameters
    ----------
    machine : Machine
        The answer.
    """
    types = machine.motor_types
    answer = {
        "schema": SCHEMA,
        "version": machine.version,
        "machine": machine.name,
        "passes": machine.passes,
        "price": machine.price,
        "mass_kg": machine.mass_kg,
        "energy_per_hour_j": machine.energy_per_hour_j,
        "axes": [_axis(axis) for axis in machine.axes],
        "shared_parts": [asdict(part) for part in machine.shared_parts],
        "motor_types": {
            "complete": types.complete,
            "choices": [asdict(choice) for choice in types.choices],
            "common": [asdict(one) for one in types.common],
            "different_data_under_one_name": types.same_name,
            "axes_without_price": types.unpriced,
        },
        "buses": [_bus(bus) for bus in machine.buses],
    }
    plain_answer: dict[str, Any] = plain(answer)
    return plain_answer


def render_machine_json(machine: Machine) -> bytes:
    """Write the answer as JSON.

    Parameters
    ----------
    machine : Machine
        The answer.
    """
    return (json.dumps(machine_dict(machine), indent=1, ensure_ascii=False, allow_nan=False) + "\n").encode()


def _axis(axis: MachineAxis) -> dict[str, Any]:
    best, check = axis.best, governing(axis.best)
    return {
        "axis": axis.name,
        "fingerprint": axis.comparison.case.fingerprint,
        "mechanism": axis.comparison.case.mechanism.name,
        "cycle_s": axis.cycle_s,
        "motor": best.motor,
        "gearhead": best.gearhead,
        "ratio": best.ratio,
        "drive": best.drive,
        "verdict": best.verdict,
        "governing_check": best.governing_check,
        "governing_utilisation": check.utilisation if check else None,
        "price": best.price,
        "mass_kg": best.mass_kg,
        "power_taken_mean_w": None if axis.power is None else axis.power.taken_w,
        "power_returned_mean_w": None if axis.power is None else axis.power.returned_w,
    }


def _bus(bus: CommonBus) -> dict[str, Any]:
    return {name: getattr(bus, name) for name in bus.__dataclass_fields__ if name != "together"}
