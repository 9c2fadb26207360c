"""Checks of the motor alone on any transmission: RMS, peak, speed and voltage, without a drive and without heat."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, fields, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.machine import current_of_torque, judge
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
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.evaluation import PairResults
from actuator_sizing.sizing.judging import is_binding
from actuator_sizing.sizing.pair_course import course
from actuator_sizing.sizing.torque_plane import torque_plane

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

#: What a ratio is judged by; all of it known without the drive.
MOTOR_CHECKS = (RMS_CURRENT, SPEED_TORQUE, MOTOR_PEAK_CURRENT, MOTOR_SPEED, VOLTAGE)

_CHUNK = 128  # pairs at a time, as in the exact evaluation
_WORST = 10.0


@dataclass(frozen=True)
class MotorLimits:
    """How far motors are from their own limits on transmissions of any ratio."""

    case: Case
    demand: Demand

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
        sets = self._sets(
            motors, one_gearhead(1.0).take(np.zeros(len(motors), dtype=np.intp)), self._nothing(len(motors))
        )
        lacking: list[list[str]] = [[] for _ in range(len(motors))]
        for check in self.checks:
            for need in check.needs:
                if need.part != "motors":
                    continue
                linear = bool(need.linear_column) and self.case.mechanism.drives_linear_motor
                name = need.linear_column if linear else need.column
                for row in np.flatnonzero(~need.known(sets)):
                    if name not in lacking[row]:
                        lacking[row].append(name)
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
            At most 10; positive where a check fails. NaN where none can be made. [-]
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
            sets = self._sets(m, g, self._pairs(m, g))
            shares = np.stack([check.measure(sets).ratio() / self.allowed(check) for check in self.checks])
            shares = np.where(np.isnan(shares), -1.0, np.minimum(shares, _WORST + 1.0))
            yield shares.max(axis=0) - 1.0, shares.argmax(axis=0)

    def _pairs(self, motors: MotorParameters, gearheads: GearheadParameters) -> PairResults:
        """What the checks of the motor read of a pair; the rest is not evaluated."""
        judged = judge(motors, self.case.surroundings)
        c = course(self.demand, motors, gearheads, judged)
        torque_peak, piece, position = largest_magnitude(c.torque_nm)
        with_L, without_L = largest_magnitude(c.voltage_v), largest_magnitude(c.voltage_without_inductance_v)
        return replace(
            self._nothing(len(motors)),
            torque_peak_nm=torque_peak,
            torque_peak_at_s=self.demand.instant(piece, position),
            current_peak_a=current_of_torque(
                torque_peak, judged.torque_constant_nm_per_a, judged.saturation_per_a2
            ),
            current_rms_a=np.sqrt(self.demand.mean(c.current_a**2)),
            speed_peak_rad_s=gearheads.ratio * self.demand.shaft_speed_peak,
            speed_rms_rad_s=gearheads.ratio * self.demand.shaft_speed_rms,
            voltage_peak_v=np.maximum(with_L[0], without_L[0]),
            voltage_available_v=judged.voltage_available_v,
            **torque_plane(self.demand, c, judged),  # type: ignore[arg-type]
            resistance_ohm=judged.resistance_ohm,
            torque_constant_nm_per_a=judged.torque_constant_nm_per_a,
        )

    @staticmethod
    def _nothing(count: int) -> PairResults:
        return PairResults(**{f.name: np.full(count, np.nan) for f in fields(PairResults)})

    def _sets(self, motors: MotorParameters, gearheads: GearheadParameters, pairs: PairResults) -> Sets:
        """Sets of these pairs with a drive that never limits."""
        count = len(motors)
        nothing = np.full(count, np.nan)
        return Sets(
            case=self.case,
            index=np.zeros((count, 3), dtype=np.intp),
            demand=self.demand,
            surroundings=self.case.surroundings,
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
