"""Simulate one set: the cycle in closed loop, steps, sinusoids, stops and files of samples."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import fields, replace
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.columns import fold
from actuator_sizing.case.model import Case
from actuator_sizing.core.control import LoopSettings
from actuator_sizing.core.parameters import CURRENT_BASES
from actuator_sizing.core.plant import Plant
from actuator_sizing.core.tuning import LinearCascade, Tuning, default_tuning
from actuator_sizing.errors import InputError, Problem
from actuator_sizing.sizing.axis_plant import AxisPlant, axis_plant, option_number
from actuator_sizing.sizing.cycle_run import run_cycle
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.loop_analysis import loop_analysis
from actuator_sizing.sizing.open_loop import run_file, run_sine, run_step
from actuator_sizing.sizing.simulation_results import Simulation
from actuator_sizing.sizing.stop_run import run_stop

if TYPE_CHECKING:
    from pathlib import Path

    from actuator_sizing.sizing.demand import Demand

FloatArray = NDArray[np.float64]

#: Longest run, so that every run ends; about a quarter of a minute without the optional compiler.
MOST_SAMPLES = 10_000_000
#: Longest cycle that a report simulates.
MOST_REPORT_SAMPLES = 1_000_000


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
        Name of the cycle, where the case has several; the first one when empty. [-]

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
    Between samples the plant is propagated exactly; friction that depends on load, and a ratio that changes,
    act as they would on the planned motion.
    """
    parts = find_set(case, motor, gearhead, drive)
    case = _of_cycle(case, cycle)
    demand = build_demand(case)
    _check_finite("rate_hz", rate_hz, "a sampling rate > 0 up to 1 MHz", 0.0, 1.0e6)
    _check_finite("settling_band", settling_band, "a band > 0", 0.0, math.inf)
    _check_finite("winding_degc", winding_degc, "−60 to 400 °C", -60.0, 400.0)
    if not 1 <= cycles <= 1_000_000:
        raise _wrong("cycles", str(cycles), "1 to 1 000 000", "Ask for fewer cycles.")
    axis = axis_plant(case, demand, parts, winding_degc=winding_degc, rate_hz=rate_hz)
    return simulate_set(axis, parts, input, settings or {}, settling_band, cycles)


def _of_cycle(case: Case, name: str) -> Case:
    """The case with one of its cycles, by name; the first where none is asked for."""
    several = case.by_cycle()
    for each in several:
        if not name or fold(each.cycle.name) == fold(name):
            return each
    known = ", ".join(f"'{each.cycle.name}'" for each in several if each.cycle.name)
    raise _wrong(
        "cycle", f"'{name}'", known or "a case that names cycles", "Choose one of the cycles of the case."
    )


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
        None where no stable settings exist, or for a cycle of more than a million samples.
    """
    axis = axis_plant(case, demand, parts, winding_degc=math.nan, rate_hz=math.nan)
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
    _check_length(axis, input_, cycles)
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
    linear = LinearCascade(plant, tuning.settings)
    analysis = loop_analysis(linear)
    gearhead = case.gearheads.names[parts[1]]
    return Simulation(
        case_name=case.name,
        input=word,
        motor=case.motors.names[parts[0]],
        gearhead="direct" if bool(axis.model.gearhead.is_direct[0]) else gearhead,
        drive=case.drives.names[parts[2]],
        plant=plant,
        settings=tuning.settings,
        limited_by=tuning.limited_by,
        step_s=tuning.settings.sample_time_s,
        series=run.series,
        quantities={**_plant_quantities(plant, tuning, axis), **analysis.quantities, **run.quantities},
        moves=run.moves,
        steps=analysis.steps,
        frequency=analysis.frequency,
        notes=(*axis.notes, *run.notes),
        current_basis=CURRENT_BASES[int(axis.model.motor.current_basis[0])],
        is_linear_load=case.mechanism.coordinate == "linear",
        is_linear_motor=case.mechanism.drives_linear_motor,
        bands=bands,
    )


def tuned(axis: AxisPlant, given: Mapping[str, float | str | bool]) -> Tuning:
    """Settings of the loops: the default ones, with what the user replaces.

    Parameters
    ----------
    axis : AxisPlant
        The set. [-]
    given : mapping
        Settings by the names of `LoopSettings`. [-]

    Returns
    -------
    Tuning
        Stable settings. [-]

    Raises
    ------
    InputError
        If a name or value is wrong, or the loops are unstable.
    """
    names = {f.name: f for f in fields(LoopSettings)}
    for name in given:
        if name not in names or name == "sample_time_s":
            raise _wrong(name, "an unknown setting", ", ".join(n for n in names if n != "sample_time_s"),
                         "Use one of these names; the sampling rate has its own argument.")  # fmt: skip
    plant = axis.plant()
    turn = option_number(axis.case, "encoder counts per turn")
    base = LoopSettings(
        sample_time_s=1.0 / axis.rate_hz,
        position_gain_per_s=0.0,
        speed_gain_a_s_per_rad=0.0,
        speed_reset_time_s=math.inf,
        current_gain_v_per_a=0.0,
        current_reset_time_s=math.inf,
        current_limit_a=axis.current_limit_a,
        voltage_limit_v=axis.voltage_limit_v,
        reactance_ohm_s=plant.reactance_ohm_s,
        encoder_step_rad=0.0 if math.isnan(turn) else 2.0 * math.pi / turn,
    )
    changed = {name: value for name, value in given.items()}
    try:
        base = replace(base, **{k: v for k, v in changed.items() if k not in _GAINS})  # type: ignore[arg-type]
        tuning = _for_every_payload(axis, base)
        used = replace(tuning.settings, **changed)  # type: ignore[arg-type]
    except (ValueError, TypeError) as error:
        raise _wrong("settings", str(error), "settings that mean something", "Change the settings.") from None
    if not changed:
        return tuning
    for one in _payloads(axis):
        radius = LinearCascade(one, used).spectral_radius
        if not radius < 1.0:
            raise _wrong(
                "settings",
                f"loops that are unstable (largest pole {radius:.4g} per sample)",
                "poles inside the unit circle",
                "Lower the gains, or sample faster.",
            )
    speed = used.speed_gain_a_s_per_rad * plant.torque_constant_nm_per_a / plant.total_inertia_kg_m2
    current = used.current_gain_v_per_a / plant.inductance_h
    limited = tuning.limited_by if not set(changed) & _GAINS else "stated settings"
    return Tuning(used, current, speed, limited)


def _payloads(axis: AxisPlant) -> list[Plant]:
    """The plants of the cycle, the heaviest first."""
    plants = {axis.plant(segment) for segment in axis.case.segments}
    return sorted(plants, key=lambda plant: -plant.load_inertia_kg_m2)


def _for_every_payload(axis: AxisPlant, base: LoopSettings) -> Tuning:
    """Settings for the heaviest payload with which the lighter ones are stable too."""
    plants = _payloads(axis)
    rise = axis.case.surroundings.current_loop_rise_s
    for plant in plants:
        tuning = default_tuning(plant, base, current_rise_s=rise)
        if all(LinearCascade(other, tuning.settings).spectral_radius < 1.0 for other in plants):
            return tuning
    raise ValueError("no settings of the loops are stable with every payload of the cycle")


def parse_settings(changes: tuple[str, ...]) -> dict[str, float | str | bool]:
    """Settings typed as ``name=value``.

    Parameters
    ----------
    changes : tuple of str
        Such as ``"position_gain_per_s=40"``; yes and no for what is switched.

    Returns
    -------
    dict
        By name. [-]

    Raises
    ------
    InputError
        If one is not a name, an equals sign and a value.

    Examples
    --------
    >>> parse_settings(("position_gain_per_s=40", "is_delayed=no"))
    {'position_gain_per_s': 40.0, 'is_delayed': False}
    """
    answer: dict[str, float | str | bool] = {}
    for change in changes:
        name, equals, text = (part.strip() for part in change.partition("="))
        if not equals or not name or not text:
            raise _wrong(name or "settings", repr(change), "name=value", "Write for example is_delayed=no.")
        if name == "anti_windup":
            answer[name] = text
        elif text in ("yes", "no"):
            answer[name] = text == "yes"
        else:
            try:
                answer[name] = float(text)
            except ValueError:
                raise _wrong(name, repr(text), "a number in SI, yes or no", "Correct the value.") from None
    return answer


_GAINS = {
    "position_gain_per_s", "speed_gain_a_s_per_rad", "speed_reset_time_s", "current_gain_v_per_a",
    "current_reset_time_s",
}  # fmt: skip


def find_set(case: Case, motor: str | None, gearhead: str | None, drive: str | None) -> tuple[int, int, int]:
    """Find the parts of a set in the catalogs by their names.

    Parameters
    ----------
    case : Case
        The case. [-]
    motor, gearhead, drive : str or None
        Names; no gearhead (or ``"direct"``) is direct drive. Without a motor, the best set of `compare`.

    Returns
    -------
    tuple of int
        Motor, gearhead and drive by their index in the catalogs. [-]

    Raises
    ------
    InputError
        If a name is not in its catalog.
    """
    if motor is None and gearhead is None and drive is None:
        from actuator_sizing.sizing.comparison import compare

        best = compare(case, detail=1).best
        return best.motor_index, best.gearhead_index, best.drive_index
    if motor is None or drive is None:
        missing = "motor" if motor is None else "drive"
        raise _wrong(missing, "no name", f"motor and drive, or neither of them for the best set of {case.name}",
                     f"Name the {missing}.")  # fmt: skip
    if gearhead in (None, "direct") and gearhead not in case.gearheads.names:
        direct = np.flatnonzero(case.gearhead_parameters.is_direct)
        if not len(direct):
            raise _wrong("gearhead", "no name", "a gearhead: direct drive is not allowed",
                         "Name a gearhead.")  # fmt: skip
        gear = int(direct[0])
    else:
        gear = _index(case.gearheads.names, str(gearhead), "gearheads")
    return _index(case.motors.names, motor, "motors"), gear, _index(case.drives.names, drive, "drives")


def _index(names: tuple[str, ...], name: str, table: str) -> int:
    if name in names:
        return names.index(name)
    from actuator_sizing.case.columns import nearest

    close = nearest(name, (n for n in names if n))
    remedy = f"Did you mean '{close}'?" if close else f"The names stand in the first column of {table}."
    raise InputError([Problem(table, None, table[:-1], f"'{name}'", "a name in the table", remedy)])


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


def _check_length(axis: AxisPlant, input_: str | Path, cycles: int) -> None:
    if str(input_) != "cycle":
        return
    samples = axis.model.demand.cycle_s * cycles * axis.rate_hz
    if samples > MOST_SAMPLES:
        raise _wrong("cycles", f"{samples:.3g} samples of {1.0 / axis.rate_hz:.3g} s",
                     f"at most {MOST_SAMPLES:,} samples".replace(",", " "),
                     "Ask for fewer cycles or a lower rate.")  # fmt: skip
    if samples < 10.0:
        raise _wrong("rate", f"{axis.rate_hz:g} Hz", "at least ten samples in a cycle", "Raise the rate.")


def _check_finite(name: str, value: float, allowed: str, low: float, high: float) -> None:
    if math.isnan(value):
        return  # not given
    if not low < value <= high or math.isinf(value):
        raise _wrong(name, repr(value), allowed, "Give a value in this range.")


def _wrong(what: str, got: str, allowed: str, remedy: str) -> InputError:
    return InputError([Problem("simulate", None, what, got, allowed, remedy)])
