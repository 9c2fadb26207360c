"""Many samples of one set evaluated at once, for the checks that need no more than torque, current and heat."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, fields, replace
from functools import cached_property
from typing import cast

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.life import BALL_EXPONENT, ROLLER_EXPONENT
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.derating import derated_drives
from actuator_sizing.sizing.evaluation import PairResults
from actuator_sizing.sizing.robustness.cycle_nodes import cycle_nodes
from actuator_sizing.sizing.robustness.drive_current import CurrentHistory
from actuator_sizing.sizing.robustness.heat import HeatPlan
from actuator_sizing.sizing.robustness.heat_parts import HeatParts
from actuator_sizing.sizing.robustness.sample_course import (
    Pieces,
    PreparedCycle,
    SampleCourse,
    equivalent_name,
)
from actuator_sizing.sizing.robustness.state import Samples
from actuator_sizing.sizing.thermal_data import thermal_network

FloatArray = NDArray[np.float64]

_PILOT = 256  # samples by which pieces are chosen
CHUNK = 1024  # samples at a time: keeps the (pieces, nodes, samples) arrays in cache

#: Checks that `Sampler` can serve: they ask for nothing but what it evaluates.
SAMPLED_CHECKS = frozenset(
    {"speed_torque", "rms_current", "winding_temperature", "motor_peak_current", "motor_speed", "voltage",
     "drive_continuous_current", "drive_peak_current", "drive_peak_time", "drive_bus_voltage",
     "gearhead_equivalent_torque", "gearhead_peak_torque", "gearhead_mean_speed", "gearhead_maximum_speed",
     "inertia_ratio"}
)  # fmt: skip
#: Quantities of which quantiles are given.
SAMPLED_QUANTITIES = (
    "torque_peak_nm", "torque_rms_nm", "current_peak_a", "current_rms_a", "speed_peak_rad_s", "voltage_peak_v",
    "winding_max_degc", "copper_loss_mean_w", "inertia_ratio",
)  # fmt: skip


@dataclass(frozen=True)
class Sampler:
    """One set prepared for many samples."""

    case: Case
    cycle: PreparedCycle

    @classmethod
    def of(cls, case: Case, demand: Demand) -> Sampler:
        """Prepare a case of one set with its cycle."""
        nodes = cycle_nodes(case, demand)
        window = float(case.drive_parameters.rms_window_s[0])
        parts = HeatParts.of(nodes, case.motor_parameters)
        return cls(case, PreparedCycle(demand, nodes, parts, CurrentHistory.of(nodes, window)))

    @cached_property
    def _heat_plan(self) -> HeatPlan:
        samples = _without_spread(self.case)
        return HeatPlan.of(
            thermal_network(samples.motors, samples.surroundings),
            SampleCourse(self.cycle, samples).heat_loss(),
            self.case.surroundings.ambient_degc,
        )

    def sets(self, samples: Samples, chunk: int = CHUNK) -> Sets:
        """Evaluate B samples.

        Parameters
        ----------
        samples : Samples
            Samples of this set; parts, surroundings, mechanism, payload or process may spread, times may not. [-]
        chunk : int
            Samples at a time; it changes nothing but the memory that is used. [-]

        Returns
        -------
        Sets
            For the checks in `SAMPLED_CHECKS` only: what other checks need is NaN. [-]

        Notes
        -----
        The equations are those of `sizing.evaluation`, at the fewest nodes that hold the cycle. The largest values
        between nodes are taken from a parabola through the densest three points of the leading piece. In a large
        run peaks are looked for in those pieces only that come near one in any of some 256 pilot samples.
        """
        surrounded = replace(self.case, drive_parameters=samples.drives, surroundings=samples.surroundings)
        samples = replace(samples, drives=derated_drives(surrounded))
        slices = [slice(start, start + chunk) for start in range(0, len(samples), chunk)]
        pieces = self._leading_pieces(samples)
        parts = [
            SampleCourse(self.cycle, samples.part(which), pieces).columns(self._heat_plan) for which in slices
        ]
        columns = {name: np.concatenate([part[name] for part in parts]) for name in parts[0]}
        unknown = np.full(len(samples), np.nan)
        known = {f.name: columns.get(f.name, unknown) for f in fields(PairResults)}
        demand = self.cycle.demand
        if samples.moves_demand:
            moved = SampledDemand(
                shaft_torque_peak=columns["shaft_torque_peak_nm"],
                shaft_torque_equivalents={
                    p: columns[equivalent_name(p)] for p in (BALL_EXPONENT, ROLLER_EXPONENT)
                },
                shaft_torque=self.cycle.demand.shaft_torque,
                time_s=self.cycle.demand.time_s,
            )
            demand = cast(Demand, moved)
        return Sets(
            case=self.case,
            index=np.zeros((len(samples), 3), dtype=np.intp),
            demand=demand,
            surroundings=samples.surroundings,
            recommended_inertia_ratio=self.case.number("recommended inertia ratio"),
            motors=samples.motors,
            gearheads=samples.gearheads,
            drives=samples.drives,
            pairs=PairResults(**known),
            drive_current_peak_a=columns["drive_current_peak_a"],
            drive_current_rms_a=columns["drive_current_rms_a"],
            drive_current_rms_at_s=unknown,
            overload_a2s=columns["overload_a2s"],
            overload_at_s=unknown,
        )

    def _leading_pieces(self, samples: Samples) -> Pieces | None:
        """Pieces near a peak in evenly chosen samples; None, for all, where samples are few or loads move."""
        if samples.moves_demand or len(samples) < 8 * _PILOT:
            return None
        pilot = samples.part(slice(None, None, len(samples) // _PILOT))
        return SampleCourse(self.cycle, pilot).leading_pieces()


@dataclass(frozen=True)
class SampledDemand:
    """What the sampled checks ask of a demand that differs from sample to sample.

    `shaft_torque` and `time_s` are those without spread: they only place an instant.
    """

    shaft_torque_peak: FloatArray  # (B,)
    shaft_torque_equivalents: Mapping[float, FloatArray]  # by exponent, (B,)
    shaft_torque: FloatArray  # (P, K)
    time_s: FloatArray  # (P, K)

    @property
    def shaft_torque_equivalent(self) -> FloatArray:
        """With the exponent of ball bearings, shape (B,). [N·m]"""
        return self.shaft_torque_equivalents[BALL_EXPONENT]

    def equivalent(self, _load: FloatArray, exponent: float) -> FloatArray:
        """Equivalent torque of the samples, whose course over the cycle is not kept, shape (B,). [N·m]"""
        return self.shaft_torque_equivalents[exponent]


def _without_spread(case: Case) -> Samples:
    return Samples(
        case,
        1,
        case.motor_parameters,
        case.gearhead_parameters,
        case.drive_parameters,
        case.surroundings,
        {},
        {},
        {},
    )
