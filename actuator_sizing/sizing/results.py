"""What a comparison answers: frozen, SI, ready for every writer. No number is born after this point."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, fields, replace
from functools import cached_property
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from datetime import date
    from pathlib import Path

    import pandas as pd

    from actuator_sizing.case.model import Case
    from actuator_sizing.sizing.demand import Demand
    from actuator_sizing.sizing.headroom import Headroom
    from actuator_sizing.sizing.levers import LeverStudy
    from actuator_sizing.sizing.ratio_results import RatioWindows
    from actuator_sizing.sizing.robustness.results import Robustness
    from actuator_sizing.sizing.simulation_results import Simulation
    from actuator_sizing.sizing.stop_courses import StopCourses
    from actuator_sizing.sizing.trade_offs import TradeOffs

PASSES = "passes"
LOW_RESERVE = "passes, low reserve"
FAILS = "fails"
NOT_CHECKED = "not checked"
VERDICTS = (PASSES, LOW_RESERVE, NOT_CHECKED, FAILS)
#: What a check that only advises says instead; it neither passes nor fails.
ADVICE_MET, ADVICE_NOT_MET = "advice met", "advice not met"


@dataclass(frozen=True)
class CheckResult:
    """One check of one set.

    `verdict` is what counts towards the set, where advice that is not met is at most a low reserve; `shown_verdict`
    is what is printed, here as in every report. `demand`, `capacity` and `utilisation` are None where the check
    could not be made; `missing` then names the data to ask the supplier for. `at_time_s` is None where no instant
    governs.
    """

    check: str  # key, e.g. "winding_temperature"
    title: str  # as printed, e.g. "Winding temperature"
    group: str  # "motor", "drive", "gearhead", "mechanism", "axis"
    demand: float | None
    capacity: float | None
    unit: str  # SI unit of demand and capacity
    utilisation: float | None
    allowed: float  # allowed utilisation
    recommended_reserve: float
    verdict: str
    at_time_s: float | None
    segment: str | None
    formula: str
    source: str
    working: str  # the formula with the numbers put in, so that a calculator confirms it
    missing: tuple[str, ...] = ()
    missing_from: tuple[str, ...] = ()  # for each of them the table that lacks it; "" where it is no table
    inputs: tuple[tuple[str, str], ...] = ()  # (input used, origin)
    is_advice: bool = False
    cycle: str | None = None  # the cycle in which it is nearest to its limit; None where cycles have no names

    def __repr__(self) -> str:
        values = (
            f"shown_verdict={self.shown_verdict!r}"
            if f.name == "verdict"
            else f"{f.name}={getattr(self, f.name)!r}"
            for f in fields(self)
        )
        return f"CheckResult({', '.join(values)})"

    def _repr_html_(self) -> str:
        from actuator_sizing.sizing.notebook import checks_html

        return checks_html((self,))

    @property
    def where(self) -> str:
        """Cycle and segment in which it governs, for one line; empty where neither is known."""
        return ": ".join(part for part in (self.cycle, self.segment) if part)

    @property
    def shown_verdict(self) -> str:
        """The verdict as every format words it: advice neither passes nor fails."""
        if not self.is_advice or self.utilisation is None:
            return self.verdict
        return ADVICE_NOT_MET if self.utilisation > self.allowed else ADVICE_MET

    @property
    def margin(self) -> float | None:
        """capacity/demand − 1, None where not known."""
        if self.utilisation is None or self.utilisation == 0.0:
            return None
        return 1.0 / self.utilisation - 1.0


class Checks(tuple[CheckResult, ...]):
    """The checks of one set; a tuple that shows itself as a table."""

    __slots__ = ()

    @property
    def table(self) -> pd.DataFrame:
        """Demand, capacity, unit, utilisation, verdict and place of each check, one row each."""
        from actuator_sizing.sizing.notebook import checks_frame

        return checks_frame(self)

    def _repr_html_(self) -> str:
        from actuator_sizing.sizing.notebook import checks_html

        return checks_html(self)


@dataclass(frozen=True)
class SetDetail:
    """Curves of one set for figures and tables; every column name ends in its SI unit."""

    #: over one cycle in periodic steady state, with both one-sided values at every jump: time_s, segment,
    #: position, speed, acceleration (load coordinate), shaft_torque_nm (driven shaft), motor_speed_rad_s,
    #: motor_torque_nm (air gap), motor_shaft_torque_nm, current_a (motor's basis), voltage_v,
    #: torque by cause at the motor: inertia_load_nm inertia_rotor_nm gravity_nm friction_nm process_nm losses_nm
    cycle: pd.DataFrame
    #: winding_degc and housing_degc against time_s over one cycle in periodic steady state (None: no equilibrium)
    periodic_temperature: pd.DataFrame | None
    #: the same from cold (both at ambient) until periodic or until past the limit: time_s, winding_degc,
    #: housing_degc and, where it ripples, winding_low_degc, winding_high_degc (None: data missing); of a cycle that
    #: does not repeat its one run, with the cycle that follows, up to the hottest instant
    warm_up: pd.DataFrame | None
    #: against speed_rad_s: torque_peak_min_bus_nm, torque_peak_nominal_bus_nm, torque_peak_max_bus_nm,
    #: torque_continuous_nm (NaN where out of reach or not known), all air-gap torque
    envelope: pd.DataFrame
    #: voltage step of motor plus load: time_s, current_a, speed_rad_s (motor side)
    step_response: pd.DataFrame | None
    #: levels for limit lines, e.g. motor_peak_current_a, drive_peak_current_a, drive_continuous_current_a,
    #: speed_max_rad_s, winding_limit_degc, ambient_degc, voltage_available_v (NaN: not known)
    levels: Mapping[str, float]
    #: the DC bus over one cycle: time_s, bus_power_w (taken), bus_voltage_high_v (fed from the highest voltage of the
    #: supply, NaN where not known) and bus_voltage_low_v (fed from the lowest)
    bus: pd.DataFrame | None = None
    #: one row per segment of the duty cycle: torque_rms_nm, current_rms_a and current_squared_a2_s, the integral
    #: of the squared current over the segment; their sum over the cycle time is the squared RMS current
    segments: pd.DataFrame | None = None
    #: every way of stopping from its worst instant (None: nothing asks for it)
    stops: StopCourses | None = None
    #: simulates the cycle under the default loops, when somebody asks for it (None: it was not prepared)
    simulation: Callable[[], Simulation | None] | None = None


@dataclass(frozen=True)
class CycleOfSet:
    """One set in one of several cycles, judged as if the case had no other."""

    name: str
    verdict: str
    governing_check: str
    utilisations: Mapping[str, float | None]  # by key of the check, None where not checked
    quantities: Mapping[
        str, Any
    ]  # of the leading set, and in the first cycle, all; else those of motor and gearhead
    checks: Checks | None = None  # of the leading set
    detail: SetDetail | None = None  # of the leading set


@dataclass(frozen=True)
class SetResult:
    """One motor + gearhead + drive, evaluated exactly."""

    rank: int
    motor: str
    gearhead: str | None  # None: direct drive
    ratio: float
    drive: str
    verdict: str
    governing_check: str  # key of the check with the highest utilisation against its allowed value
    price: float | None
    mass_kg: float | None
    quantities: Mapping[str, Any]
    checks: Checks
    motor_index: int
    gearhead_index: int
    drive_index: int
    detail: SetDetail | None = None
    levers: tuple[Mapping[str, Any], ...] = ()
    #: the set in each of several cycles; empty where there is one. Its own checks then are the worst of them, its
    #: quantities those of the first
    cycles: tuple[CycleOfSet, ...] = ()
    mix: Mapping[str, Any] | None = None  # weighed quantities; None where the cycles have no shares of time

    @property
    def label(self) -> str:
        """Motor, gearhead and drive in one line."""
        return " + ".join([self.motor, self.gearhead or "direct", self.drive])

    def _repr_html_(self) -> str:
        """Its checks as a table for notebooks."""
        from actuator_sizing.sizing.notebook import set_html

        return set_html(self)

    def check(self, key: str) -> CheckResult:
        """The result of one check by its key.

        Raises
        ------
        KeyError
            If the check does not apply to this set.
        """
        for result in self.checks:
            if result.check == key:
                return result
        raise KeyError(key)


@dataclass(frozen=True)
class InertiaShare:
    """One part of the inertia inventory, or the rest of the axis; all pieces of it together."""

    name: str
    shape: str
    referred_to: str  # "driven shaft", "load" or "motor"
    rule: str  # how its inertia follows from what is stated
    mass_kg: float  # NaN: not known
    inertia_kg_m2: float  # about the axis that it turns about
    at_shaft_kg_m2: float  # referred to the driven shaft, with the largest lever of the cycle
    at_motor_kg_m2: float  # referred to the motor of the leading set
    share: float  # of all inertia at the motor but rotor, brake and gearhead


@dataclass(frozen=True)
class Rejections:
    """Why sets lost, over all sets of the catalogs."""

    sets_total: int  # every motor x gearhead x drive combination
    incompatible: int  # drive cannot commutate the motor, or motor does not fit the mechanism
    screened: int  # compared by bounds
    rejected: int  # at least one check cannot pass
    by_check: Mapping[str, int]  # governing check -> number of rejected sets
    survivors: int  # might pass by bounds
    confirmed_passing: int  # pass by exact evaluation
    evaluated: int  # evaluated exactly
    complete: bool  # every survivor was evaluated exactly
    misfits: Mapping[str, int] = field(default_factory=dict)  # why sets are incompatible -> number of sets

    @property
    def not_checked(self) -> int:
        """Evaluated sets that neither pass nor fail, since a check that binds lacks its data."""
        return self.evaluated - self.confirmed_passing - (self.rejected + self.survivors - self.screened)


@dataclass(frozen=True)
class CycleResult:
    """One of several cycles of a case."""

    case: Case  # with this cycle alone
    demand: Demand
    quantities: Mapping[str, Any]  # as `Comparison.cycle`


@dataclass(frozen=True)
class Comparison:
    """The answer: ranked sets, the reasons of the losers, and the demand they were held against."""

    case: Case
    demand: Demand
    ranked_by: str
    sets: tuple[SetResult, ...]  # best first: passing sets, then the nearest losers
    rejections: Rejections
    candidates: pd.DataFrame  # one row per listed candidate: motor, gearhead, ratio, drive, verdict, ...
    cycle: Mapping[str, Any]  # cycle quantities of results.json
    assumptions: tuple[tuple[str, str], ...] = ()  # (subject, what was assumed or derived)
    questions: tuple[tuple[str, str, str], ...] = field(default=())  # (part, data missing, check not made)
    inertias: tuple[InertiaShare, ...] = ()  # inertia inventory; empty where the case has none
    version: str = ""
    cycles: tuple[CycleResult, ...] = ()  # where there are several; `demand` and `cycle` are of the first
    trade_offs: TradeOffs | None = None  # which passing sets no other one beats, where it was asked for
    windows: RatioWindows | None = None  # ratio windows of every motor, where they were asked for
    headroom: Headroom | None = None  # how far the leading set can go, where it was asked for

    def by_cycle(self) -> tuple[Comparison, ...]:
        """The comparison once for each cycle, its leading set shown in that cycle alone."""
        if not self.cycles:
            return (self,)
        best = self.sets[0]
        return tuple(
            replace(
                self,
                case=each.case,
                demand=each.demand,
                cycle=each.quantities,
                cycles=(),
                sets=(
                    replace(
                        best,
                        verdict=own.verdict,
                        governing_check=own.governing_check,
                        checks=own.checks or best.checks,
                        quantities=own.quantities,
                        detail=own.detail,
                        cycles=(),
                    ),
                    *self.sets[1:],
                ),
            )
            for each, own in zip(self.cycles, best.cycles, strict=True)
        )

    @property
    def governing(self) -> Comparison:
        """The comparison in the cycle in which the leading set is nearest to its limit."""
        if not self.cycles or not self.sets:
            return self
        name = self.sets[0].check(self.sets[0].governing_check).cycle
        return next(each for each in self.by_cycle() if each.case.cycle.name == name)

    @property
    def best(self) -> SetResult:
        """The leading set; a loser if none passes."""
        return self.sets[0]

    @cached_property
    def dynamics(self) -> Simulation | None:
        """The leading set simulated over its cycle; None where its loops cannot be made stable."""
        detail = self.sets[0].detail if self.sets else None
        return None if detail is None or detail.simulation is None else detail.simulation()

    @cached_property
    def robustness(self) -> Robustness | None:
        """How sure the leading set passes, at bounded cost; None where the case states no spread."""
        if not self.case.tolerances:
            return None
        from actuator_sizing.sizing.robustness.robust import robust_of_leading

        return robust_of_leading(self)

    def ratio_windows(self) -> RatioWindows:
        """Ratio windows of every motor that fits the axis, worked out now unless the report has them already.

        Raises
        ------
        InputError
            If the axis has a linear motor, or no motor fits it.
        """
        from actuator_sizing.sizing.cycles import cycle_demands
        from actuator_sizing.sizing.ratio_windows import ratio_windows

        return self.windows or ratio_windows(cycle_demands(self.case))

    def levers_of(self, rank: int, weights: Mapping[str, float] | None = None) -> LeverStudy | None:
        """What would let one of the sets pass, or keep the recommended reserve.

        Parameters
        ----------
        rank : int
            Of the set among `sets`, from 1. [-]
        weights : mapping of str to float, optional
            What a lever costs more than another in the cheapest pair, by its key. [-]

        Returns
        -------
        LeverStudy or None
            None where the set has the reserve that is recommended.
        """
        from actuator_sizing.sizing.cycles import cycle_demands
        from actuator_sizing.sizing.levers import levers_of

        item = self.sets[rank - 1]
        parts = item.motor_index, item.gearhead_index, item.drive_index
        return levers_of(cycle_demands(self.case), *parts, weights)

    @property
    def passes(self) -> bool:
        """Whether a set passes every check."""
        return bool(self.sets) and self.sets[0].verdict in (PASSES, LOW_RESERVE)

    def _repr_html_(self) -> str:
        """A compact table for notebooks."""
        from actuator_sizing.sizing.notebook import comparison_html

        return comparison_html(self)

    def write_report(
        self,
        folder: str | Path,
        *,
        date: date | None = None,
        pdf: bool | None = None,
        since: Mapping[str, Any] | None = None,
    ) -> tuple[Path, ...]:
        """Write report, tables, figures and results into `folder`; whole or not at all.

        Parameters
        ----------
        folder : str or Path
            Output folder; made if missing.
        date : datetime.date or None
            Date of the report; by default today, or the day in the environment variable
            ``SOURCE_DATE_EPOCH``.
        pdf : bool or None
            Write the PDF too; None writes it if the optional package for it is installed.
        since : mapping or None
            Contents of an earlier ``results.json``: the report then says what changed.

        Returns
        -------
        tuple of Path
            The files written.

        Raises
        ------
        OutputError
            If a file cannot be written; what was there before is untouched.
        """
        from actuator_sizing.report import write_report

        return write_report(self, folder, date=date, pdf=pdf, since=since)
