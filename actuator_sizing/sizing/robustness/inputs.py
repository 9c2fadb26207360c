"""The spread inputs of one set: their values, their distributions, and how they vary together."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.columns import Column
from actuator_sizing.case.model import Case, Tolerance
from actuator_sizing.case.spreadable import SURROUNDING_OF, targets
from actuator_sizing.case.spreads import distribution_of, reach_complaint
from actuator_sizing.core.distributions import Distribution, mixing_matrix
from actuator_sizing.errors import InputError, Problem
from actuator_sizing.units import si_unit

FloatArray = NDArray[np.float64]

_TABLE = "tolerances"
#: Standard deviations at which an input without ends is held in swings, where nothing bounds it.
SWING_DEVIATIONS = 2.0


@dataclass(frozen=True)
class SpreadInput:
    """One input that spreads.

    Attributes
    ----------
    spread : Tolerance
        As stated. [-]
    column : Column
        Declaration of the quantity. [-]
    label, unit : str
        Name with its table where the name alone would not tell; SI unit. [-]
    distribution : Distribution
        About the value of this set. [-]
    """

    spread: Tolerance
    column: Column
    label: str
    unit: str
    distribution: Distribution

    @property
    def is_bounded(self) -> bool:
        """Whether the distribution ends."""
        return bool(np.isfinite(self.distribution.bounds[0]))

    @property
    def swing(self) -> tuple[float, float]:
        """Low and high value of a swing: the ends, or two standard deviations where there are none. [-]"""
        if self.is_bounded:
            return self.distribution.bounds
        reach = SWING_DEVIATIONS * self.distribution.width
        return self.distribution.centre - reach, self.distribution.centre + reach


@dataclass(frozen=True)
class SpreadInputs:
    """The d inputs of a study.

    Attributes
    ----------
    inputs : tuple of SpreadInput
        In the order of the table. [-]
    correlation : ndarray, shape (d, d)
        Of their normal scores. [-]
    left_out : tuple of str
        Why a row of the table does not act on this set. [-]
    """

    inputs: tuple[SpreadInput, ...]
    correlation: FloatArray
    left_out: tuple[str, ...]

    def __len__(self) -> int:
        return len(self.inputs)

    @property
    def nominal(self) -> FloatArray:
        """Values without spread, shape (d,). [-]"""
        return np.array([one.distribution.centre for one in self.inputs])

    @property
    def groups(self) -> tuple[tuple[int, ...], ...]:
        """Inputs that vary together, each group independent of the others."""
        linked = self.correlation != 0.0
        left = list(range(len(self)))
        found = []
        while left:
            group, border = {left[0]}, [left[0]]
            while border:
                near = {int(j) for j in np.flatnonzero(linked[border.pop()])} - group
                group |= near
                border += sorted(near)
            found.append(tuple(sorted(group)))
            left = [i for i in left if i not in group]
        return tuple(found)

    def group_label(self, group: tuple[int, ...]) -> str:
        """Names of a group in one line."""
        return " with ".join(self.inputs[i].label for i in group)

    def of_scores(self, scores: FloatArray) -> FloatArray:
        """Values from independent standard normal scores, shape (N, d) both. [-]"""
        mixed = scores @ mixing_matrix(self.correlation).T if len(self) else scores
        columns = [one.distribution.of_scores(mixed[:, i]) for i, one in enumerate(self.inputs)]
        return np.stack(columns, axis=1) if columns else np.empty((len(scores), 0))


def spread_inputs(case: Case) -> SpreadInputs:
    """Spread inputs of a case of one set.

    Parameters
    ----------
    case : Case
        A case with one motor, gearhead and drive, catalogs included. [-]

    Returns
    -------
    SpreadInputs
        Rows that do not act on this set are left out, with the reason. [-]

    Raises
    ------
    InputError
        If a width in units of a catalog column is wider than the value of the chosen part.
    """
    found: list[SpreadInput] = []
    left_out: list[str] = []
    problems: list[Problem] = []
    names = [spread.quantity for spread in case.tolerances]
    for spread in case.tolerances:
        column = next(
            t.column for t in targets(spread.quantity, type(case.mechanism)) if t.table == spread.table
        )
        value, part = _value(case, spread, column)
        label = spread.quantity if names.count(spread.quantity) == 1 else f"{spread.table} {spread.quantity}"
        if np.isnan(value):
            left_out.append(f"{label}: {part or 'the case'} states no value")
            continue
        if value == 0.0 and spread.relative:
            left_out.append(f"{label}: a percentage of zero is nothing; state the width in units")
            continue
        complaint = reach_complaint(spread, column, value, part)
        if complaint is not None:
            problems.append(Problem(_TABLE, spread.row, "width", *complaint))
        found.append(
            SpreadInput(spread, column, label, _unit(case, spread, column), distribution_of(spread, value))
        )
    if problems:
        raise InputError(problems)
    return SpreadInputs(tuple(found), _correlation(found), tuple(left_out))


def _correlation(found: list[SpreadInput]) -> FloatArray:
    place = {(one.spread.table, one.spread.quantity): i for i, one in enumerate(found)}
    matrix = np.eye(len(found))
    for i, one in enumerate(found):
        for other, value in one.spread.correlations:
            j = place.get(other)
            if j is not None:
                matrix[i, j] = matrix[j, i] = value
    return matrix


def _unit(case: Case, spread: Tolerance, column: Column) -> str:
    if spread.table == "duty_cycle" and column.name == "payload":
        side = "linear" if case.mechanism.carries_mass() else "rotary"
    elif spread.table in ("axis", "duty_cycle"):
        side = case.mechanism.coordinate
    else:
        side = column.machine or "rotary"
    return si_unit(column.kind_for(side))


def _value(case: Case, spread: Tolerance, column: Column) -> tuple[float, str]:
    """Value of a quantity of one set, NaN where none is stated, and the part that has it."""
    if spread.table == "axis":
        return axis_value(case, column), ""
    if spread.table == "duty_cycle":
        if case.recording is not None and column.name != "payload":
            return np.nan, "a measured cycle"
        return _duty_value(case, column.name), ""
    catalog = getattr(case, spread.table)
    if spread.table == "gearheads" and case.gearhead_parameters.is_direct[0]:
        return np.nan, "direct drive"
    values = catalog.values.get(column.key)
    return (np.nan if values is None else float(values[0])), catalog.names[0]


def axis_value(case: Case, column: Column) -> float:
    """Value of a quantity of the axis as stated, in SI; parts of the inertia inventory are not in it. [-]"""
    for entry in case.entries:
        if entry.table == "axis" and entry.label == column.name and isinstance(entry.value_si, int | float):
            return float(entry.value_si)
    field = SURROUNDING_OF.get(column.key)
    if field is not None:
        return float(getattr(case.surroundings, field))
    if hasattr(case.mechanism, column.key):
        return float(getattr(case.mechanism, column.key))
    value = case.options.get(column.name)
    return float(value) if isinstance(value, int | float) else np.nan


def _duty_value(case: Case, name: str) -> float:
    """Largest payload, process effort of largest magnitude, or duration of the cycle. [-]"""
    if name == "duration":
        return case.cycle_duration_s
    segments = [segment for one in case.by_cycle() for segment in one.segments]
    if name == "payload":
        return max(segment.payload for segment in segments)
    efforts = [segment.process_effort for segment in segments]
    for segment in segments:
        if segment.process is not None:
            efforts += segment.process.efforts
    return max(efforts, key=abs)
