"""B samples of one set: the case with its spread inputs moved, all samples at once or one of them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import DERIVED, Case, Catalog, Segment
from actuator_sizing.case.spreadable import INVERSE, PARAMETER_OF, PROPORTIONAL, SURROUNDING_OF
from actuator_sizing.core.mechanisms.base import back_driving_efficiency
from actuator_sizing.core.parameters import (
    DriveParameters,
    GearheadParameters,
    MotorParameters,
    Surroundings,
)
from actuator_sizing.sizing.case_changes import restarted, stretched
from actuator_sizing.sizing.robustness.inputs import SpreadInput, SpreadInputs

FloatArray = NDArray[np.float64]

_PARTS = {"motors": "motor_parameters", "gearheads": "gearhead_parameters", "drives": "drive_parameters"}


@dataclass(frozen=True)
class Change:
    """How a quantity of several segments moves: ``new = old · factor + added`` where the old is not zero."""

    factor: FloatArray  # (B,)
    added: FloatArray  # (B,)

    def of(self, value: float) -> FloatArray:
        """New values of one segment, shape (B,). [-]"""
        if value == 0.0:
            return np.zeros_like(self.factor)
        return np.asarray(value * self.factor + np.copysign(1.0, value) * self.added)


@dataclass(frozen=True)
class Samples:
    """B samples of the one set of a case.

    Attributes
    ----------
    case : Case
        The set without spread. [-]
    count : int
        B. [-]
    motors, gearheads, drives : MotorParameters, GearheadParameters, DriveParameters
        B rows each. [-]
    surroundings : Surroundings
        Fields that spread have shape (B,), the others are numbers. [-]
    mechanism : mapping of str to ndarray
        Fields of the mechanism that spread, shape (B,). [-]
    segments : mapping of str to Change
        ``"payload"``, ``"process force"`` or ``"duration"``, where they spread. [-]
    options : mapping of str to ndarray
        Options of the axis that spread, shape (B,). [-]
    """

    case: Case
    count: int
    motors: MotorParameters
    gearheads: GearheadParameters
    drives: DriveParameters
    surroundings: Surroundings
    mechanism: Mapping[str, FloatArray]
    segments: Mapping[str, Change]
    options: Mapping[str, FloatArray]

    def __len__(self) -> int:
        return self.count

    @property
    def moves_demand(self) -> bool:
        """Whether what the driven shaft must do differs from sample to sample."""
        return bool(self.mechanism or self.segments)

    @property
    def moves_surroundings(self) -> bool:
        """Whether supply, ambient or an option of the axis differs from sample to sample."""
        return bool(self.options) or any(np.ndim(value) for value in vars(self.surroundings).values())

    def part(self, which: slice) -> Samples:
        """Some of the samples, in order."""

        def cut(value: Any) -> Any:
            return value[which] if np.ndim(value) else value

        return Samples(
            self.case,
            len(range(self.count)[which]),
            self.motors.take(which),
            self.gearheads.take(which),
            self.drives.take(which),
            replace(self.surroundings, **{k: cut(v) for k, v in vars(self.surroundings).items()}),
            {name: value[which] for name, value in self.mechanism.items()},
            {name: Change(c.factor[which], c.added[which]) for name, c in self.segments.items()},
            {name: value[which] for name, value in self.options.items()},
        )

    def parts_only(self) -> Case:
        """The case with every sample as a part of its own, and surroundings of shape (B,) where they spread."""
        rows = np.zeros(self.count, dtype=np.intp)
        return replace(
            self.case,
            motor_parameters=self.motors,
            gearhead_parameters=self.gearheads,
            drive_parameters=self.drives,
            surroundings=self.surroundings,
            motors=rows_of(self.case.motors, rows),
            gearheads=rows_of(self.case.gearheads, rows),
            drives=rows_of(self.case.drives, rows),
        )

    def one(self, index: int) -> Case:
        """The case of one sample."""
        row = slice(index, index + 1)

        def number(value: Any) -> Any:
            return float(value[index]) if np.ndim(value) else value

        moved = {name: float(value[index]) for name, value in self.mechanism.items()}
        mechanism = replace(self.case.mechanism, **moved) if moved else self.case.mechanism  # type: ignore[type-var]
        changes = {name: Change(c.factor[row], c.added[row]) for name, c in self.segments.items()}
        return replace(
            self.case.with_segments(lambda segments: _segments(segments, changes)),
            motor_parameters=self.motors.take(row),
            gearhead_parameters=self.gearheads.take(row),
            drive_parameters=self.drives.take(row),
            surroundings=replace(
                self.surroundings, **{k: number(v) for k, v in vars(self.surroundings).items()}
            ),
            mechanism=mechanism,
            options={**self.case.options, **{name: float(v[index]) for name, v in self.options.items()}},
        )


def rows_of(catalog: Catalog, rows: NDArray[np.intp]) -> Catalog:
    """Catalog with the given rows of another, repeated as often as they are named.

    Parameters
    ----------
    catalog : Catalog
        Part table. [-]
    rows : ndarray of int, shape (n,)
        Rows to take. [-]
    """
    return replace(
        catalog,
        names=tuple(catalog.names[i] for i in rows),
        rows=catalog.rows[rows],
        values={key: values[rows] for key, values in catalog.values.items()},
        origins={key: origins[rows] for key, origins in catalog.origins.items()},
    )


def samples_of(case: Case, inputs: SpreadInputs, values: FloatArray) -> Samples:
    """Samples of the one set of a case.

    Parameters
    ----------
    case : Case
        A case with one motor, gearhead and drive. [-]
    inputs : SpreadInputs
        The d inputs. [-]
    values : ndarray, shape (B, d)
        Their values, in SI. [-]

    Returns
    -------
    Samples
        A derived value keeps its own: the thermal resistance that follows from a rated point does not move with
        the resistance, nor a continuous current with the torque constant, since both are what the motor stands. Only
        a back-driving efficiency that follows from the efficiency follows it. [-]
    """
    count = len(values)
    parts: dict[str, Any] = {
        table: getattr(case, name).take(np.zeros(count, dtype=np.intp)) for table, name in _PARTS.items()
    }
    surroundings: dict[str, FloatArray] = {}
    mechanism: dict[str, FloatArray] = {}
    segments: dict[str, Change] = {}
    options: dict[str, FloatArray] = {}
    for one, value in zip(inputs.inputs, values.T, strict=True):
        key, nominal = one.column.key, one.distribution.centre
        if one.spread.table in _PARTS:
            parts[one.spread.table] = _moved(parts[one.spread.table], one, value)
        elif one.spread.table == "duty_cycle":
            segments[one.column.name] = _change(one, value)
        elif key in SURROUNDING_OF:
            surroundings |= _supply(case, key, value, nominal)
        elif hasattr(case.mechanism, key):
            mechanism[key] = getattr(case.mechanism, key) + (value - nominal)
        else:
            options[one.column.name] = value
    if "efficiency" in {one.column.key for one in inputs.inputs if one.spread.table == "gearheads"}:
        parts["gearheads"] = _with_back_driving(case, parts["gearheads"])
    return Samples(
        case,
        count,
        **parts,
        surroundings=replace(case.surroundings, **surroundings),  # type: ignore[arg-type]
        mechanism=mechanism,
        segments=segments,
        options=options,
    )


def _moved(parameters: Any, one: SpreadInput, value: FloatArray) -> Any:
    """Parameters with the field of one catalog column moved."""
    name, how = PARAMETER_OF[one.spread.table][one.column.key]
    old, nominal = getattr(parameters, name), one.distribution.centre
    if how == PROPORTIONAL and nominal != 0.0:
        new = old * (value / nominal)
    elif how == INVERSE:
        new = old * (nominal / value)
    else:
        new = old + (value - nominal)
    return replace(parameters, **{name: new})


def _with_back_driving(case: Case, gearheads: GearheadParameters) -> GearheadParameters:
    origins = case.gearheads.origins.get("back_driving_efficiency")
    if origins is None or origins[0] != DERIVED:
        return gearheads
    derived = back_driving_efficiency(gearheads.efficiency)  # type: ignore[arg-type]
    return replace(gearheads, efficiency_back=np.asarray(derived))


def _supply(case: Case, key: str, value: FloatArray, nominal: float) -> dict[str, FloatArray]:
    """One of the surroundings; limits of the bus that follow from its nominal voltage follow it here too."""
    moved = {SURROUNDING_OF[key]: value}
    if key == "nominal_bus_voltage":
        for name, field in (("minimum bus voltage", "bus_min_v"), ("maximum bus voltage", "bus_max_v")):
            if any(e.label == name and e.origin != "stated" for e in case.entries if e.table == "axis"):
                moved[field] = getattr(case.surroundings, field) * (value / nominal)
    return moved


def _change(one: SpreadInput, value: FloatArray) -> Change:
    nominal = one.distribution.centre
    if one.spread.relative or one.column.name == "duration":
        return Change(value / nominal, np.zeros_like(value))
    return Change(np.ones_like(value), np.copysign(1.0, nominal) * (value - nominal))


# -- one sample of the duty cycle ---------------------------------------------------------------------------


def _segments(segments: tuple[Segment, ...], changes: Mapping[str, Change]) -> tuple[Segment, ...]:
    """Segments with the one sample of each change; every segment alike."""
    if not changes:
        return segments
    payload, process, duration = (changes.get(name) for name in ("payload", "process force", "duration"))
    made = []
    for segment in segments:
        new = segment
        if payload is not None:
            new = replace(new, payload=float(payload.of(segment.payload)[0]))
        if process is not None:
            load = segment.process
            if load is not None:
                load = replace(load, efforts=tuple(float(process.of(e)[0]) for e in load.efforts))
            new = replace(new, process_effort=float(process.of(segment.process_effort)[0]), process=load)
        if duration is not None:
            new = stretched(new, float(duration.factor[0]))
        made.append(new)
    return restarted(tuple(made)) if duration is not None else tuple(made)


__all__ = ["Change", "Samples", "rows_of", "samples_of"]
