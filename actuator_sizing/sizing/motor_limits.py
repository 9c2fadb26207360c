"""Checks of the motor alone on any transmission: RMS, peak, speed and voltage, without a drive and without heat."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, fields, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.machine import current_of_torque, judge, judge_cold
from actuator_sizing.core.parameters import DriveParameters, GearheadParameters, MotorParameters
from actuator_sizing.core.quadrature import largest_magnitude
from actuator_sizing.sizing.checks.base import Check, Sets
from actuator_sizing.sizing.checks.motor import (
    MOTOR_PEAK_CURRENT,
    MOTOR_SPEED,
    RMS_CURRENT,
    SPEED_TORQUE,
    VOLTAGE,
)
from actuator_sizing.sizing.cycles import CycleDemand
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.evaluation import PairResults, voltage_extremes, worse_of
from actuator_sizing.sizing.judging import is_binding
from actuator_sizing.sizing.pair_course import course, electrical_course
from actuator_sizing.sizing.torque_plane import torque_plane

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

#: What a ratio is judged by; all of it known without the drive.
MOTOR_CHECKS = (RMS_CURRENT, SPEED_TORQUE, MOTOR_PEAK_CURRENT, MOTOR_SPEED, VOLTAGE)

_CHUNK = 128  # pairs at a time, as in the exact evaluation
_WORST = 10.0


@dataclass(frozen=True)
class MotorLimits:
    """How far motors are from their own limits on transmissions of any ratio, in the worst of the cycles."""

    cycles: tuple[CycleDemand, ...]

    @property
    def case(self) -> Case:
        """The case, with its first cycle."""
        return self.cycles[0].case

    @cached_property
    def checks(self) -> tuple[Check, ...]:
        """Those that can fail a set of this case."""
        limits = self.case.limits
        return tuple(check for check in MOTOR_CHECKS if is_binding(check, limits[check.key]))

    def allowed(self, check: Check) -> float:
        """Allowed utilisation of a check. [-]"""
        return self.case.limits[check.key].allowed_utilisation

    def missing(self, motors: MotorParameters) -> list[tuple[str, ...]]:
        """Data without which a check cannot be made, by motor; empty where all is known."""
        count = len(motors)
        sets = self._sets(self.cycles[0], motors, _repeated(one_gearhead(1.0), count), self._nothing(count))
        lacking: list[list[str]] = [[] for _ in range(count)]
        for check in self.checks:
            if not any(check.concerns_cycle(each.cycle.runs) for each in self.cycles):
                continue
            for need in check.needs:
                if need.part != "motors":
                    continue
                for row in np.flatnonzero(~need.known(sets)):
                    if need.column not in lacking[row]:
                        lacking[row].append(need.column)
        return [tuple(names) for names in lacking]

    def excess(self, motors: MotorParameters, gearheads: GearheadParameters) -> tuple[FloatArray, IndexArray]:
        """Largest demand over what is allowed, less one, and which check it is.

        Parameters
        ----------
        motors, gearheads : MotorParameters, GearheadParameters
            B rows each: row b of both is pair b. [-]

        Returns
        -------
        excess : ndarray, shape (B,)
            At most 10; positive where a check fails. [-]
        check : ndarray of int, shape (B,)
            Index into `checks`. [-]
        """
        parts = list(self._chunks(motors, gearheads))
        return np.concatenate([p[0] for p in parts]), np.concatenate([p[1] for p in parts])

    def _chunks(
        self, motors: MotorParameters, gearheads: GearheadParameters
    ) -> Iterator[tuple[FloatArray, IndexArray]]:
        for start in range(0, len(motors), _CHUNK):
            part = slice(start, start + _CHUNK)
            m, g = motors.take(part), gearheads.take(part)
            shares = np.max([self._shares(each, m, g) for each in self.cycles], axis=0)
            yield shares.max(axis=0) - 1.0, shares.argmax(axis=0)

    def _shares(
        self, each: CycleDemand, motors: MotorParameters, gearheads: GearheadParameters
    ) -> FloatArray:
        """Demand over what is allowed in one cycle, shape (C, B); below zero where a check does not concern it."""
        sets = self._sets(each, motors, gearheads, self._pairs(each.demand, motors, gearheads))
        shares = np.full((len(self.checks), len(motors)), -1.0)
        for row, check in enumerate(self.checks):
            if check.concerns_cycle(each.cycle.runs):
                ratio = check.measure(sets).ratio() / self.allowed(check)
                shares[row] = np.where(np.isnan(ratio), -1.0, np.minimum(ratio, _WORST + 1.0))
        return shares

    def _pairs(self, demand: Demand, motors: MotorParameters, gearheads: GearheadParameters) -> PairResults:
        """What the checks of the motor read of a pair; the rest is not evaluated."""
        judged, cold = judge(motors, self.case.surroundings), judge_cold(motors, self.case.surroundings)
        c = course(demand, motors, gearheads, judged)
        c_cold = electrical_course(demand, c.torque_nm, c.motor_speed_rad_s, c.shaft_torque_nm, cold)
        torque_peak, piece, position = largest_magnitude(c.torque_nm)
        voltage = worse_of(voltage_extremes(demand, c), voltage_extremes(demand, c_cold), "voltage_peak_v")
        plane = worse_of(
            torque_plane(demand, c, judged), torque_plane(demand, c_cold, cold), "plane_utilisation"
        )
        return replace(
            self._nothing(len(motors)),
            torque_peak_nm=torque_peak,
            torque_peak_at_s=demand.instant(piece, position),
            current_peak_a=current_of_torque(
                torque_peak, judged.torque_constant_nm_per_a, judged.saturation_per_a2
            ),
            current_rms_a=np.sqrt(demand.mean(c.current_a**2)),
            speed_peak_rad_s=gearheads.ratio * demand.shaft_speed_peak,
            speed_rms_rad_s=gearheads.ratio * demand.shaft_speed_rms,
            voltage_available_v=judged.voltage_available_v,
            **voltage,
            **plane,
            torque_constant_nm_per_a=judged.torque_constant_nm_per_a,
        )

    @staticmethod
    def _nothing(count: int) -> PairResults:
        return PairResults(**{f.name: np.full(count, np.nan) for f in fields(PairResults)})

    @staticmethod
    def _sets(
        each: CycleDemand, motors: MotorParameters, gearheads: GearheadParameters, pairs: PairResults
    ) -> Sets:
        """Sets of these pairs with a drive that never limits."""
        count = len(motors)
        nothing = np.full(count, np.nan)
        return Sets(
            case=each.case,
            index=np.zeros((count, 3), dtype=np.intp),
            demand=each.demand,
            surroundings=each.case.surroundings,
            recommended_inertia_ratio=np.nan,
            motors=motors,
            gearheads=gearheads,
            drives=_boundless_drives(count),
            pairs=pairs,
            drive_current_peak_a=nothing,
            drive_current_rms_a=nothing,
            drive_current_rms_at_s=nothing,
            overload_a2s=nothing,
            overload_at_s=nothing,
        )


def _repeated(gearhead: GearheadParameters, count: int) -> GearheadParameters:
    return gearhead.take(np.zeros(count, dtype=np.intp))


def one_gearhead(
    ratio: float,
    *,
    efficiency: float = 1.0,
    efficiency_back: float = 1.0,
    no_load_torque_nm: float = 0.0,
    inertia_kg_m2: float = 0.0,
) -> GearheadParameters:
    """A transmission of which nothing is known but what moves the motor.

    Parameters
    ----------
    ratio : float
        Input turns per output turn. [-]
    efficiency, efficiency_back : float
        Forward and back-driving. [-]
    no_load_torque_nm : float
        At the input. [N·m]
    inertia_kg_m2 : float
        At the input. [kg·m²]

    Returns
    -------
    GearheadParameters
        One row. [-]
    """
    known = {
        "is_direct": np.zeros(1, dtype=bool),
        "ratio": np.array([ratio]),
        "efficiency": np.array([efficiency]),
        "efficiency_back": np.array([efficiency_back]),
        "no_load_torque_nm": np.array([no_load_torque_nm]),
        "inertia_kg_m2": np.array([inertia_kg_m2]),
    }
    return GearheadParameters(
        **{f.name: known.get(f.name, np.full(1, np.nan)) for f in fields(GearheadParameters)}
    )


def _boundless_drives(count: int) -> DriveParameters:
    values: dict[str, NDArray[np.generic]] = {}
    for f in fields(DriveParameters):
        values[f.name] = np.full(count, np.nan)
        if f.name.startswith("serves_"):
            values[f.name] = np.ones(count, dtype=bool)
    values["current_basis"] = np.zeros(count, dtype=np.int8)
    values["peak_current_a"] = np.full(count, np.inf)
    return DriveParameters(**values)  # type: ignore[arg-type]
