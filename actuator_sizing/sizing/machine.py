"""Several axes of one machine: what they need together, and which parts they could share."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence
from concurrent.futures import Executor
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any

from actuator_sizing.errors import InputError, Problem
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.machine_bus import AxisPower, CommonBus, axis_power, common_buses
from actuator_sizing.sizing.machine_motors import MotorTypes, motor_types
from actuator_sizing.version import __version__

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case
    from actuator_sizing.sizing.results import Comparison, SetResult

Progress = Callable[[str, float], None]


@dataclass(frozen=True)
class MachineAxis:
    """One axis with its own comparison."""

    name: str  # unlike that of any other axis
    comparison: Comparison

    @property
    def best(self) -> SetResult:
        """The leading set."""
        return self.comparison.best

    @property
    def passes(self) -> bool:
        """Whether its leading set passes."""
        return self.comparison.passes

    @property
    def cycle_s(self) -> float | None:
        """Duration of its cycle; None where it has several. [s]"""
        return None if self.comparison.cycles else self.comparison.demand.cycle_s

    @cached_property
    def power(self) -> AxisPower | None:
        """Power of the leading set at the bus; None where not known."""
        return axis_power(self.comparison)


@dataclass(frozen=True)
class SharedPart:
    """A part that leads on more than one axis."""

    table: str  # "motors", "gearheads" or "drives"
    name: str
    axes: tuple[str, ...]


@dataclass(frozen=True)
class Machine:
    """All axes of one machine, each with its leading set, and what they come to."""

    name: str
    axes: tuple[MachineAxis, ...]
    shared_parts: tuple[SharedPart, ...]
    motor_types: MotorTypes
    buses: tuple[CommonBus, ...]
    version: str = __version__

    @property
    def passes(self) -> bool:
        """Whether every axis has a set that passes."""
        return all(axis.passes for axis in self.axes)

    @property
    def price(self) -> float | None:
        """Price of the leading sets, in the currency of the catalogs; None where one is not known."""
        return _total(axis.best.price for axis in self.axes)

    @property
    def mass_kg(self) -> float | None:
        """Mass of the leading sets; None where one is not known. [kg]"""
        return _total(axis.best.mass_kg for axis in self.axes)

    @property
    def energy_per_hour_j(self) -> float | None:
        """Energy that the leading sets take from their buses in an hour, nothing that comes back counted off. [J]"""
        return _total(None if axis.power is None else axis.power.taken_w * 3600.0 for axis in self.axes)


def _total(values: Any) -> float | None:
    """Sum of what is known throughout; None where anything is not."""
    known = list(values)
    return None if any(value is None for value in known) else float(sum(known))


def compare_machine(
    cases: Sequence[Case],
    *,
    name: str = "machine",
    rank_by: str | None = None,
    progress: Progress | None = None,
    executor: Executor | None = None,
) -> Machine:
    """Compare every axis of a machine, and what the axes have in common.

    Parameters
    ----------
    cases : sequence of Case
        One case for each axis. [-]
    name : str
        Name of the machine.
    rank_by : str, optional
        As for `compare`; default: what each case says. [-]
    progress : callable, optional
        Called with a stage and the part of it that is done, 0 to 1. [-]
    executor : Executor, optional
        Where the screening is done. [-]

    Returns
    -------
    Machine
        Leading sets, parts that repeat, common motor types with their price, and the common bus. [-]

    Raises
    ------
    InputError
        If there is no case at all, or an axis has no set that could be compared.
    """
    if not cases:
        raise InputError(
            [Problem("machine", None, "", "no case", "one case for each axis", "Name its axes.")]
        )
    axes = []
    for axis, case in zip(_distinct([case.name for case in cases]), cases, strict=True):
        stage = None if progress is None else _prefixed(progress, axis)
        axes.append(MachineAxis(axis, compare(case, rank_by=rank_by, progress=stage, executor=executor)))
    return Machine(
        name=name,
        axes=tuple(axes),
        shared_parts=_shared_parts(axes),
        motor_types=motor_types([axis.name for axis in axes], [axis.comparison for axis in axes]),
        buses=common_buses([axis.name for axis in axes], [axis.comparison for axis in axes]),
    )


def _prefixed(progress: Progress, axis: str) -> Progress:
    return lambda stage, done: progress(f"{axis}: {stage}", done)


def _distinct(names: Sequence[str]) -> list[str]:
    """Names with a number behind those that come again: a machine may have two equal axes."""
    used: Counter[str] = Counter()
    answer = []
    for name in names:
        used[name] += 1
        answer.append(name if used[name] == 1 else f"{name} ({used[name]})")
    return answer


def _shared_parts(axes: Sequence[MachineAxis]) -> tuple[SharedPart, ...]:
    """Parts that lead on several axes, motors first."""
    found: list[SharedPart] = []
    for table, field in (("motors", "motor"), ("gearheads", "gearhead"), ("drives", "drive")):
        users: dict[str, list[str]] = {}
        for axis in axes:
            part = getattr(axis.best, field)
            if part is not None:
                users.setdefault(part, []).append(axis.name)
        found += [SharedPart(table, part, tuple(names)) for part, names in users.items() if len(names) > 1]
    return tuple(found)
