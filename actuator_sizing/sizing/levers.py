"""What would let a failing set pass: the smallest single change of each lever, and the next part of a catalog.

A lever is a quantity the user may change. For each, the set is sized again with the changed value until every
check passes; the answer is the passing end of the bracket.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case, Segment
from actuator_sizing.core.phases import Phase
from actuator_sizing.sizing.cycles import CycleDemand, cycle_demands, evaluate_cycles
from actuator_sizing.sizing.fitting import compatible, fits_axis
from actuator_sizing.sizing.judging import ORDER, active_checks, judge_sets
from actuator_sizing.sizing.results import FAILS

IndexArray = NDArray[np.intp]

#: Parts of the way from the present value to the bound at which the set is tried, nearest first.
_STEPS = (0.02, 0.05, 0.1, 0.2, 0.35, 0.55, 0.8, 1.0)
_RESOLUTION = 1e-4  # of the change itself: how closely the smallest change is found
_WORST = 10.0  # a check beyond ten times its limit says no more than that


@dataclass(frozen=True)
class Lever:
    """One quantity that may be changed.

    Attributes
    ----------
    key, title, unit : str
        Name in results; as printed; SI unit of the value, "-" for a factor.
    present : callable
        Case of one set → present value; None where the lever does not exist.
    changed : callable
        (case of one set, value) → the case with that value.
    bounds : callable
        Present value → the furthest values tried, one per direction.
    """

    key: str
    title: str
    unit: str
    present: Callable[[Case], float | None]
    changed: Callable[[Case, float], Case]
    bounds: Callable[[float], tuple[float, ...]]


# -- the levers -------------------------------------------------------------------------------------
def _restarted(segments: tuple[Segment, ...]) -> tuple[Segment, ...]:
    """Segments one after the other again."""
    made, start = [], 0.0
    for segment in segments:
        duration = sum(phase.duration_s for phase in segment.phases)
        made.append(replace(segment, start_s=start, duration_s=duration))
        start += duration
    return tuple(made)


def _moves(segment: Segment) -> bool:
    return any(np.any(phase.kinematics([0.0, 0.4 * phase.duration_s])[1] != 0.0) for phase in segment.phases)


def _stretched(phase: Phase, factor: float) -> Phase:
    return replace(
        phase,
        duration_s=phase.duration_s * factor,
        polynomial=tuple(c / factor**k for k, c in enumerate(phase.polynomial)),
        sine_frequency_rad_s=phase.sine_frequency_rad_s / factor,
    )


def _with_move_time(case: Case, factor: float) -> Case:
    def slower(segments: tuple[Segment, ...]) -> tuple[Segment, ...]:
        return _restarted(
            tuple(
                replace(s, phases=tuple(_stretched(p, factor) for p in s.phases)) if _moves(s) else s
                for s in segments
            )
        )

    return case.with_segments(slower)


def _with_payload(case: Case, factor: float) -> Case:
    return case.with_segments(
        lambda segments: tuple(replace(s, payload=s.payload * factor) for s in segments)
    )


def _with_dwell(case: Case, added_s: float) -> Case:
    return case.with_segments(lambda segments: _dwelling(segments, added_s))


def _dwelling(segments: tuple[Segment, ...], added_s: float) -> tuple[Segment, ...]:
    last = segments[-1]
    if _moves(last):
        pause = replace(
            last,
            law="dwell",
            name="added dwell",
            phases=(Phase(added_s),),
            brake_closed=False,
            process_effort=0.0,
        )
        return _restarted((*segments, pause))
    end = last.phases[-1]
    longer = replace(last, phases=(*last.phases[:-1], replace(end, duration_s=end.duration_s + added_s)))
    return _restarted((*segments[:-1], longer))


def _with_bus(case: Case, minimum_v: float) -> Case:
    s = case.surroundings
    factor = minimum_v / s.bus_min_v
    return replace(
        case,
        surroundings=replace(
            s,
            bus_min_v=minimum_v,
            bus_nominal_v=s.bus_nominal_v * factor,
            bus_max_v=s.bus_max_v * factor,
        ),
    )


def _with_ambient(case: Case, ambient_degc: float) -> Case:
    return replace(case, surroundings=replace(case.surroundings, ambient_degc=ambient_degc))


def _housing_resistance(case: Case) -> float | None:
    value = float(case.motor_parameters.thermal_resistance_housing_k_w[0])
    return None if np.isnan(value) else value


def _with_housing_resistance(case: Case, value_k_w: float) -> Case:
    m = case.motor_parameters
    kept = (
        m.thermal_resistance_housing_k_w / value_k_w
    )  # the heat capacity stays, so the time constant follows
    return replace(
        case,
        motor_parameters=replace(
            m,
            thermal_resistance_housing_k_w=np.array([value_k_w]),
            housing_time_constant_s=m.housing_time_constant_s / kept,
        ),
    )


def _friction_fields(case: Case) -> list[str]:
    return [
        f.name
        for f in fields(case.mechanism)  # type: ignore[arg-type]
        if "friction" in f.name and getattr(case.mechanism, f.name) > 0.0
    ]


def _with_friction(case: Case, factor: float) -> Case:
    less = {name: getattr(case.mechanism, name) * factor for name in _friction_fields(case)}
    return replace(case, mechanism=replace(case.mechanism, **less))  # type: ignore[type-var]


def _with_ratio(case: Case, ratio: float) -> Case:
    g = case.gearhead_parameters
    return replace(case, gearhead_parameters=replace(g, ratio=np.array([ratio])))


LEVERS: tuple[Lever, ...] = (
    Lever(
        "ratio",
        "gearhead ratio, all else equal",
        "-",
        lambda case: (
            None if case.gearhead_parameters.is_direct[0] else float(case.gearhead_parameters.ratio[0])
        ),
        _with_ratio,
        lambda ratio: (ratio / 5.0, ratio * 5.0),
    ),
    Lever("move_time", "time of every move", "-", lambda case: 1.0, _with_move_time, lambda one: (4.0,)),
    Lever(
        "payload",
        "payload of every segment",
        "-",
        lambda case: 1.0 if any(s.payload > 0.0 for one in case.by_cycle() for s in one.segments) else None,
        _with_payload,
        lambda one: (0.0,),
    ),
    Lever(
        "bus_voltage",
        "minimum bus voltage, the others in proportion",
        "V",
        lambda case: case.surroundings.bus_min_v,
        _with_bus,
        lambda volts: (2.0 * volts, 0.5 * volts),
    ),
    Lever(
        "ambient",
        "ambient temperature",
        "°C",
        lambda case: case.surroundings.ambient_degc,
        _with_ambient,
        lambda ambient: (ambient - 40.0,),
    ),
    Lever(
        "cooling",
        "thermal resistance housing to ambient",
        "K/W",
        _housing_resistance,
        _with_housing_resistance,
        lambda resistance: (0.2 * resistance,),
    ),
    Lever(
        "dwell",
        "dwell added at the end of the cycle",
        "s",
        lambda case: 0.0,
        _with_dwell,
        lambda zero: (np.nan,),
    ),
    Lever(
        "friction",
        "friction of guide and bearings",
        "-",
        lambda case: 1.0 if _friction_fields(case) else None,
        _with_friction,
        lambda one: (0.0,),
    ),
)


@dataclass(frozen=True)
class LeverAnswer:
    """The smallest change of one lever that lets the set pass; `needed` is None where none helps."""

    lever: str
    title: str
    unit: str
    present: float
    needed: float | None

    def as_mapping(self) -> Mapping[str, Any]:
        """For results.json."""
        return {
            "lever": self.lever,
            "title": self.title,
            "unit": self.unit,
            "present": self.present,
            "needed": self.needed,
            "helps": self.needed is not None,
        }


@dataclass(frozen=True)
class PartAnswer:
    """The cheapest other part of one catalog that lets the set pass; `part` is None where none does."""

    table: str
    present: str
    part: str | None

    def as_mapping(self) -> Mapping[str, Any]:
        """For results.json."""
        return {
            "lever": f"other_{self.table.removesuffix('s')}",
            "title": f"another of the {self.table}",
            "unit": "",
            "present": self.present,
            "needed": self.part,
            "helps": self.part is not None,
        }


def single(case: Case, motor: int, gearhead: int, drive: int) -> Case:
    """The case with one motor, gearhead and drive only."""
    return replace(
        case,
        motors=case.motors.row(motor),
        gearheads=case.gearheads.row(gearhead),
        drives=case.drives.row(drive),
        motor_parameters=case.motor_parameters.take(slice(motor, motor + 1)),
        gearhead_parameters=case.gearhead_parameters.take(slice(gearhead, gearhead + 1)),
        drive_parameters=case.drive_parameters.take(slice(drive, drive + 1)),
    )


def _as_changed(case: Case, cycles: tuple[CycleDemand, ...]) -> tuple[CycleDemand, ...]:
    """Cycles of a changed case: demands that are known still hold, the rest of the case may be another."""
    if not cycles:
        return cycle_demands(case)
    return tuple(CycleDemand(one, known.demand) for one, known in zip(case.by_cycle(), cycles, strict=True))


def excess(case: Case, cycles: tuple[CycleDemand, ...] = ()) -> float:
    """How far the one set of a case is beyond its limits.

    Parameters
    ----------
    case : Case
        A case of one set, from `single`. [-]
    cycles : tuple of CycleDemand, optional
        Its cycles, where they are known already. [-]

    Returns
    -------
    float
        Largest utilisation over allowed of the binding checks, less one; positive where the set fails. [-]
    """
    checks, limits = active_checks(case.limits)
    index = np.zeros((1, 3), dtype=np.intp)
    verdicts = judge_sets(evaluate_cycles(_as_changed(case, cycles), index), checks, limits)
    worst = min(float(verdicts.severity[0]), _WORST) - 1.0
    fails = verdicts.verdict[0] == ORDER.index(FAILS)
    return max(worst, 1e-12) if fails else min(worst, 0.0)


def smallest_change(case: Case, lever: Lever, cycles: tuple[CycleDemand, ...] = ()) -> LeverAnswer | None:
    """Smallest change of one lever that lets the one set of a case pass.

    Parameters
    ----------
    case : Case
        A case of one set, from `single`. [-]
    lever : Lever
        What may change. [-]
    cycles : tuple of CycleDemand, optional
        The cycles of the case, reused for levers that do not touch them. [-]

    Returns
    -------
    LeverAnswer or None
        None where the lever does not exist for this set. [-]

    Notes
    -----
    Tried at growing distances in each direction; between the last failing and the first passing value by the
    secant (Illinois) and by halving, to 1e-4 of the change. A window of values narrower than the distance
    between two trials can be missed where the dependence is not monotone.
    """
    present = lever.present(case)
    if present is None:
        return None
    known = cycles or cycle_demands(case)

    def beyond(value: float) -> float:
        other = lever.changed(case, value)
        same = other.segments is case.segments and other.mechanism is case.mechanism
        return excess(other, known if same else ())

    best: float | None = None
    for bound in lever.bounds(present):
        # A dwell has no bound of its own: ten cycles long, it is no machine any more.
        furthest = 10.0 * case.cycle_duration_s if np.isnan(bound) else bound
        found = _first_passing(beyond, present, furthest)
        if found is not None and (best is None or abs(found - present) < abs(best - present)):
            best = found
    return LeverAnswer(lever.key, lever.title, lever.unit, present, best)


def _first_passing(f: Callable[[float], float], start: float, bound: float) -> float | None:
    low, f_low = start, 1.0  # the case as it is fails; by how much does not matter to the bracket
    for step in _STEPS:
        high = start + step * (bound - start)
        f_high = f(high)
        if f_high <= 0.0:
            return _narrowed(f, low, f_low, high, f_high, start)
        low, f_low = high, f_high
    return None


def _narrowed(
    f: Callable[[float], float], low: float, f_low: float, high: float, f_high: float, start: float
) -> float:
    """Passing end of the bracket from failing `low` to passing `high`."""
    for turn in range(40):
        if abs(high - low) <= _RESOLUTION * abs(high - start):
            break
        secant = low + (high - low) * f_low / (f_low - f_high) if turn % 3 != 2 else np.nan
        # Kept off the ends, so that the bracket shrinks from both sides.
        inner = 0.02 * (high - low)
        lower, upper = sorted((low + inner, high - inner))
        middle = 0.5 * (low + high) if np.isnan(secant) else float(np.clip(secant, lower, upper))
        value = f(middle)
        if value <= 0.0:
            high, f_high = middle, value
        else:
            low, f_low = middle, value
    return high


def other_parts(
    case: Case, cycles: tuple[CycleDemand, ...], motor: int, gearhead: int, drive: int
) -> tuple[PartAnswer, ...]:
    """The cheapest other motor, gearhead or drive that alone lets the set pass.

    Parameters
    ----------
    case : Case
        The whole case. [-]
    cycles : tuple of CycleDemand
        Its cycles. [-]
    motor, gearhead, drive : int
        The set, by index into the catalogs. [-]

    Returns
    -------
    tuple of PartAnswer
        One for each catalog. [-]
    """
    checks, limits = active_checks(case.limits)
    motors, gearheads = fits_axis(case)
    served = compatible(case.motor_parameters, case.drive_parameters)
    base = np.array([motor, gearhead, drive])
    answers = []
    catalogs = (
        ("motors", case.motors, case.motor_parameters.price, motors[served[motors, drive]]),
        ("gearheads", case.gearheads, case.gearhead_parameters.price, gearheads),
        ("drives", case.drives, case.drive_parameters.price, np.flatnonzero(served[motor])),
    )
    for column, (table, catalog, price, others) in enumerate(catalogs):
        others = others[others != base[column]]
        part = None
        if len(others):
            index = np.tile(base, (len(others), 1))
            index[:, column] = others
            verdicts = judge_sets(evaluate_cycles(cycles, index), checks, limits)
            good = others[verdicts.verdict < ORDER.index(FAILS)]
            if len(good):
                cost = np.nan_to_num(price[good], nan=np.inf)
                part = catalog.names[int(good[np.lexsort((good, cost))[0]])] or "direct drive"
        answers.append(PartAnswer(table, catalog.names[int(base[column])] or "direct drive", part))
    return tuple(answers)


def levers_of(
    case: Case, cycles: tuple[CycleDemand, ...], motor: int, gearhead: int, drive: int
) -> tuple[Mapping[str, Any], ...]:
    """Every lever of one failing set, for results and report.

    Parameters
    ----------
    case : Case
        The whole case. [-]
    cycles : tuple of CycleDemand
        Its cycles. [-]
    motor, gearhead, drive : int
        The set, by index into the catalogs. [-]

    Returns
    -------
    tuple of mapping
        Keys lever, title, unit, present, needed (None: no change of this lever helps), helps. [-]
    """
    one = single(case, motor, gearhead, drive)
    found = (smallest_change(one, lever, cycles) for lever in LEVERS)
    answers: list[LeverAnswer | PartAnswer] = [answer for answer in found if answer is not None]
    answers += other_parts(case, cycles, motor, gearhead, drive)
    return tuple(answer.as_mapping() for answer in answers)
