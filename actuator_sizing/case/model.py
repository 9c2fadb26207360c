"""A case as understood: frozen, SI, every value with the place it came from."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.recording import Recording
from actuator_sizing.core.inertias import Part
from actuator_sizing.core.mechanisms import SHAFT, Mechanism
from actuator_sizing.core.motion_laws import Phase
from actuator_sizing.core.parameters import (
    DriveParameters,
    GearheadParameters,
    MotorParameters,
    Surroundings,
)
from actuator_sizing.core.process_load import ProcessLoad
from actuator_sizing.errors import Problem

MISSING, STATED, DERIVED, ASSUMED = 0, 1, 2, 3
ORIGINS = ("missing", "stated", "derived", "assumed")


@dataclass(frozen=True)
class Entry:
    """One input as entered and as understood."""

    table: str
    row: int | None  # as the user's spreadsheet shows it; None for a default nobody typed
    label: str  # part name, segment name or axis quantity
    column: str
    as_entered: str  # with the unit of the heading; empty when not entered
    value_si: float | str | None
    unit: str  # SI unit of value_si, empty for text
    origin: str  # stated, derived, assumed
    rule: str = ""  # how it was derived or why it was assumed
    source: str = ""


@dataclass(frozen=True)
class Segment:
    """One row of the duty cycle.

    Displacement, speeds and efforts are along the coordinate of the mechanism: m, m/s, N for a linear axis;
    rad, rad/s, N·m for a rotary one.
    """

    row: int
    name: str
    law: str
    phases: tuple[Phase, ...]
    start_s: float
    duration_s: float
    payload: float  # kg, or kg·m² for a rotary load
    process_effort: float  # positive opposes positive motion
    brake_closed: bool
    note: str = ""
    process: ProcessLoad | None = (
        None  # where the process effort is not constant; None: `process_effort` is all
    )


#: How a cycle runs: for ever; from cold each time; once from cold; once out of the warm state of the others.
REPEATS, SHORT_TIME, ONCE_COLD, ONCE_WARM = "repeats", "short-time", "once from cold", "once from warm"


@dataclass(frozen=True)
class Cycle:
    """One named cycle: its segments and how it runs."""

    name: str  # empty where a case has one cycle and does not name it
    segments: tuple[Segment, ...]
    runs: str = REPEATS
    share: float = float("nan")  # of the operating time; NaN: no mix is stated
    duty_type: str = ""  # of IEC 60034-1, where the cycle was made from one
    row: int | None = None  # in the table `cycles`

    @property
    def duration_s(self) -> float:
        """Duration of one run. [s]."""
        return sum(segment.duration_s for segment in self.segments)

    @property
    def repeats(self) -> bool:
        """Whether it runs again and again until its temperatures repeat."""
        return self.runs == REPEATS


@dataclass(frozen=True)
class Limit:
    """How one check is judged."""

    check: str
    applies: str  # "yes", "no" or "advice"
    allowed_utilisation: float
    recommended_reserve: float


@dataclass(frozen=True)
class Tolerance:
    """Distribution of one input quantity, for the robustness study.

    The distribution is about the value of the quantity. `width` is the standard deviation of a normal
    distribution, before it is truncated, and the half width of a uniform or triangular one.
    """

    row: int
    quantity: str
    distribution: str
    width: float  # in SI, or a part of the value where `relative`
    relative: bool
    table: str = ""  # "axis", "duty_cycle" or a catalog
    truncation: float = 3.0  # standard deviations at which a truncated normal distribution ends
    #: (table, quantity) of another spread -> correlation of the two as normal scores
    correlations: tuple[tuple[tuple[str, str], float], ...] = ()
    source: str = ""


@dataclass(frozen=True)
class Catalog:
    """One catalog table in columns: numbers in SI with their origin, text as typed.

    `values[column]` is a float array (NaN where missing) or an object array of str;
    `origins[column]` holds MISSING, STATED, DERIVED or ASSUMED per row;
    `rules[column]` holds, per row that is derived or assumed, the rule in words.
    """

    table: str
    names: tuple[str, ...]
    rows: NDArray[np.int64]
    values: Mapping[str, NDArray[np.float64] | NDArray[np.object_]]
    origins: Mapping[str, NDArray[np.int8]]
    headings: Mapping[str, str]  # column key -> heading as typed
    as_entered: Mapping[str, Sequence[str]]  # raw text per row, without the unit
    rules: Mapping[str, Mapping[int, str]] = field(default_factory=dict)
    entered_units: Mapping[str, str] = field(default_factory=dict)  # column key -> unit of the heading

    def __len__(self) -> int:
        return len(self.names)

    def row(self, index: int) -> Catalog:
        """One part of the catalog by itself."""
        one = slice(index, index + 1)
        return replace(
            self,
            names=self.names[one],
            rows=self.rows[one],
            values={key: column[one] for key, column in self.values.items()},
            origins={key: column[one] for key, column in self.origins.items()},
            as_entered={key: column[one] for key, column in self.as_entered.items()},
            rules={key: {0: rules[index]} for key, rules in self.rules.items() if index in rules},
        )


@dataclass(frozen=True)
class BusPartner:
    """Another axis on the same DC bus: one row of the table `bus_partners`."""

    row: int
    name: str
    path: str  # of its case, relative to the case that names it
    motor: str  # empty: the best set of that case
    gearhead: str  # empty: direct drive, or the best set
    drive: str
    offset_s: float  # start of its cycle after that of this axis; NaN: free
    axis: Case | None = None  # its case, once it has been read


@dataclass(frozen=True)
class Case:
    """Everything known about one axis."""

    name: str
    path: Path | None
    mechanism: Mechanism
    surroundings: Surroundings
    segments: tuple[Segment, ...]
    motors: Catalog
    gearheads: Catalog  # row 0 is direct drive (name "") unless the case excludes it
    drives: Catalog
    motor_parameters: MotorParameters
    gearhead_parameters: GearheadParameters
    drive_parameters: DriveParameters
    limits: Mapping[str, Limit]
    tolerances: tuple[Tolerance, ...]
    #: by name, e.g. "rank by": what mechanism and surroundings do not hold
    options: Mapping[str, float | str | None]
    entries: tuple[Entry, ...]  # axis, duty cycle and limits; catalog entries come from `catalog_entries`
    problems: tuple[Problem, ...]  # warnings and notes only; errors never make a Case
    fingerprint: str
    recording: Recording | None = None  # a measured cycle in place of planned segments
    partners: tuple[BusPartner, ...] = ()  # other axes on the same bus
    resistor_pulses: tuple[tuple[float, float], ...] = ()  # of the brake resistor: length [s] and energy [J]
    parts: tuple[Part, ...] = ()  # inertia inventory; already added to mechanism and gearhead parameters
    #: every cycle, `segments` being those of the first; empty: one without a name, which repeats
    cycles: tuple[Cycle, ...] = ()

    @property
    def cycle_duration_s(self) -> float:
        """Duration of one cycle. [s]."""
        return sum(segment.duration_s for segment in self.segments)

    @property
    def cycle(self) -> Cycle:
        """The cycle that `segments` are of."""
        return replace(self.cycles[0], segments=self.segments) if self.cycles else Cycle("", self.segments)

    def by_cycle(self) -> tuple[Case, ...]:
        """The case once for each of its cycles, with that cycle alone."""
        if len(self.cycles) < 2:
            return (self,)
        return tuple(replace(self, segments=cycle.segments, cycles=(cycle,)) for cycle in self.cycles)

    def with_segments(self, change: Callable[[tuple[Segment, ...]], tuple[Segment, ...]]) -> Case:
        """The case with the segments of every cycle changed alike.

        Parameters
        ----------
        change : callable
            From the segments of one cycle to others.
        """
        if len(self.cycles) < 2:
            return replace(self, segments=change(self.segments))
        cycles = tuple(replace(cycle, segments=change(cycle.segments)) for cycle in self.cycles)
        return replace(self, segments=cycles[0].segments, cycles=cycles)

    @property
    def motion_at_shaft(self) -> bool:
        """Whether the duty cycle states the motion of the driven shaft rather than that of the load."""
        return (self.options.get("motion stated at") or self.mechanism.motion_at) == SHAFT

    def number(self, option: str) -> float:
        """Value of an option that is a number and has a default.

        Parameters
        ----------
        option : str
            Name in the `axis` table.

        Returns
        -------
        float
            In SI. [-]

        Raises
        ------
        TypeError
            If the option is a word, or has neither value nor default.
        """
        value = self.options[option]
        if not isinstance(value, int | float):
            raise TypeError(f"option '{option}' is not a number but {value!r}")
        return float(value)

    def catalog_entries(self, table: str, index: int) -> tuple[Entry, ...]:
        """Every known value of one catalog row, as entered and as understood.

        Parameters
        ----------
        table : str
            ``"motors"``, ``"gearheads"`` or ``"drives"``.
        index : int
            Row index into the catalog (0-based). [-]
        """
        from actuator_sizing.case.understanding import entries_of_row

        return entries_of_row(getattr(self, table), index)
