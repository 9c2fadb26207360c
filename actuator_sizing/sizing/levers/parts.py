"""Another part of the catalog in place of one of a set: the cheapest that passes, and the next step in size."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.machine import amplitude_per_unit_current
from actuator_sizing.sizing.case_changes import single
from actuator_sizing.sizing.cycles import CycleDemand, evaluate_cycles
from actuator_sizing.sizing.fitting import compatible, fits_axis
from actuator_sizing.sizing.judging import ORDER, active_checks, judge_sets
from actuator_sizing.sizing.resizing import PASS, Resizing
from actuator_sizing.sizing.results import FAILS, LOW_RESERVE

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

_BLOCK = 64  # parts evaluated at a time
#: By table: what orders the parts of a catalog by size, as it is printed.
SIZES = {"motors": "continuous torque", "gearheads": "ratio", "drives": "continuous current"}


@dataclass(frozen=True)
class PartAnswer:
    """Another part of one catalog that lets the set pass; None where none does."""

    table: str
    present: str
    cheapest: str | None
    next_step: str | None  # nearest in size

    def as_mapping(self) -> Mapping[str, Any]:
        """For results.json and report."""
        return {
            "lever": f"other_{self.table.removesuffix('s')}",
            "title": f"another of the {self.table}",
            "unit": "",
            "present": self.present,
            "needed": self.cheapest,
            "next_step": self.next_step,
            "ordered_by": SIZES[self.table],
            "helps": self.cheapest is not None,
        }


def other_parts(
    cycles: tuple[CycleDemand, ...], case: Case, motor: int, gearhead: int, drive: int, goal: str = PASS
) -> tuple[PartAnswer, ...]:
    """The cheapest other motor, gearhead or drive that alone lets the set pass, and the one nearest in size.

    Parameters
    ----------
    cycles : tuple of CycleDemand
        The cycles of the whole case. [-]
    case : Case
        The whole case. [-]
    motor, gearhead, drive : int
        The set, by index into the catalogs. [-]
    goal : str
        `resizing.PASS` or `resizing.RESERVE`.

    Returns
    -------
    tuple of PartAnswer
        One for each catalog. [-]
    """
    motors, gearheads = fits_axis(case)
    served = compatible(case.motor_parameters, case.drive_parameters)
    base = np.array([motor, gearhead, drive])
    m, g, d = case.motor_parameters, case.gearhead_parameters, case.drive_parameters
    catalogs = (
        ("motors", m.price, m.torque_constant_nm_per_a * m.continuous_current_a, motors[served[motors, drive]]),
        ("gearheads", g.price, g.ratio, gearheads),
        ("drives", d.price, d.continuous_current_a * amplitude_per_unit_current(d.current_basis),
         np.flatnonzero(served[motor])),
    )  # fmt: skip
    answers = []
    for column, (table, price, size, others) in enumerate(catalogs):
        others = others[others != base[column]]
        own = size[base[column]]
        with np.errstate(divide="ignore", invalid="ignore"):
            distance = np.abs(np.log(size[others] / own))
        trial = _Trial(cycles, case, base, column, goal)
        found = [
            trial.first_passing(others[np.argsort(np.nan_to_num(key, nan=np.inf), kind="stable")])
            for key in (price[others], distance)
        ]
        names = getattr(case, table).names
        cheapest, nearest = (None if i is None else names[i] or "direct drive" for i in found)
        answers.append(PartAnswer(table, names[base[column]] or "direct drive", cheapest, nearest))
    return tuple(answers)


class _Trial:
    """Other parts of one catalog in a set; each is evaluated once, however it is ordered."""

    def __init__(self, cycles: tuple[CycleDemand, ...], case: Case, base: IndexArray, column: int, goal: str):
        self._cycles, self._case = cycles, case
        self._base, self._column, self._goal = base, column, goal
        self._passes: dict[int, bool] = {}

    def first_passing(self, ordered: IndexArray) -> int | None:
        """First of the parts, in their order, with which the set reaches the goal; confirmed by sizing it alone."""
        for start in range(0, len(ordered), _BLOCK):
            block = ordered[start : start + _BLOCK]
            self._evaluate(
                np.array([part for part in block.tolist() if part not in self._passes], dtype=np.intp)
            )
            for part in block.tolist():
                if self._passes[part] and self._confirmed(part):
                    return int(part)
        return None

    def _evaluate(self, parts: IndexArray) -> None:
        if not len(parts):
            return
        checks, limits = active_checks(self._case.limits)
        verdicts = judge_sets(evaluate_cycles(self._cycles, self._sets(parts)), checks, limits)
        worst = ORDER.index(FAILS if self._goal == PASS else LOW_RESERVE)
        self._passes.update(zip(parts.tolist(), (verdicts.verdict < worst).tolist(), strict=True))

    def _sets(self, parts: IndexArray) -> IndexArray:
        index = np.tile(self._base, (len(parts), 1))
        index[:, self._column] = parts
        return index

    def _confirmed(self, part: int) -> bool:
        """Sized alone, with the simulation where the case asks how the axis moves."""
        alone = single(self._case, *self._sets(np.array([part]))[0].tolist())
        self._passes[part] = Resizing.known(alone, self._cycles, self._goal).outcome(alone).is_met
        return self._passes[part]
