"""Checks of what a motor meets beside its cycle: jam, stops in a row, one loaded phase, demagnetisation, brushes."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.overload_heat import standstill_phase_factor
from actuator_sizing.core.parameters import BRUSHED
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
from actuator_sizing.sizing.checks.motor import peak_current
from actuator_sizing.sizing.overloads import (
    held_stretches,
    hold_excess,
    jam_temperature,
    stop_heating_time,
    stops_temperature,
)
from actuator_sizing.sizing.stops import coasting_stops

FloatArray = NDArray[np.float64]

_THERMAL = (
    Need("motors", "winding_limit_degc", "winding temperature limit"),
    Need("pairs", "thermal_known", "thermal resistance and time constant of winding and housing"),
)
_PEAKS = (
    Need("motors", "peak_current_a", "peak current"),
    Need("drives", "peak_current_a", "peak current"),
)
_TWO_BODIES = (
    "Two-body network, linear with the current given: exact; from the hottest state of the periodic cycle. "
)


def _rise_measure(temperature: Callable[[Sets], FloatArray]) -> Callable[[Sets], Measure]:
    """Rise over ambient against the permitted one; infinite where the cycle itself runs away."""

    def measure(sets: Sets) -> Measure:
        ambient = sets.surroundings.ambient_degc
        runaway = sets.pairs.thermal_known & ~sets.pairs.has_equilibrium
        rise = np.where(runaway, np.inf, temperature(sets) - ambient)
        return Measure(rise, np.maximum(sets.motors.winding_limit_degc - ambient, 0.0))

    return measure


def _event_working(
    measure: Callable[[Sets], Measure], lasts: Callable[[Sets], FloatArray], what: str
) -> Callable[[Sets, int], str]:
    def working(sets: Sets, i: int) -> str:
        m, start = measure(sets), float(sets.pairs.winding_max_degc[i])
        if np.isinf(m.demand[i]):
            return "the cycle itself leaves the winding hotter each time"
        end = float(m.demand[i]) + sets.surroundings.ambient_degc
        return (
            f"{what}: {digits(float(peak_current(sets)[i]))} A for {digits(float(lasts(sets)[i]))} s takes the "
            f"winding from {digits(start)} °C to {digits(end)} °C; rise {m.quotient(i)}"
        )

    return working


_jam = _rise_measure(lambda sets: sets.once(jam_temperature))

JAM_TEMPERATURE = Check(
    key="jam_temperature",
    title="Winding after a jam",
    group="motor",
    unit="K",
    formula="ϑ_w after the smaller peak current of motor and drive for the jam duration, the hottest phase taken "
    "with twice (sinusoidal) or 1.5 times (six-step) the mean heat, − ϑ_a ≤ ϑ_limit − ϑ_a",
    source=_TWO_BODIES
    + "Blocked at the worst angle; exact for a jam short against the winding's time constant",
    needs=(*_PEAKS, *_THERMAL),
    measure=_jam,
    working=_event_working(_jam, lambda sets: everywhere(sets.option("jam duration"), sets), "blocked"),
    applies=applies_if(lambda sets: sets.states("jam duration")),
)

_stops = _rise_measure(lambda sets: sets.once(stops_temperature))

STOPS_TEMPERATURE = Check(
    key="stops_temperature",
    title="Winding after stops in a row",
    group="motor",
    unit="K",
    formula="ϑ_w after (2 N − 1) t_stop at the smaller peak current of motor and drive, − ϑ_a ≤ ϑ_limit − ϑ_a; a "
    "start takes as long as a controlled stop",
    source=_TWO_BODIES + "Controlled stops from the worst instant (category 1 or 2 of IEC 60204-1)",
    needs=(Need("axis", "stop reaction time", "stop reaction time"), *_PEAKS, *_THERMAL),
    measure=_stops,
    working=_event_working(_stops, stop_heating_time, "stops in a row"),
    applies=applies_if(lambda sets: sets.states("stops in a row")),
)


# -- one loaded phase -------------------------------------------------------------------------------
_hold = _rise_measure(lambda sets: sets.pairs.winding_max_degc + sets.once(hold_excess)[0])


def _hold_working(sets: Sets, i: int) -> str:
    m = _hold(sets)
    if np.isinf(m.demand[i]):
        return "the cycle itself leaves the winding hotter each time"
    excess, current = (float(value[i]) for value in sets.once(hold_excess))
    return (
        f"holding {digits(current)} A heats one phase by {digits(excess)} K more than the mean of the winding, which "
        f"reaches {digits(float(sets.pairs.winding_max_degc[i]))} °C; rise {m.quotient(i)}"
    )


def _holds(sets: Sets) -> NDArray[np.bool_]:
    """Sets whose winding carries current at rest, and whose phases can differ."""
    if not held_stretches(sets):
        return np.zeros(len(sets), dtype=bool)
    return np.asarray(
        (sets.once(hold_excess)[1] > 0.0) & (standstill_phase_factor(sets.motors.commutation) > 1.0)
    )


STANDSTILL_HOLD = Check(
    key="standstill_hold",
    title="Hottest phase while holding",
    group="motor",
    unit="K",
    formula="ϑ_w,max + (f − 1) R i² R_1 (1 − e^(−t/τ_w))/(1 − e^(−T/τ_w)) − ϑ_a ≤ ϑ_limit − ϑ_a; f = 2 sinusoidal, "
    "1.5 six-step, at the worst angle",
    source="A phase that carries the amplitude at rest, without heat to its neighbours: first principles, on the "
    "safe side",
    needs=(
        *_THERMAL,
        Need("motors", "thermal_resistance_housing_k_w", "thermal resistance winding-housing",
             known_by=lambda sets: ~np.isnan(sets.once(hold_excess)[0])),
    ),
    measure=_hold,
    working=_hold_working,
    applies=_holds,
    is_advice=True,
)  # fmt: skip


# -- demagnetisation --------------------------------------------------------------------------------
def _demagnetisation_measure(sets: Sets) -> Measure:
    shorted = sets.once(coasting_stops).current_peak_a
    largest = np.fmax(np.fmax(sets.pairs.current_peak_a, peak_current(sets)), shorted)
    return Measure(
        np.where(np.isnan(shorted), np.nan, largest),
        sets.catalog_values("motors", "demagnetisation_current"),
    )


def _demagnetisation_working(sets: Sets, i: int) -> str:
    m = _demagnetisation_measure(sets)
    return (
        f"cycle {digits(float(sets.pairs.current_peak_a[i]))} A, smaller peak current of motor and drive "
        f"{digits(float(peak_current(sets)[i]))} A, first peak of the shorted winding "
        f"{digits(float(sets.once(coasting_stops).current_peak_a[i]))} A; {m.quotient(i)}"
    )


MOTOR_DEMAGNETISATION = Check(
    key="motor_demagnetisation",
    title="Demagnetisation",
    group="motor",
    unit="A",
    formula="max of |i| in the cycle, the smaller peak current of motor and drive, and the first peak of the shorted "
    "winding at the highest speed ≤ I_demagnetisation",
    source="Limit of the data sheet for the hot magnet; dq equations with shorted terminals",
    needs=(
        Need("axis", "stop reaction time", "stop reaction time"),
        Need("motors", "demagnetisation_current", "demagnetisation current"),
    ),
    measure=_demagnetisation_measure,
    working=_demagnetisation_working,
    applies=applies_if(lambda sets: sets.catalog_asks("motors", "demagnetisation_current")),
)


# -- brushes ----------------------------------------------------------------------------------------
def _brush_measure(sets: Sets) -> Measure:
    return Measure(
        everywhere(sets.option("required life"), sets), sets.catalog_values("motors", "brush_life")
    )


BRUSH_LIFE = Check(
    key="brush_life",
    title="Life of the brushes",
    group="motor",
    unit="s",
    formula="required life ≤ brush life",
    source="Brush life of the data sheet at the rated current; starts and overload wear faster",
    needs=(Need("motors", "brush_life", "brush life"),),
    measure=_brush_measure,
    working=quotient_working("L_required / L_brush", "s", _brush_measure),
    applies=lambda sets: (
        (sets.motors.commutation == BRUSHED)
        & sets.states("required life")
        & sets.catalog_asks("motors", "brush_life")
    ),
)

OVERLOAD_CHECKS = (JAM_TEMPERATURE, STOPS_TEMPERATURE, STANDSTILL_HOLD, MOTOR_DEMAGNETISATION, BRUSH_LIFE)
