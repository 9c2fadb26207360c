"""Simulate one set: the cycle in closed loop, steps, sinusoids, stops and files of samples."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from actuator_sizing.case.columns import fold
from actuator_sizing.case.model import Case
from actuator_sizing.core.parameters import CURRENT_BASES
from actuator_sizing.core.plant import Plant
from actuator_sizing.core.tuning import LinearCascade, Tuning
from actuator_sizing.errors import InputError
from actuator_sizing.sizing.axis_plant import AxisPlant, axis_plant, option_number
from actuator_sizing.sizing.cycle_run import run_cycle
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.loop_analysis import loop_analysis
from actuator_sizing.sizing.loop_tuning import tuned
from actuator_sizing.sizing.open_loop import run_file, run_sine, run_step
from actuator_sizing.sizing.simulation_request import (
    MOST_SAMPLES,
    check_finite,
    check_length,
    find_set,
    wrong,
)
from actuator_sizing.sizing.simulation_results import Simulation
from actuator_sizing.sizing.stop_run import run_stop

if TYPE_CHECKING:
    from pathlib import Path

    from actuator_sizing.sizing.demand import Demand

#: Longest cycle that a report simulates.
MOST_REPORT_SAMPLES = 4_000_000


def simulate(
    case: Case,
    *,
    motor: str | None = None,
    gearhead: str | None = None,
    drive: str | None = None,
    input: str | Path = "cycle",  # noqa: A002 - the word of the trade
    settings: Mapping[str, float | str | bool] | None = None,
    rate_hz: float = math.nan,
    winding_degc: float = math.nan,
    settling_band: float = math.nan,
    cycles: int = 1,
    cycle: str = "",
) -> Simulation:
    """Simulate one set of motor, gearhead and drive.

    Parameters
    ----------
    case : Case
        The axis with its catalogs. [-]
    motor, gearhead, drive : str or None
        Names in the catalogs; no gearhead is direct drive. Without a motor, the best set of `compare`.
    input : str or Path
        ``"cycle"``: the duty cycle in closed loop. ``"step"``: a step of voltage, then of load torque.
        ``"sine"``: voltage plus a sinusoid. ``"stop"``: stops from the fastest instant. Else a CSV file of
        samples with the columns ``time [s]``, ``voltage [V]`` and, if wanted, ``load torque [Nm]``.
    settings : mapping or None
        Settings of the loops that replace the defaults, by the names of `LoopSettings`.
    rate_hz : float
        Sampling rate of the loops; NaN: the drive's control rate. [Hz]
    winding_degc : float
        Winding temperature; NaN: as the case judges it. [°C]
    settling_band : float
        Half width in the coordinate of the load, m or rad; NaN: what the case says. [-]
    cycles : int
        How many cycles are run one after another; only for ``"cycle"``. [-]
    cycle : str
        Name of the cycle, where the case has several; when empty the first one, for ``"stop"`` the one in which
        the driven shaft is fastest. [-]

    Returns
    -------
    Simulation
        Tables, quantities, settings and figures. [-]

    Raises
    ------
    InputError
        If a part or setting is not known, the loops are unstable, or the run would be too long.

    Notes
    -----
    Between samples the plant is propagated exactly; friction that depends on load, and a ratio that changes, act as
    they would on the planned motion. A sinusoidal machine with pole pairs has both axes in the closed loop (setting
    ``is_dq``); without a controller its direct axis is held at zero current.
    """
    parts = find_set(case, motor, gearhead, drive)
    if str(input) == "stop" and not cycle:
        case, demand = _fastest(case)
    else:
        case = _of_cycle(case, cycle)
        demand = build_demand(case, in_order=True)
    check_finite("rate_hz", rate_hz, "a sampling rate > 0 up to 1 MHz", 0.0, 1.0e6)
    check_finite("settling_band", settling_band, "a band > 0", 0.0, math.inf)
    check_finite("winding_degc", winding_degc, "−60 to 400 °C", -60.0, 400.0)
    if not 1 <= cycles <= 1_000_000:
        raise wrong("cycles", str(cycles), "1 to 1 000 000", "Ask for fewer cycles.")
    axis = axis_plant(case, demand, parts, winding_degc=winding_degc, rate_hz=rate_hz)
    in_dq = {"is_dq": axis.plant().reactance_ohm_s > 0.0}
    return simulate_set(axis, parts, input, {**in_dq, **(settings or {})}, settling_band, cycles)


def in_order(case: Case, demand: Demand) -> Demand:
    """Every instant of the cycle in its order, which a condensed record has lost.

    Parameters
    ----------
    case : Case
        The case. [-]
    demand : Demand
        Its cycle, perhaps condensed. [-]

    Returns
    -------
    Demand
        The same cycle. [-]
    """
    return demand if demand.slices is None else build_demand(case, in_order=True)


def _of_cycle(case: Case, name: str) -> Case:
    """The case with one of its cycles, by name; the first where none is asked for."""
    several = case.by_cycle()
    for each in several:
        if not name or fold(each.cycle.name) == fold(name):
            return each
    known = ", ".join(f"'{each.cycle.name}'" for each in several if each.cycle.name)
    raise wrong(
        "cycle", f"'{name}'", known or "a case that names cycles", "Choose one of the cycles of the case."
    )


def _fastest(case: Case) -> tuple[Case, Demand]:
    """The case with the cycle in which the driven shaft is fastest; stops from the others are shorter as a rule."""
    found = [(each, build_demand(each, in_order=True)) for each in case.by_cycle()]
    return max(found, key=lambda one: one[1].shaft_speed_peak)


def simulate_prepared(case: Case, demand: Demand, parts: tuple[int, int, int]) -> Simulation | None:
    """Simulate the cycle of one set with the default settings, for a report.

    Parameters
    ----------
    case : Case
        The case. [-]
    demand : Demand
        Its cycle. [-]
    parts : tuple of int
        Motor, gearhead and drive by their index in the catalogs. [-]

    Returns
    -------
    Simulation or None
        None where no stable settings exist, or for a cycle of more than four million samples.
    """
    axis = axis_plant(case, in_order(case, demand), parts, winding_degc=math.nan, rate_hz=math.nan)
    if demand.cycle_s * axis.rate_hz > MOST_REPORT_SAMPLES:
        return None
    try:
        return simulate_set(axis, parts, "cycle", {}, math.nan, 1)
    except InputError:
        return None


def simulate_set(
    axis: AxisPlant,
    parts: tuple[int, int, int],
    input_: str | Path,
    settings: Mapping[str, float | str | bool],
    settling_band: float,
    cycles: int,
) -> Simulation:
    """Simulate a prepared set; see `simulate`.

    Parameters
    ----------
    axis : AxisPlant
        The set. [-]
    parts : tuple of int
        Motor, gearhead and drive by their index in the catalogs. [-]
    input_ : str or Path
        What is commanded. [-]
    settings : mapping
        Settings of the loops that replace the defaults. [-]
    settling_band : float
        Half width in the coordinate of the load; NaN: what the case says. [-]
    cycles : int
        How many cycles. [-]

    Returns
    -------
    Simulation
        The answer. [-]
    """
    case = axis.case
    check_length(axis, input_, cycles)
    tuning = tuned(axis, settings)
    plant = axis.plant()
    bands = {
        "settling_band": option_number(case, "settling band") if math.isnan(settling_band) else settling_band,
        "allowed_following_error": option_number(case, "allowed following error"),
    }
    word = str(input_)
    if word == "cycle":
        run = run_cycle(axis, tuning.settings, bands["settling_band"], cycles)
    elif word == "step":
        run = run_step(axis, plant)
    elif word == "sine":
        run = run_sine(axis, plant)
    elif word == "stop":
        run = run_stop(axis, tuning.settings)
    else:
        run = run_file(input_, plant, axis, MOST_SAMPLES)
    answers = dict(run.quantities)
    stated = [value for value in bands.values() if not math.isnan(value)]
    if stated and answers.get("encoder_step_at_load", 0.0) > 0.0:
        answers["encoder_step_over_band_ratio"] = answers["encoder_step_at_load"] / min(stated)
    linear = LinearCascade(plant, tuning.settings)
    analysis = loop_analysis(linear)
    gearhead = case.gearheads.names[parts[1]]
    return Simulation(
        case_name=case.name,
        cycle=case.cycle.name,
        input=word,
        motor=case.motors.names[parts[0]],
        gearhead="direct" if bool(axis.model.gearhead.is_direct[0]) else gearhead,
        drive=case.drives.names[parts[2]],
        plant=plant,
        settings=tuning.settings,
        limited_by=tuning.limited_by,
        step_s=tuning.settings.sample_time_s,
        series=run.series,
        quantities={**_plant_quantities(plant, tuning, axis), **analysis.quantities, **answers},
        moves=run.moves,
        steps=analysis.steps,
        frequency=analysis.frequency,
        notes=(*axis.notes, *run.notes),
        current_basis=CURRENT_BASES[int(axis.model.motor.current_basis[0])],
        is_linear_load=case.mechanism.coordinate == "linear",
        is_linear_motor=case.mechanism.drives_linear_motor,
        bands=bands,
    )


def _plant_quantities(plant: Plant, tuning: Tuning, axis: AxisPlant) -> dict[str, Any]:
    """What the plant is, without any input."""
    two_pi = 2.0 * math.pi
    answer: dict[str, Any] = {
        "rate_hz": axis.rate_hz,
        "total_inertia_kg_m2": plant.total_inertia_kg_m2,
        "stiffness_nm_per_rad": plant.stiffness_nm_per_rad,
        "resonance_hz": plant.resonance_rad_s / two_pi,
        "antiresonance_hz": plant.antiresonance_rad_s / two_pi,
        "backlash_rad": plant.backlash_rad,
        "electrical_time_constant_s": plant.inductance_h / plant.resistance_ohm,
        "mechanical_time_constant_s": plant.resistance_ohm * plant.total_inertia_kg_m2
        / plant.torque_constant_nm_per_a**2,
        "current_bandwidth_hz": tuning.current_rad_s / two_pi,
        "speed_bandwidth_hz": tuning.speed_rad_s / two_pi,
        "position_bandwidth_hz": tuning.settings.position_gain_per_s / two_pi,
    }  # fmt: skip
    for number, pole in enumerate(plant.poles_per_s(), start=1):
        answer[f"pole_{number}_real_per_s"] = float(pole.real)
        answer[f"pole_{number}_imag_per_s"] = float(pole.imag)
    return answer
