"""What the command line prints of a simulation: one screen of answers and settings."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import click

from actuator_sizing.console import clean

if TYPE_CHECKING:
    from actuator_sizing.sizing.simulation_results import Simulation

#: Quantities whose name does not end in their unit: those of the load, in its coordinate.
_AT_LOAD = {"following_error_peak", "following_error_rms", "overshoot", "encoder_step_at_load"}
_SHOWN = (
    "following_error_peak", "following_error_peak_at_s", "following_error_rms", "overshoot", "settling_time_s",
    "settling_available_s", "current_peak_a", "current_rms_a", "direct_current_peak_a", "voltage_peak_v",
    "current_saturated_s",
    "voltage_saturated_s", "encoder_step_at_load",
    "encoder_step_over_band_ratio", "step_voltage_v", "step_final_speed_rad_s", "step_rise_time_s",
    "step_peak_time_s", "step_overshoot_ratio", "step_settling_time_s", "step_peak_current_a",
    "load_step_nm", "load_step_speed_change_rad_s", "sine_frequency_hz", "sine_amplitude_v", "ripple_current_a",
    "ripple_current_phase_rad", "ripple_speed_rad_s", "ripple_speed_phase_rad", "stop_from_speed_rad_s",
    "stop_reaction_s",
    "controlled_stop_s", "controlled_stop_distance", "shorted_stop_s", "shorted_stop_distance",
    "shorted_stop_peak_current_a", "final_speed_rad_s", "final_angle_rad", "speed_peak_rad_s", "events",
    "resonance_hz", "antiresonance_hz", "current_bandwidth_hz", "speed_bandwidth_hz", "position_bandwidth_hz",
    "speed_phase_margin_rad", "speed_gain_margin_ratio", "speed_sensitivity_peak_ratio",
    "position_phase_margin_rad", "disturbance_stiffness_min_nm_per_rad",
)  # fmt: skip
_DISTANCES = {"controlled_stop_distance", "shorted_stop_distance"}
_STOPS = {"controlled_stop_s", "shorted_stop_s"}


def print_simulation(simulation: Simulation, written: Sequence[Path]) -> None:
    """Print what a simulation found to stdout.

    Parameters
    ----------
    simulation : Simulation
        The answer.
    written : sequence of Path
        Files that were written.
    """
    from actuator_sizing.report.loop_settings import setting_unit

    of_cycle = f" of the cycle '{clean(simulation.cycle)}'" if simulation.cycle else ""
    has_cycle = simulation.input in ("cycle", "stop")
    click.echo(
        f"{clean(simulation.label)}, input {clean(simulation.input)}{of_cycle if has_cycle else ''}, "
        f"every {simulation.step_s:.4g} s"
    )
    for line in _answers(simulation):
        click.echo(line)
    for move in simulation.moves.itertuples():
        settled = "not judged: no settling band" if math.isnan(move.settling_time_s) else _seconds(move)
        click.echo(f"  stop after {clean(str(move.segment))}: {settled}")
    click.echo(f"settings (SI; the speed loop is limited by: {simulation.limited_by})")
    for name, value in simulation.gains.items():
        shown = value if isinstance(value, str | bool) else format(value, ".5g")
        click.echo(f"  {name} = {shown} {setting_unit(name)}".rstrip())
    for note in simulation.notes:
        click.echo(f"note: {clean(note)}")
    if written:
        click.echo(f"Files: {written[0].parent} ({len(written)})")


def _seconds(move: object) -> str:
    time, available = float(move.settling_time_s), float(move.available_s)  # type: ignore[attr-defined]
    if math.isinf(time):
        return f"does not settle within the dwell of {available:.4g} s"
    return f"settled after {time:.4g} s of {available:.4g} s"


def _answers(simulation: Simulation) -> Iterator[str]:
    from actuator_sizing.units import suffix_unit

    load = "m" if simulation.is_linear_load else "rad"
    for name in _SHOWN:
        value = simulation.quantities.get(name)
        if name in _STOPS and value is not None and math.isnan(value):
            yield _does_not_stop(simulation, name.removesuffix("_s"))
        if value is None or (isinstance(value, float) and math.isnan(value)):
            continue
        unit = load if name in _AT_LOAD | _DISTANCES else suffix_unit(name) or ""
        words = name
        for label in ("_rad_s", "_nm_per_rad", "_rad", "_hz", "_nm", "_ratio", "_a", "_v", "_s"):
            if name.endswith(label) and name not in _AT_LOAD:
                words = name[: -len(label)]
                break
        if name in _DISTANCES:
            sense = "along" if value >= 0.0 else "against"
            yield f"  {words.replace('_', ' ')}: {abs(float(value)):.5g} {unit} {sense} +x"
            continue
        yield f"  {words.replace('_', ' ')}: {float(value):.5g} {unit}".rstrip(" -")


def _does_not_stop(simulation: Simulation, name: str) -> str:
    speed, time = (simulation.quantities[f"{name}_{what}"] for what in ("final_speed_rad_s", "watched_s"))
    unit = "m/s" if simulation.is_linear_motor else "rad/s"
    return (
        f"  {name.replace('_', ' ')}: does not come to rest; after {time:.4g} s the motor still moves at "
        f"{speed:.4g} {unit}"
    )
