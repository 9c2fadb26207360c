"""Checks of what pulls or turns the load: belt, rack, coupling. Data are quantities of the axis."""

from __future__ import annotations

from collections.abc import Callable

from actuator_sizing.core.quadrature import largest_magnitude
from actuator_sizing.sizing.checks.base import (
    Check,
    Measure,
    Need,
    Sets,
    applies_if,
    digits,
    everywhere,
    quotient_working,
)

#: Teeth that share the force evenly at most; more of them in mesh help no further. Common practice (12 to 15).
MOST_TEETH = 12.0


def application_factor(sets: Sets) -> float:
    """Factor for shocks of the driven machine; 1 where the case states none. [-]"""
    stated = sets.option("application factor")
    return 1.0 if stated != stated else stated


def _largest_effort(sets: Sets) -> tuple[float, float]:
    """Largest force between load and belt or rack, and its instant."""
    demand = sets.demand
    force, piece, position = largest_magnitude(demand.effort[None])
    return float(force[0]), float(demand.instant(piece, position)[0])


def _force_measure(limit: Callable[[Sets], float], *, pretensioned: bool) -> Callable[[Sets], Measure]:
    def measure(sets: Sets) -> Measure:
        force, at = _largest_effort(sets)
        held = sets.option("belt pretension") if pretensioned else 0.0
        demand = held + application_factor(sets) * force
        return Measure(everywhere(demand, sets), everywhere(limit(sets), sets), everywhere(at, sets))

    return measure


def _force_working(symbols: str, measure: Callable[[Sets], Measure]) -> Callable[[Sets, int], str]:
    plain = quotient_working(symbols, "N", measure)

    def working(sets: Sets, i: int) -> str:
        force, factor = _largest_effort(sets)[0], application_factor(sets)
        return f"F = {digits(force)} N, application factor {digits(factor)}; {plain(sets, i)}"

    return working


_tension = _force_measure(lambda sets: sets.option("allowed belt tension"), pretensioned=True)

BELT_TENSION = Check(
    key="belt_tension",
    title="Belt tension",
    group="mechanism",
    unit="N",
    formula="pretension + K_A max |F| ≤ allowed belt tension; the tight strand taken to carry the whole force more",
    source="Statics of the belt, on the safe side by at most half of F; limit of the data sheet",
    needs=tuple(Need("axis", name, name) for name in ("belt pretension", "allowed belt tension")),
    measure=_tension,
    working=_force_working("F_tight / F_allowed", _tension),
    applies=applies_if(lambda sets: sets.states("belt pretension", "allowed belt tension")),
)


def _teeth_limit(sets: Sets) -> float:
    return min(sets.option("teeth in mesh"), MOST_TEETH) * sets.option("allowed force per tooth")


_teeth = _force_measure(_teeth_limit, pretensioned=False)

BELT_TEETH = Check(
    key="belt_teeth",
    title="Belt teeth in mesh",
    group="mechanism",
    unit="N",
    formula="K_A max |F| ≤ min(teeth in mesh, 12) · allowed force per tooth",
    source="Tooth force of the data sheet at the largest speed; at most 12 teeth share it: common practice",
    needs=tuple(Need("axis", name, name) for name in ("teeth in mesh", "allowed force per tooth")),
    measure=_teeth,
    working=_force_working("F / F_teeth", _teeth),
    applies=applies_if(lambda sets: sets.states("teeth in mesh", "allowed force per tooth")),
)

_rack = _force_measure(lambda sets: sets.option("allowed tangential force"), pretensioned=False)

RACK_FORCE = Check(
    key="rack_force",
    title="Tooth force of the rack",
    group="mechanism",
    unit="N",
    formula="K_A max |F| ≤ allowed tangential force",
    source="Tooth strength of the data sheet (ISO 6336)",
    needs=(Need("axis", "allowed tangential force", "allowed tangential force"),),
    measure=_rack,
    working=_force_working("F / F_allowed", _rack),
    applies=applies_if(
        lambda sets: (
            sets.case.mechanism.name == "rack and pinion"
            and sets.states("allowed tangential force", "pressure angle")
        )
    ),
)


def _coupling_measure(sets: Sets) -> Measure:
    demand = sets.demand
    torque, piece, position = largest_magnitude(demand.shaft_torque[None])
    at = float(demand.instant(piece, position)[0])
    peak = application_factor(sets) * float(torque[0])
    return Measure(
        everywhere(peak, sets), everywhere(sets.option("coupling torque limit"), sets), everywhere(at, sets)
    )


COUPLING_TORQUE = Check(
    key="coupling_torque",
    title="Coupling torque",
    group="mechanism",
    unit="N·m",
    formula="K_A max |T_shaft| ≤ coupling torque limit",
    source="Torque of the data sheet that the coupling stands again and again",
    needs=(Need("axis", "coupling torque limit", "coupling torque limit"),),
    measure=_coupling_measure,
    working=quotient_working("K_A T_max / T_coupling", "N·m", _coupling_measure),
    # Where shocks are stated the coupling is asked for.
    applies=applies_if(lambda sets: sets.states("coupling torque limit") or application_factor(sets) > 1.0),
)

TRACTION_CHECKS = (BELT_TENSION, BELT_TEETH, RACK_FORCE, COUPLING_TORQUE)
