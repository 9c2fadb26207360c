"""The table `resistor_pulses`: what a brake resistor takes in one pulse, over the length of the pulse."""

from __future__ import annotations

import numpy as np

from actuator_sizing.case.catalogs import check_required
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList

_TABLE = "resistor_pulses"
_ROUNDING = 1e-9


def understand_pulses(parsed: ParsedTable | None, problems: ProblemList) -> tuple[tuple[float, float], ...]:
    """Points of the pulse curve, length and energy; empty where there is none or something is wrong.

    Parameters
    ----------
    parsed : ParsedTable or None
        The table with each cell judged; None where there is none.
    problems : ProblemList
        Takes rows out of order, energies that fall and power that rises.
    """
    if parsed is None:
        return ()
    check_required(parsed)
    seconds, joules = parsed.number("pulse_duration"), parsed.number("pulse_energy")
    previous = np.concatenate([[np.nan], seconds[:-1]]), np.concatenate([[np.nan], joules[:-1]])
    with np.errstate(invalid="ignore", divide="ignore"):
        back = seconds <= previous[0]
        falls = joules < previous[1] * (1.0 - _ROUNDING)
        rises = joules / seconds > previous[1] / previous[0] * (1.0 + _ROUNDING)
    problems.report_rows(
        _TABLE, parsed.rows, parsed.heading("pulse_duration"), back,
        got=lambda i: parsed.shown_cell("pulse_duration", i),
        allowed=lambda i: f"longer than in the row before, {parsed.shown_cell('pulse_duration', i - 1)}",
        remedy="Sort the rows by the length of the pulse and remove repeated ones.",
    )  # fmt: skip
    problems.report_rows(
        _TABLE, parsed.rows, parsed.heading("pulse_energy"), (falls | rises) & ~back,
        got=lambda i: parsed.shown_cell("pulse_energy", i),
        allowed=lambda i: "at least the energy, and at most the power, of the shorter pulse in the row before",
        remedy="A longer pulse may carry more energy, but not at a higher power: check units and rows.",
    )  # fmt: skip
    if (back | falls | rises).any() or not (np.isfinite(seconds) & np.isfinite(joules)).all():
        return ()
    return tuple(zip(seconds.tolist(), joules.tolist(), strict=True))
