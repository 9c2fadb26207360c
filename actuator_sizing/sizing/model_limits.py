"""What the model leaves out for one set, said in every report beside what was assumed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.case.model import ONCE_COLD, ONCE_WARM, REPEATS, SHORT_TIME
from actuator_sizing.core.machine import ASSUMED_HOT_WINDING_DEGC
from actuator_sizing.core.thermal import altitude_factor

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case
    from actuator_sizing.sizing.results import SetResult

#: Quantities of the axis that a case keeps, and the checks that read them where they apply.
UNUSED_QUANTITIES = {"required life": ("gearhead_life", "shaft_bearing_life", "screw_life", "brush_life")}

#: Checks that judge a holding brake.
BRAKE_CHECKS = ("holding_brake_static",)

_RUNS = {
    REPEATS: "repeats for ever",
    SHORT_TIME: "starts from cold and is cold again before the next run",
    ONCE_COLD: "runs once from cold, and the repeating cycle that then gets hottest follows",
    ONCE_WARM: "runs once from the hottest state of the repeating cycles, and the one that then gets hottest follows",
}

_PARTS_NOT_CHECKED = {
    "belt": "stretch and life of the belt",
    "winch": "strength and life of the rope, and how it lays itself on the drum",
    "conveyor": "tension and slip of the belt on its drum",
    "gantry": "racking of the beam and how evenly the two motors share",
    "crank-slider": "forces in pins, rod and guide from the angle of the rod",
    "toggle lever": "forces in pins and links, which grow without limit towards the stretched position",
    "eccentric": "contact pressure and wear of disc and roller",
    "four-bar": "forces in pins and links",
    "tabulated slider": "contact and pins of whatever follows the map",
    "tabulated lever": "contact and pins of whatever follows the map",
    "winder": "wound-in tension and loss of tension while speed changes",
    "unwinder": "loss of tension while speed changes",
}

#: What checks judge where the case states the strength of the parts; named as not checked where it does not.
_PARTS_CHECKED = {
    "ball screw": (
        ("screw_critical_speed", "critical speed of the screw"),
        ("screw_buckling", "buckling of the screw"),
        ("screw_life", "life of the screw"),
    ),
    "lead screw": (
        ("screw_critical_speed", "critical speed of the screw"),
        ("screw_buckling", "buckling of the screw"),
        ("screw_pressure_speed", "wear of the nut"),
    ),
    "belt": (("belt_tension", "tension of the belt"), ("belt_teeth", "teeth of the belt")),
    "rack and pinion": (("rack_force", "tooth force of rack and pinion"),),
}


def model_statements(case: Case, best: SetResult) -> tuple[tuple[str, str], ...]:
    """What the method takes for granted and what it leaves out.

    Parameters
    ----------
    case : Case
        The case. [-]
    best : SetResult
        The leading set: what is left out depends on its parts and its energy. [-]

    Returns
    -------
    tuple of (subject, statement)
        Only statements that matter for this case. [-]
    """
    s = case.surroundings
    judged = (
        f"each motor's winding limit ({ASSUMED_HOT_WINDING_DEGC:g} °C where the sheet states none)"
        if s.judged_winding_degc != s.judged_winding_degc
        else f"{s.judged_winding_degc:g} °C"
    )
    coldest = (
        "ambient, which is taken as the coldest since no lowest ambient temperature is stated"
        if s.lowest_ambient_degc != s.lowest_ambient_degc
        else f"the lowest ambient of {s.lowest_ambient_degc:g} °C"
    )
    said = [
        (
            "model: hot winding",
            f"current and voltage are judged with the winding at {judged}; voltage also with the motor at {coldest}: "
            "cold magnets raise it",
        ),
        ("model: minimum bus", f"voltage and speed–torque limits are judged at {s.bus_min_v:g} V"),
        (
            "model: standstill",
            "holding is taken without help from friction, its heat spread over all phases but in the check of "
            "the hottest phase; with the brake closed no current flows",
        ),
        ("model: cycle", _cycles(case)),
        (
            "model: stiffness",
            "sizing takes load, gearhead and motor as one rigid body; resonance is simulated",
        ),
        ("model: drive rating", _drive_rating(case, best)),
    ]
    said += _holding_brake(case, best)
    judged_keys = {check.check for check in best.checks}
    left_out = [part for key, part in _PARTS_CHECKED.get(case.mechanism.name, ()) if key not in judged_keys]
    left_out += [_PARTS_NOT_CHECKED[name] for name in (case.mechanism.name,) if name in _PARTS_NOT_CHECKED]
    if left_out:
        said.append(("model: mechanism", f"not checked: {'; '.join(left_out)}"))
    idle = [
        entry.label
        for entry in case.entries
        if entry.table == "axis"
        and entry.origin == "stated"
        and entry.label in UNUSED_QUANTITIES
        and judged_keys.isdisjoint(UNUSED_QUANTITIES[entry.label])
    ]
    if idle:
        said.append(("model: stated, not used", f"no check reads {', '.join(idle)}"))
    return tuple(said)


def _cycles(case: Case) -> str:
    if len(case.cycles) < 2 and case.cycle.repeats:
        return "the cycle repeats for ever; dwell counts in RMS values"
    how = "; ".join(f"'{cycle.name}' {_RUNS[cycle.runs]}" for cycle in case.cycles)
    return f"every cycle must pass by itself: {how}; dwell counts in RMS values"


def _drive_rating(case: Case, best: SetResult) -> str:
    s, rated = case.surroundings, float(case.drive_parameters.continuous_ambient_degc[best.drive_index])
    text = "the currents of the drive are taken as stated, whatever the switching frequency"
    if altitude_factor(s.altitude_m) < 1.0:
        text += f"; its peak current is not reduced for the altitude of {s.altitude_m:g} m"
    if rated < s.ambient_degc:
        text += f"; its peak current is not reduced for {s.ambient_degc:g} °C, above the rated {rated:g} °C"
    return f"{text}; the cabinet is taken to be as warm as the air around the motor"


def _holding_brake(case: Case, best: SetResult) -> list[tuple[str, str]]:
    """A brake that the cycle relies on and that no check of this set judged."""
    judged = any(check.check in BRAKE_CHECKS and check.utilisation is not None for check in best.checks)
    if judged or not any(segment.brake_closed for one in case.by_cycle() for segment in one.segments):
        return []
    torque = float(case.motor_parameters.brake_torque_nm[best.motor_index])
    stated = "" if torque == torque else f"; {best.motor} states none"
    return [("model: holding brake", f"a brake is taken to hold the load; its torque is not checked{stated}")]
