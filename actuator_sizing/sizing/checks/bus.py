"""Checks of DC bus, brake resistor and supply."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.sizing.bus import BusResults
from actuator_sizing.sizing.bus_sag import is_soft
from actuator_sizing.sizing.bus_side import BATTERY, DC_SUPPLY, supply_feeds_back, supply_kind
from actuator_sizing.sizing.checks.base import SUSTAINED, Check, Measure, Need, Sets, digits
from actuator_sizing.sizing.joint_bus import bus_results, joint_rule, partners_known

FloatArray = NDArray[np.float64]

_PRACTICE = "Energy account of the DC bus, chopper as ideal clamp; first principles"


def _same(value: float, sets: Sets) -> FloatArray:
    return np.full(len(sets), value)


def _has_resistor(sets: Sets) -> NDArray[np.bool_]:
    """Sets whose bus a brake resistor holds."""
    stated = not np.isnan(sets.option("brake resistor")) and not supply_feeds_back(sets)
    return np.full(len(sets), stated)


def _burns(sets: Sets) -> NDArray[np.bool_]:
    """Sets whose resistor has something to burn, or where that is not known."""
    return np.asarray(_has_resistor(sets) & ~(sets.once(bus_results).brake_energy_j == 0.0))


def _supply_is_rated(sets: Sets) -> NDArray[np.bool_]:
    rated = (sets.option("supply continuous power"), sets.option("supply peak power"))
    return np.full(len(sets), not np.all(np.isnan(rated)))


def _ratio_working(symbols: str, unit: str, measure: Callable[[Sets], Measure]) -> Callable[[Sets, int], str]:
    def working(sets: Sets, i: int) -> str:
        m = measure(sets)
        return (
            f"{symbols} = {digits(float(m.demand[i]))} {unit} / {digits(float(m.capacity[i]))} {unit} "
            f"= {digits(float(m.ratio()[i]))}"
        )

    return working


#: Without it less would be taken from the bus than the motor needs: on the safe side for braking alone.
_EFFICIENCY = (
    Need("drives", "efficiency", "efficiency"),
    Need("axis", "bus_partners", "efficiency of the drives of all other axes on the bus",
         known_by=lambda sets: np.full(len(sets), partners_known(sets))),
)  # fmt: skip


# -- highest voltage --------------------------------------------------------------------------------
def _voltage_measure(sets: Sets) -> Measure:
    b = sets.once(bus_results)
    return Measure(b.voltage_max_v, sets.drives.bus_voltage_max_v, b.voltage_max_at_s)


def _is_known(sets: Sets) -> NDArray[np.bool_]:
    """A clamp, or nothing that comes back, makes the capacitance needless."""
    return ~np.isnan(sets.once(bus_results).voltage_max_v)


def _is_held(sets: Sets) -> NDArray[np.bool_]:
    """Sets whose bus a chopper, or the supply, holds whatever the cycle does: the levels fit or do not."""
    b = sets.once(bus_results)
    stays = b.voltage_max_v == sets.surroundings.bus_max_v
    return np.asarray(~np.isnan(b.threshold_v) | stays | supply_feeds_back(sets))


def _voltage_working(sets: Sets, i: int) -> str:
    b, m, top = sets.once(bus_results), _voltage_measure(sets), sets.surroundings.bus_max_v
    demand, capacity = float(m.demand[i]), float(m.capacity[i])
    verdict = f"{digits(demand)} / {digits(capacity)} = {digits(float(m.ratio()[i]))}"
    if supply_feeds_back(sets):
        rise = demand - top
        by = f" and {digits(rise)} V of its internal resistance" if rise > 0.0 else ""
        return f"the supply takes regenerated energy back and holds the bus at {digits(top)} V{by}; {verdict}"
    if demand == top:
        return f"nothing comes back beyond the losses; the bus stays at {digits(top)} V; {verdict}"
    if np.isinf(demand):
        return "each cycle leaves more energy on the bus than the last, and nothing burns it"
    if b.brake_energy_j[i] > 0.0:
        return f"the chopper holds the bus at U_ch = {digits(demand)} V; {verdict}"
    C = float(b.capacitance_f[i])
    stored = 0.5 * C * (demand**2 - top**2)
    return (
        f"W_max = {digits(stored)} J above {digits(top)} V in C = {digits(C)} F; "
        f"U_max = √({digits(top)}² + 2 · {digits(stored)} / {digits(C)}) = {digits(demand)} V; {verdict}"
    )


BUS_MAXIMUM = Check(
    key="bus_maximum_voltage",
    title="Highest bus voltage",
    group="drive",
    unit="V",
    formula="U_max = √(U_0² + 2 W_max/C) or the chopper threshold ≤ U_drive,max; W in periodic steady state, "
    "from the highest supply voltage, dW/dt = −p, a rectifier never feeds back",
    source=_PRACTICE,
    needs=(
        Need("drives", "bus_voltage_max_v", "maximum bus voltage"),
        Need("drives", "capacitance_f", "internal capacitance", known_by=_is_known),
    ),
    measure=_voltage_measure,
    working=_voltage_working,
    is_fit_where=_is_held,
)


# -- chopper switches off ---------------------------------------------------------------------------
def _clamps(sets: Sets) -> NDArray[np.bool_]:
    return np.asarray(_has_resistor(sets) & ~np.isnan(sets.once(bus_results).threshold_v))


def _release_measure(sets: Sets) -> Measure:
    return Measure(_same(sets.surroundings.bus_max_v, sets), sets.once(bus_results).release_v)


CHOPPER_RELEASE = Check(
    key="chopper_release",
    title="Chopper release voltage",
    group="drive",
    unit="V",
    formula="U_bus,max ≤ U_ch − hysteresis, else the resistor burns power from the supply without end",
    source=f"{_PRACTICE}; no hysteresis where none is stated",
    needs=(),
    measure=_release_measure,
    working=_ratio_working("U_bus,max / (U_ch − h)", "V", _release_measure),
    applies=_clamps,
    is_fit=True,
)


# -- sag --------------------------------------------------------------------------------------------
def _sag_measure(sets: Sets) -> Measure:
    b = sets.once(bus_results)
    return Measure(b.sag_voltage_needed_v, b.sag_voltage_available_v, b.sag_at_s, b.sag_utilisation)


def _sags(sets: Sets) -> NDArray[np.bool_]:
    return np.full(len(sets), is_soft(sets))


def _limit_is_known(sets: Sets) -> NDArray[np.bool_]:
    """Rectified mains have no limit of current but their fuses."""
    regulated = supply_kind(sets) in (DC_SUPPLY, BATTERY)
    return np.full(len(sets), not regulated or not np.isnan(sets.option("supply current limit")))


_CURRENT_LIMIT = Need("axis", "supply current limit", "supply current limit", known_by=_limit_is_known)


def _is_bridged(sets: Sets) -> NDArray[np.bool_]:
    """Sets whose capacitors need not help, or are known; without an efficiency nothing is known of that yet."""
    b = sets.once(bus_results)
    return np.asarray(~np.isnan(b.voltage_min_v) | np.isnan(b.supply_power_peak_w))


_CAPACITANCE = Need("drives", "capacitance_f", "internal capacitance", known_by=_is_bridged)


BUS_SAG = Check(
    key="bus_sag",
    title="Voltage on a sagging bus",
    group="motor",
    unit="V",
    formula="max u ≤ U · m in the motor's basis at each instant, U = √(U(p)² − 2 W/C), "
    "U(p) = U_min/2 + √(U_min²/4 − R_s p), W what the capacitors give beyond the current limit",
    source="Internal resistance and current limit of the supply; first principles",
    needs=(*_EFFICIENCY, _CURRENT_LIMIT, _CAPACITANCE),
    measure=_sag_measure,
    working=_ratio_working("u / U(p) m", "V", _sag_measure),
    applies=_sags,
)


def _lowest_measure(sets: Sets) -> Measure:
    b = sets.once(bus_results)
    return Measure(sets.drives.bus_voltage_min_v, b.voltage_min_v, b.voltage_min_at_s)


BUS_MINIMUM = Check(
    key="bus_minimum_voltage",
    title="Lowest bus voltage",
    group="drive",
    unit="V",
    formula="U_drive,min ≤ min over the cycle of √(U(p)² − 2 W/C), U(p) = U_min/2 + √(U_min²/4 − R_s p), "
    "dW/dt = p − I_limit U_low beyond the current limit of the supply, U_low = max(U_drive,min, U_min/2)",
    source="Internal resistance and current limit of the supply, in periodic steady state; first principles",
    needs=(
        *_EFFICIENCY,
        Need("drives", "bus_voltage_min_v", "minimum bus voltage"),
        _CURRENT_LIMIT,
        _CAPACITANCE,
    ),
    measure=_lowest_measure,
    working=_ratio_working("U_drive,min / U_lowest", "V", _lowest_measure),
    applies=_sags,
)


# -- brake resistor ---------------------------------------------------------------------------------
def _connects(sets: Sets) -> NDArray[np.bool_]:
    """Sets whose chopper and resistor belong together, also on a cycle that gives nothing back: a stop will."""
    return np.asarray(_clamps(sets) | _burns(sets))


def _value_measure(sets: Sets) -> Measure:
    return Measure(sets.drives.brake_resistor_min_ohm, _same(sets.option("brake resistor"), sets))


BRAKE_VALUE = Check(
    key="brake_resistor_value",
    title="Brake resistor value",
    group="drive",
    unit="Ω",
    formula="R_min of the drive's chopper ≤ R",
    source="Smallest resistor of the data sheet",
    needs=(Need("drives", "brake_resistor_min_ohm", "minimum brake resistor"),),
    measure=_value_measure,
    working=_ratio_working("R_min / R", "Ω", _value_measure),
    applies=_connects,
    is_fit=True,
)


def _peak_measure(sets: Sets) -> Measure:
    b = sets.once(bus_results)
    return Measure(b.brake_power_peak_w, b.threshold_v**2 / sets.option("brake resistor"))


def _peak_working(sets: Sets, i: int) -> str:
    m, b = _peak_measure(sets), sets.once(bus_results)
    return (
        f"U_ch²/R = ({digits(float(b.threshold_v[i]))} V)² / {digits(sets.option('brake resistor'))} Ω = "
        f"{digits(float(m.capacity[i]))} W; {digits(float(m.demand[i]))} / {digits(float(m.capacity[i]))} "
        f"= {digits(float(m.ratio()[i]))}"
    )


BRAKE_PEAK = Check(
    key="brake_resistor_peak_power",
    title="Brake resistor peak power",
    group="drive",
    unit="W",
    formula="max of the power given back while the chopper clamps ≤ U_ch²/R, else the bus rises past the threshold",
    source=_PRACTICE,
    needs=(),
    measure=_peak_measure,
    working=_peak_working,
    applies=_burns,
)


def _mean_measure(sets: Sets) -> Measure:
    rating = sets.option("brake resistor continuous power")
    return Measure(sets.once(bus_results).brake_power_mean_w, _same(rating, sets))


BRAKE_MEAN = Check(
    key="brake_resistor_mean_power",
    title="Brake resistor mean power",
    group="drive",
    unit="W",
    formula="energy dumped per cycle / cycle time ≤ continuous power of the resistor",
    source=_PRACTICE,
    needs=(Need("axis", "brake resistor continuous power", "brake resistor continuous power"),),
    measure=_mean_measure,
    working=_ratio_working("P_mean / P_cont", "W", _mean_measure),
    applies=_burns,
    concerns=SUSTAINED,
)


def _pulse_measure(sets: Sets) -> Measure:
    b = sets.once(bus_results)
    if sets.case.resistor_pulses:
        with np.errstate(divide="ignore", invalid="ignore"):
            permitted = b.brake_pulse_j / b.brake_pulse_ratio
        return Measure(b.brake_pulse_j, permitted, None, b.brake_pulse_ratio)
    return Measure(b.brake_pulse_j, _same(sets.option("brake resistor pulse energy"), sets))


def _pulse_is_known(sets: Sets) -> NDArray[np.bool_]:
    stated = not np.isnan(sets.option("brake resistor pulse energy"))
    return np.full(len(sets), stated or bool(sets.case.resistor_pulses))


def _pulse_working(sets: Sets, i: int) -> str:
    lasts = float(sets.once(bus_results).brake_pulse_s[i])
    return f"in {digits(lasts)} s of clamping; E_pulse / E_max = {_pulse_measure(sets).quotient(i)}"


BRAKE_PULSE = Check(
    key="brake_resistor_pulse_energy",
    title="Brake resistor pulse energy",
    group="drive",
    unit="J",
    formula="largest energy dumped between two times of motoring, and what the hysteresis takes more, ≤ pulse energy "
    "of the resistor, from its curve over the length of the pulse where one is given",
    source=_PRACTICE,
    needs=(
        Need("axis", "brake resistor pulse energy", "brake resistor pulse energy", known_by=_pulse_is_known),
    ),
    measure=_pulse_measure,
    working=_pulse_working,
    applies=_burns,
)


# -- supply -----------------------------------------------------------------------------------------
def _supply_check(
    key: str,
    title: str,
    option: str,
    pick: Callable[[BusResults], Measure],
    formula: str,
    concerns: tuple[str, ...] = (),
) -> Check:
    def measure(sets: Sets) -> Measure:
        m = pick(sets.once(bus_results))
        return Measure(m.demand, _same(sets.option(option), sets), m.at_s)

    return Check(
        key=key,
        title=title,
        group="drive",
        unit="W",
        formula=formula,
        source="Power at the terminals over the drive's efficiency; ratings of the supply",
        needs=(*_EFFICIENCY, Need("axis", option, option)),
        measure=measure,
        working=_ratio_working("P / P_rated", "W", measure),
        applies=_supply_is_rated,
        concerns=concerns,
    )


SUPPLY_MEAN = _supply_check(
    "supply_mean_power",
    "Supply mean power",
    "supply continuous power",
    lambda b: Measure(b.supply_power_mean_w, b.supply_power_mean_w),
    "energy from the supply per cycle / cycle time ≤ continuous power of the supply",
    SUSTAINED,
)

SUPPLY_PEAK = _supply_check(
    "supply_peak_power",
    "Supply peak power",
    "supply peak power",
    lambda b: Measure(b.supply_power_peak_w, b.supply_power_peak_w, b.supply_power_peak_at_s),
    "max of the power taken from the bus, without help from the capacitors ≤ peak power of the supply",
)


def _may_charge(sets: Sets) -> NDArray[np.bool_]:
    """A battery has a limit; a supply that feeds back is held to one where it is stated."""
    stated = not np.isnan(sets.option("supply charging current"))
    return np.full(len(sets), supply_kind(sets) == BATTERY or (stated and supply_feeds_back(sets)))


def _charging_measure(sets: Sets) -> Measure:
    b = sets.once(bus_results)
    current = b.returned_power_peak_w / sets.surroundings.bus_min_v
    return Measure(current, _same(sets.option("supply charging current"), sets))


CHARGING_CURRENT = Check(
    key="supply_charging_current",
    title="Supply charging current",
    group="drive",
    unit="A",
    formula="max of the power given back / U_bus,min ≤ largest current that battery or supply takes",
    source="Power at the terminals times the drive's efficiency, capacitors left out; rating of the supply",
    needs=(Need("axis", "supply charging current", "supply charging current"),),
    measure=_charging_measure,
    working=_ratio_working("I / I_max", "A", _charging_measure),
    applies=_may_charge,
)


def _of_all_axes(check: Check) -> Check:
    """The check with a word in its working on the other axes on the bus, where there are any."""

    def working(sets: Sets, i: int) -> str:
        rule = joint_rule(sets)
        return f"{check.working(sets, i)}; {rule}" if rule else check.working(sets, i)

    return replace(check, working=working)


_CHECKS = (
    BUS_MAXIMUM,
    CHOPPER_RELEASE,
    BUS_SAG,
    BUS_MINIMUM,
    BRAKE_VALUE,
    BRAKE_PEAK,
    BRAKE_MEAN,
    BRAKE_PULSE,
    SUPPLY_MEAN,
    SUPPLY_PEAK,
    CHARGING_CURRENT,
)

BUS_CHECKS = tuple(map(_of_all_axes, _CHECKS))
