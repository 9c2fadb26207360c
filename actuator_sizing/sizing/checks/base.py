"""How a check is declared: once, for screening, evaluation, report and limits table alike."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import REPEATS, SHORT_TIME
from actuator_sizing.core.parameters import (
    DriveParameters,
    GearheadParameters,
    MotorParameters,
    Surroundings,
)

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case
    from actuator_sizing.sizing.block import Block
    from actuator_sizing.sizing.bounds import Bound
    from actuator_sizing.sizing.demand import Demand
    from actuator_sizing.sizing.dynamic_results import DynamicResults
    from actuator_sizing.sizing.evaluation import PairResults
    from actuator_sizing.sizing.joint_bus import PartnerPower
    from actuator_sizing.sizing.thermal_start import ThermalStart

FloatArray = NDArray[np.float64]
WAY = "m or rad"  # unit of a way of the load: metres or radians by the mechanism
_T = TypeVar("_T")
_TABLES = ("motors", "gearheads", "drives")


@dataclass(frozen=True)
class Sets:
    """S sets of motor, gearhead and drive, evaluated: what a check measures."""

    case: Case
    index: NDArray[np.intp]  # (S, 3) motor, gearhead, drive
    demand: Demand
    surroundings: Surroundings
    recommended_inertia_ratio: float
    motors: MotorParameters
    gearheads: GearheadParameters
    drives: DriveParameters
    pairs: PairResults
    #: drive side, in amperes of the drive's own basis
    drive_current_peak_a: FloatArray
    drive_current_rms_a: FloatArray  # largest over the drive's window
    drive_current_rms_at_s: FloatArray
    overload_a2s: FloatArray  # largest i²t accumulator in the periodic regime
    overload_at_s: FloatArray
    partners: tuple[PartnerPower, ...] = ()  # other axes on the same bus
    dynamics: DynamicResults | None = None  # where the case asks how the axis moves
    start: ThermalStart | None = None  # of a cycle that does not repeat until its temperatures do
    _found: dict[Callable[[Sets], Any], Any] = field(default_factory=dict, repr=False)

    def __len__(self) -> int:
        return len(self.motors)

    def once(self, study: Callable[[Sets], _T]) -> _T:
        """Result of a study of these sets that several checks share, made when first asked for."""
        if study not in self._found:
            self._found[study] = study(self)
        result: _T = self._found[study]
        return result

    def only(self, index: int) -> Sets:
        """One of the sets by itself."""
        row = slice(index, index + 1)
        taken = {name: getattr(self, name).take(row) for name in ("motors", "gearheads", "drives", "pairs")}
        arrays = {
            name: getattr(self, name)[row]
            for name in (
                "index",
                "drive_current_peak_a",
                "drive_current_rms_a",
                "drive_current_rms_at_s",
                "overload_a2s",
                "overload_at_s",
            )
        }
        start = None if self.start is None else self.start.take(row)
        dynamics = None if self.dynamics is None else self.dynamics.take(row)
        return replace(self, **taken, **arrays, start=start, dynamics=dynamics, _found={})

    def option(self, name: str) -> float:
        """Quantity of the `axis` table in SI, NaN where nothing is known."""
        value = self.case.options.get(name)
        return float(value) if isinstance(value, int | float) else np.nan

    def word(self, name: str) -> str:
        """Word of the `axis` table, empty where nothing is known."""
        value = self.case.options.get(name)
        return value if isinstance(value, str) else ""

    def states(self, *names: str) -> bool:
        """Whether the case states one of these quantities of the `axis` table."""
        return any(self.word(name) or not np.isnan(self.option(name)) for name in names)

    def catalog_values(self, table: str, column: str) -> FloatArray:
        """Column of a catalog for each set, shape (S,), in SI; NaN where nothing is known."""
        values = getattr(self.case, table).values.get(column)
        if values is None:
            return np.full(len(self), np.nan)
        return np.asarray(values[self.index[:, _TABLES.index(table)]], dtype=float)

    def catalog_word_is(self, table: str, column: str, word: str) -> NDArray[np.bool_]:
        """Whether the part of each set has this word in a column of its catalog, shape (S,). [-]"""
        values = getattr(self.case, table).values.get(column)
        if values is None:
            return np.zeros(len(self), dtype=bool)
        return np.asarray(values[self.index[:, _TABLES.index(table)]].astype(object) == word)

    def catalog_asks(self, table: str, *columns: str) -> bool:
        """Whether a part of the catalog states one of these numbers; then all of its parts are asked."""
        known = (getattr(self.case, table).values.get(column) for column in columns)
        return any(values is not None and not np.isnan(values).all() for values in known)


@dataclass(frozen=True)
class Measure:
    """Demand and capacity of S sets in SI; `utilisation` only where it is not demand/capacity."""

    demand: FloatArray
    capacity: FloatArray
    at_s: FloatArray | None = None
    utilisation: FloatArray | None = None

    def instant(self, index: int) -> float:
        """When the demand of one set is largest; NaN where the check has no instant. [s]"""
        return np.nan if self.at_s is None else float(self.at_s[index])

    def ratio(self) -> FloatArray:
        """Utilisation, shape (S,); infinite where there is demand but no capacity. [-]"""
        if self.utilisation is not None:
            return self.utilisation
        with np.errstate(divide="ignore", invalid="ignore"):
            ratio = self.demand / self.capacity
        return np.where((self.demand == 0.0) & (self.capacity == 0.0), 0.0, ratio)

    def quotient(self, index: int) -> str:
        """Demand over capacity of one set with its numbers put in, the end of most workings."""
        return (
            f"{digits(self.demand[index])} / {digits(self.capacity[index])} = {digits(self.ratio()[index])}"
        )


@dataclass(frozen=True)
class Need:
    """One datum without which a check cannot be made.

    `part` is ``"motors"``, ``"gearheads"``, ``"drives"``, ``"pairs"`` or ``"dynamics"`` with `field` its
    parameter or the key of a column of the catalog, or ``"axis"`` with `field` a quantity of that table. `column`
    is the heading a user would fill in (for linear motors `linear_column`). `known_by` tells where the datum is
    not needed.
    """

    part: str
    field: str
    column: str
    linear_column: str = ""
    known_by: Callable[[Sets], NDArray[np.bool_]] | None = None

    def known(self, sets: Sets) -> NDArray[np.bool_]:
        """Which of the sets have it, shape (S,). [-]"""
        if self.known_by is not None:
            return self.known_by(sets)
        if self.part == "axis":
            return np.full(len(sets), sets.states(self.field))
        parameters = getattr(sets, self.part)
        if parameters is None:
            return np.zeros(len(sets), dtype=bool)
        if not hasattr(parameters, self.field):
            return ~np.isnan(sets.catalog_values(self.part, self.field))
        value = np.asarray(getattr(parameters, self.field))
        return value if value.dtype == bool else ~np.isnan(value)


def _always(sets: Sets) -> NDArray[np.bool_]:
    return np.ones(len(sets), dtype=bool)


#: Means over a cycle that comes again and again; a single run has none that could be held against a rating.
SUSTAINED = (REPEATS,)
#: Wear counts what is done often, from warm or from cold.
OFTEN = (REPEATS, SHORT_TIME)


def way_unit(sets: Sets) -> str:
    """Unit of the way of the load. [-]"""
    return "m" if sets.case.mechanism.coordinate == "linear" else "rad"


def everywhere(value: float, sets: Sets) -> FloatArray:
    """The same value for every set, shape (S,), in its own unit. [-]"""
    return np.full(len(sets), value)


def applies_if(asked: Callable[[Sets], bool]) -> Callable[[Sets], NDArray[np.bool_]]:
    """Mask of a check that concerns every set or none, by what the case states."""
    return lambda sets: np.full(len(sets), asked(sets))


def quotient_working(
    symbols: str, unit: str, measure: Callable[[Sets], Measure]
) -> Callable[[Sets, int], str]:
    """Working of a check that is nothing but demand over capacity."""

    def working(sets: Sets, i: int) -> str:
        m = measure(sets)
        numbers = (digits(float(value[i])) for value in (m.demand, m.capacity))
        shown = " / ".join(f"{number} {unit}".rstrip() for number in numbers)
        return f"{symbols} = {shown} = {digits(float(m.ratio()[i]))}"

    return working


def has_gearhead(sets: Sets) -> NDArray[np.bool_]:
    """Sets with a gearhead, shape (S,). [-]"""
    return ~sets.gearheads.is_direct


@dataclass(frozen=True)
class Check:
    """One check.

    Attributes
    ----------
    key, title, group : str
        Name in results and in the `limits` table; as printed; "motor", "drive", "gearhead" or "axis".
    unit, linear_unit : str
        SI unit of demand and capacity, for rotary and for linear motors.
    formula, source : str
        The equation in symbols, and where it comes from.
    needs : tuple of Need
        Data without which the verdict is "not checked".
    measure : callable
        Sets → Measure.
    bound : callable or None
        Screening block → lower bound of the utilisation, as `sizing.bounds` declares it.
    working : callable
        (sets, index) → the formula with its numbers put in.
    applies : callable
        Sets → mask of the sets that the check concerns.
    is_advice : bool
        Never fails unless the user makes it a limit.
    is_fit : bool
        Parts fit together or do not: such a check governs only where it fails.
    concerns : tuple of str
        How a cycle must run for the check to concern it, as in the table `cycles`; empty: in any way.
    is_fit_where : callable or None
        Sets → mask of the sets for which it is such a matter, and a reserve would mean nothing.
    binds_where : callable or None
        Sets → mask of the sets whose sheets state what the check needs; it only advises on the others, for which it
        goes by a rule of thumb.
    yields_to : str
        Key of the check that fails too wherever this one is infinite, and says by how much.
    """

    key: str
    title: str
    group: str
    unit: str
    formula: str
    source: str
    needs: tuple[Need, ...]
    measure: Callable[[Sets], Measure]
    working: Callable[[Sets, int], str]
    bound: Callable[[Block], Bound] | None = None
    applies: Callable[[Sets], NDArray[np.bool_]] = _always
    linear_unit: str = ""
    is_advice: bool = False
    is_fit: bool = False
    concerns: tuple[str, ...] = ()
    binds_where: Callable[[Sets], NDArray[np.bool_]] | None = None
    is_fit_where: Callable[[Sets], NDArray[np.bool_]] | None = None
    yields_to: str = ""

    def concerns_cycle(self, runs: str) -> bool:
        """Whether a cycle that runs in this way is judged by the check."""
        return not self.concerns or runs in self.concerns


def digits(value: float) -> str:
    """A number of a working with five significant digits, so that a calculator confirms it."""
    return f"{value:.5g}"
