"""How the leading set moves: errors, loops and their settings, settling after each move."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import Column, Facts, FigureBlock, Paragraph, Section, Table, row
from actuator_sizing.report.formatting import number, quantity
from actuator_sizing.report.loop_settings import setting_unit
from actuator_sizing.report.text import clean

if TYPE_CHECKING:
    from collections.abc import Iterable

    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.sizing.results import Comparison
    from actuator_sizing.sizing.simulation_results import Simulation

_FIGURES = {
    "cycle_response": "The cycle under the sampled cascade; a panel is shaded where current or voltage was limited.",
    "following_error": "Commanded minus true position of the load over the cycle.",
    "loop_steps": "Unit steps of the loops without limits and friction, each with what is inside it closed.",
    "bode": "Open loops with gain and phase margin; the dashed verticals are resonance and antiresonance.",
}
_QUANTITIES = (
    ("resonance (free against free)", "resonance_hz", "Hz"),
    ("antiresonance (load on the spring)", "antiresonance_hz", "Hz"),
    ("bandwidth of the current loop", "current_bandwidth_hz", "Hz"),
    ("bandwidth of the speed loop", "speed_bandwidth_hz", "Hz"),
    ("gain of the position loop over 2π", "position_bandwidth_hz", "Hz"),
    ("time with limited current", "current_saturated_s", "s"),
    ("time with limited voltage", "voltage_saturated_s", "s"),
    ("least stiffness against a torque on the load, at the motor shaft", "disturbance_stiffness_min_nm_per_rad",
     "N·m/rad"),
)  # fmt: skip


def dynamics_section(comparison: Comparison, figures: Iterable[str]) -> Section | None:
    """Place the simulation of the leading set, or how to get it; None without any set.

    Parameters
    ----------
    comparison : Comparison
        The answer.
    figures : iterable of str
        Keys of the figures that were drawn.
    """
    drawn = set(figures)
    simulation = comparison.dynamics
    if simulation is None:
        return _without(comparison)
    blocks: list[Block] = [
        Paragraph(
            f"Simulated with default settings of the loops, sampled every {quantity(simulation.step_s, 's')}; the "
            f"speed loop is limited by: {simulation.limited_by}. Conditions: "
            f"{'; '.join(map(clean, simulation.notes))}."
        ),
        Facts(_facts(simulation), "Errors and bandwidths"),
        _margins(simulation),
    ]
    if len(simulation.moves):
        blocks.append(_moves(simulation))
    blocks.append(
        Facts(
            tuple((name, f"{clean(value) if isinstance(value, str) else _plain(value)} {setting_unit(name)}".rstrip())
                  for name, value in simulation.gains.items()),
            "Settings of the loops, in SI and in the motor's kind of ampere; change them by --set NAME=VALUE",
        )
    )  # fmt: skip
    peak = _at_load(simulation, "following_error_peak")
    blocks += [
        FigureBlock(key, caption, f"Largest following error of the load {peak}.")
        for key, caption in _FIGURES.items()
        if key in drawn
    ]
    return Section("dynamics", "Dynamics", tuple(blocks))


def _without(comparison: Comparison) -> Section | None:
    """How to get this section, or why the leading set could not be simulated."""
    if not comparison.sets:
        return None
    best = comparison.sets[0]
    command = " ".join(
        ["actuator-sizing simulate CASE", f'--motor "{clean(best.motor)}"',
         *([f'--gearhead "{clean(best.gearhead)}"'] if best.gearhead else []), f'--drive "{clean(best.drive)}"']
    )  # fmt: skip
    asked = best.detail is not None and best.detail.simulation is not None
    why = (
        "The leading set was not simulated: no settings of the loops are stable with reserve, or its cycle has more "
        "than four million samples. "
        if asked
        else "Not asked for. State settling band, allowed following error or required speed bandwidth in the table "
        "axis, and settling, following error, stability reserve and resonance are judged and shown here. "
    )
    return Section("dynamics", "Dynamics", (Paragraph(f"{why}This set alone, at once: {command}"),))


def _plain(value: float | bool) -> str:
    if isinstance(value, bool):
        return "yes" if value else "no"
    return "none" if math.isinf(value) else number(float(value), 5)


def _at_load(simulation: Simulation, key: str) -> str:
    return quantity(simulation.quantities[key], "m" if simulation.is_linear_load else "rad")


def _facts(simulation: Simulation) -> tuple[tuple[str, str], ...]:
    rows = [
        ("largest following error of the load", _at_load(simulation, "following_error_peak")),
        ("RMS following error", _at_load(simulation, "following_error_rms")),
    ]
    step = simulation.quantities.get("encoder_step_over_band_ratio", math.nan)
    if math.isfinite(step):
        rows.append(
            ("step of the encoder at the load over the tightest band", f"{number(100.0 * step, 3)} %")
        )
    rows += [
        (label, quantity(simulation.quantities[key], unit))
        for label, key, unit in _QUANTITIES
        if math.isfinite(simulation.quantities[key])
    ]
    return tuple(rows)


def _margins(simulation: Simulation) -> Table:
    q = simulation.quantities
    rows = []
    for loop in ("current", "speed", "position"):
        if f"{loop}_phase_margin_rad" not in q:
            continue
        gain = q[f"{loop}_gain_margin_ratio"]
        rows.append(
            row(
                loop,
                number(q[f"{loop}_crossover_hz"], 3) if math.isfinite(q[f"{loop}_crossover_hz"]) else "none",
                number(math.degrees(q[f"{loop}_phase_margin_rad"]), 3)
                if math.isfinite(q[f"{loop}_phase_margin_rad"])
                else "none",
                number(gain, 3) if math.isfinite(gain) else "none",
                number(q[f"{loop}_sensitivity_peak_ratio"], 3),
                number(100.0 * q[f"{loop}_step_overshoot_ratio"], 3),
            )
        )
    columns = (
        Column("loop"), Column("gain one at [Hz]", True), Column("phase margin [°]", True),
        Column("gain margin [-]", True), Column("peak of the sensitivity [-]", True),
        Column("overshoot of a step [%]", True),
    )  # fmt: skip
    return Table("Reserve of the loops", columns, tuple(rows))


def _moves(simulation: Simulation) -> Table:
    unit = "m" if simulation.is_linear_load else "rad"
    rows = []
    for move in simulation.moves.itertuples():
        time = float(move.settling_time_s)
        settled = (
            "no band given" if math.isnan(time) else "not within" if math.isinf(time) else quantity(time, "s")
        )
        rows.append(
            row(clean(str(move.segment)), quantity(float(move.available_s), "s"), settled,
                quantity(float(move.overshoot), unit))
        )  # fmt: skip
    columns = (
        Column("after"),
        Column("dwell", True),
        Column("settled after", True),
        Column("overshoot", True),
    )
    return Table("Settling after each move", columns, tuple(rows))
