"""Sheet of how the leading set moves: what was asked, answers, settling after each move, settings of the loops."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.headings import name_and_unit
from actuator_sizing.report.loop_settings import setting_unit
from actuator_sizing.report.workbook.writer import Field, Sheets

if TYPE_CHECKING:
    from actuator_sizing.sizing.results import Comparison
    from actuator_sizing.sizing.simulation_results import Simulation

_AT_LOAD = {"following_error_peak", "following_error_rms", "overshoot", "encoder_step_at_load"}
_FIELDS = (Field("kind"), Field("quantity"), Field("value", "number"), Field("unit"))


def add_dynamics(sheets: Sheets, comparison: Comparison) -> None:
    """Write the simulation of the leading set in SI; no sheet where the case asks for none.

    Parameters
    ----------
    sheets : Sheets
        The workbook.
    comparison : Comparison
        The answer.
    """
    simulation = comparison.governing.dynamics
    if simulation is not None:
        sheets.add_table("dynamics", _FIELDS, list(_rows(simulation)))


def _rows(simulation: Simulation) -> Iterator[tuple[str, str, Any, str]]:
    load = "m" if simulation.is_linear_load else "rad"
    yield "set", "motor + gearhead + drive", simulation.label, ""
    yield "answer", "bandwidth of the speed loop limited by", simulation.limited_by, ""
    for name, value in simulation.bands.items():
        yield "asked", name.replace("_", " "), value, load
    for name, value in simulation.quantities.items():
        if isinstance(value, float) and math.isnan(value):
            continue
        words, unit = (name.replace("_", " "), load) if name in _AT_LOAD else name_and_unit(name)
        yield "answer", words, value, unit
    for move in simulation.moves.itertuples():
        yield "settling", f"after {move.segment}", _settled(move.settling_time_s), "s"
        yield "settling", f"dwell after {move.segment}", float(move.available_s), "s"
        yield "settling", f"overshoot after {move.segment}", float(move.overshoot), load
    for name, setting in simulation.gains.items():
        yield "setting", name, setting, setting_unit(name)
    for number, note in enumerate(simulation.notes, start=1):
        yield "condition", str(number), note, ""


def _settled(time_s: float) -> float | str | None:
    """Infinite: still outside the band when the next move begins."""
    if math.isnan(time_s):
        return None
    return "not within the dwell" if math.isinf(time_s) else float(time_s)
