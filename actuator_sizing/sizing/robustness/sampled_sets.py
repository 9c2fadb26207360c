"""Many samples of one set evaluated at once, for the checks that need no more than torque, current and heat."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, fields, replace
from functools import cached_property
from typing import cast

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.capability import terminal_voltage
from actuator_sizing.core.life import BALL_EXPONENT, ROLLER_EXPONENT
from actuator_sizing.core.machine import (
    JudgedMotor,
    current_of_torque,
    judge,
    judge_cold,
    motor_amperes_per_drive_ampere,
)
from actuator_sizing.core.moments import gearhead_rows, motor_columns
from actuator_sizing.core.thermal import HeatLoss, subpiece_counts, subpiece_durations, subpiece_means
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.derating import derated_drives
from actuator_sizing.sizing.evaluation import PairResults
from actuator_sizing.sizing.robustness.cycle_nodes import (
    CycleNodes,
    MovedLoad,
    cycle_nodes,
    moved_load,
)
from actuator_sizing.sizing.robustness.drive_current import CurrentHistory
from actuator_sizing.sizing.robustness.heat import HeatPlan, hottest_winding
from actuator_sizing.sizing.robustness.state import Samples
from actuator_sizing.sizing.thermal_data import fastest_time_constant, thermal_network
from actuator_sizing.sizing.torque_plane import plane_ratio

FloatArray = NDArray[np.float64]

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
    demand: Demand
    nodes: CycleNodes

    @classmethod
    def of(cls, case: Case, demand: Demand) -> Sampler:
        """Prepare a case of one set with its cycle."""
        return cls(case, demand, cycle_nodes(case, demand))

    @cached_property
    def _history(self) -> CurrentHistory:
        return CurrentHistory.of(self.nodes, float(self.case.drive_parameters.rms_window_s[0]))

    @cached_property
    def _parts(self) -> tuple[FloatArray, tuple[FloatArray, ...]]:
        """Lengths of the parts of the cycle for heating, and the matrix of each piece from nodes to their means."""
        tau = fastest_time_constant(self.case.motor_parameters)
        shortest = float(tau[0]) if np.isfinite(tau[0]) else np.inf
        duration = self.nodes.demand.duration_s
        torque = self.nodes.demand.shaft_torque[None] ** 2 + self.nodes.demand.shaft_acceleration[None] ** 2
        counts = subpiece_counts(duration, torque, shortest)
        eye = np.eye(self.nodes.count)
        matrices = tuple(subpiece_means(eye[:, None, :], np.array([count])).T for count in counts)
        return subpiece_durations(duration, counts), matrices

    @cached_property
    def _released(self) -> FloatArray:
        """One in the parts of the cycle in which the coil of the brake is fed, shape (S,). [-]"""
        demand = self.nodes.demand
        fed = ~(demand.brake_closed & (demand.direction == 0.0))
        return np.repeat(fed, [len(matrix) for matrix in self._parts[1]]).astype(float)

    def _means(self, values: FloatArray) -> FloatArray:
        """Means over the parts of the cycle, shape (P, K, B) to (B, S)."""
        matrices = self._parts[1]
        if all(len(matrix) == 1 for matrix in matrices):
            return np.asarray((matrices[0] @ values)[:, 0].T)
        return np.concatenate([m @ v for m, v in zip(matrices, values, strict=True)]).T

    @cached_property
    def _heat_plan(self) -> HeatPlan:
        samples = _without_spread(self.case)
        course = _Course(self, samples)
        return HeatPlan.of(
            thermal_network(samples.motors, samples.surroundings),
            course.heat_loss(),
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
        between nodes are taken from a parabola through the densest three points of the leading piece.
        """
        surrounded = replace(self.case, drive_parameters=samples.drives, surroundings=samples.surroundings)
        samples = replace(samples, drives=derated_drives(surrounded))
        slices = [slice(start, start + chunk) for start in range(0, len(samples), chunk)]
        parts = [_Course(self, samples.part(which)).columns() for which in slices]
        columns = {name: np.concatenate([part[name] for part in parts]) for name in parts[0]}
        unknown = np.full(len(samples), np.nan)
        known = {f.name: columns.get(f.name, unknown) for f in fields(PairResults)}
        demand = self.demand
        if samples.moves_demand:
            moved = SampledDemand(
                shaft_torque_peak=columns["shaft_torque_peak_nm"],
                shaft_torque_equivalents={
                    p: columns[_equivalent(p)] for p in (BALL_EXPONENT, ROLLER_EXPONENT)
                },
                shaft_torque=self.demand.shaft_torque,
                time_s=self.demand.time_s,
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


def _equivalent(exponent: float) -> str:
    """Name of the column with the equivalent torque."""
    return f"shaft_torque_equivalent_{exponent:.3g}_nm"


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


class _Course:
    """Courses of B samples over the cycle, shape (P, K, B)."""

    def __init__(self, sampler: Sampler, samples: Samples):
        self.sampler, self.samples, self.nodes = sampler, samples, sampler.nodes
        self.moved: MovedLoad | None = None
        motors, gearheads = samples.motors, samples.gearheads
        rows = gearhead_rows(gearheads)
        motor = motor_columns(
            motors.rotor_inertia_kg_m2, motors.friction_torque_nm, motors.viscous_friction_nm_s
        )
        of_torque = np.einsum("bi,bij->jb", motor, rows)
        if samples.moves_demand:
            self.moved = moved_load(self.nodes, samples)
            functions = self.moved.functions
            self.torque = _combined(of_torque, functions)
            self.speed = gearheads.ratio * functions[5]
        else:
            flat = self.nodes.demand.functions.reshape(6, -1).T
            shape = (*self.nodes.q.shape, len(samples))
            self.torque = (flat @ of_torque).reshape(shape)
            self.speed = self.nodes.demand.shaft_speed[..., None] * gearheads.ratio
        self.judged: JudgedMotor = judge(motors, samples.surroundings)
        self.current = _current(self.torque, self.judged)

    def heat_loss(self) -> HeatLoss:
        """Losses of every sample at reference temperatures."""
        m = self.samples.motors
        cold = self.judged.torque_constant_nm_per_a / m.torque_constant_nm_per_a
        means = self.sampler._means
        by_speed = m.friction_torque_nm[:, None] * means(np.abs(self.speed))
        by_speed += m.viscous_friction_nm_s[:, None] * means(self.speed**2)
        by_speed += m.brake_coil_w[:, None] * self.sampler._released
        return HeatLoss(
            duration_s=self.sampler._parts[0],
            copper_loss_w=(m.resistance_ohm * cold**2)[:, None] * means(self.current**2),
            speed_loss_w=by_speed,
            resistance_coefficient_per_k=m.resistance_coefficient_per_k,
            resistance_reference_degc=m.resistance_reference_degc,
            magnet_coefficient_per_k=m.magnet_coefficient_per_k,
            magnet_reference_degc=m.magnet_reference_degc,
        )

    def largest(self, function: Callable[..., FloatArray], *signals: FloatArray) -> FloatArray:
        """Largest value over the cycle of a function of signals, refined on the piece that leads at its nodes."""
        at_nodes = np.max(function(*signals), axis=1)  # (P, B)
        piece = at_nodes.argmax(axis=0)
        column = np.arange(len(piece))
        leading = (signal[piece, :, column].T for signal in signals)  # (K, B)
        values = function(*(self.nodes.dense @ signal for signal in leading))
        top = np.clip(values.argmax(axis=0), 1, len(values) - 2)
        left, middle, right = (values[top + step, column] for step in (-1, 0, 1))
        with np.errstate(divide="ignore", invalid="ignore"):
            bend = 2.0 * middle - left - right
            vertex = np.where(
                (bend > 0.0) & (np.abs(right - left) < 2.0 * bend),
                middle + (right - left) ** 2 / (8.0 * bend),
                -np.inf,
            )
        return np.asarray(np.fmax(np.fmax(at_nodes[piece, column], values.max(axis=0)), vertex))

    def plane(self) -> FloatArray:
        """Largest torque over voltage-limited torque, as in `torque_plane`, hot or cold, whichever is worse."""
        cold = judge_cold(self.samples.motors, self.samples.surroundings)
        return np.fmax(self._plane(self.judged), self._plane(cold))

    def _plane(self, judged: JudgedMotor) -> FloatArray:
        each = np.arange(len(self.samples))
        direction = self.nodes.demand.direction[:, None, None]
        along = self.torque * np.where(direction == 0.0, 1.0, direction)
        omega = np.abs(self.speed)
        # Beyond the no-load speed a piece matters whatever its torque is.
        emf = judged.torque_constant_nm_per_a * np.max(omega, axis=1)
        fast = np.any(emf >= judged.voltage_available_v, axis=1)
        best = np.zeros(len(self.samples))
        for branch, sign in ((0, 1.0), (1, -1.0)):
            demanded = np.where(direction == 0.0, np.abs(along), sign * along)
            pieces = np.flatnonzero(np.any(demanded > 0.0, axis=(1, 2)) | fast)
            if not len(pieces):
                continue

            def ratio(torque: FloatArray, speed: FloatArray, branch: int = branch) -> FloatArray:
                return plane_ratio(branch, torque, speed, judged, each)[0]

            best = np.fmax(best, self.largest(ratio, demanded[pieces], omega[pieces]))
        return best

    def columns(self) -> dict[str, FloatArray]:
        """Everything that the sampled checks measure, by name, shape (B,) each."""
        s, nodes, judged = self.samples, self.nodes, self.judged
        squared = self.current**2
        torque_peak = self.largest(np.abs, self.torque)
        current_peak = _current(torque_peak, judged)
        mean_square = nodes.mean(squared)
        heat = hottest_winding(
            self.sampler._heat_plan,
            thermal_network(s.motors, s.surroundings),
            self.heat_loss(),
            s.surroundings.ambient_degc,
        )
        per_drive = 1.0 / motor_amperes_per_drive_ampere(s.motors, s.drives)
        in_drive = squared.reshape(-1, len(s)) * per_drive**2
        history = self.sampler._history
        return self._of_load() | {
            "torque_peak_nm": torque_peak,
            "torque_rms_nm": np.sqrt(nodes.mean(self.torque**2)),
            "current_peak_a": current_peak,
            "current_rms_a": np.sqrt(mean_square),
            "voltage_peak_v": self._voltage(),
            "voltage_available_v": judged.voltage_available_v,
            "plane_utilisation": self.plane(),
            "copper_loss_mean_w": (judged.resistance_ohm - judged.cable_ohm) * mean_square,
            "thermal_known": heat.known,
            "has_equilibrium": heat.has_equilibrium,
            "winding_max_degc": heat.winding_max_degc,
            "resistance_ohm": judged.resistance_ohm - judged.cable_ohm,
            "torque_constant_nm_per_a": judged.torque_constant_nm_per_a,
            "judged_winding_degc": judged.winding_degc,
            "magnet_degc": judged.magnet_degc,
            "drive_current_peak_a": current_peak * per_drive,
            "drive_current_rms_a": np.sqrt(history.windowed_square(in_drive)),
            "overload_a2s": _overload(
                history, in_drive, current_peak * per_drive, s.drives.continuous_current_a
            ),
        }

    def _of_load(self) -> dict[str, FloatArray]:
        """What does not depend on the current: speeds, inertia, torque of the driven shaft."""
        s, nodes, demand = self.samples, self.nodes, self.sampler.demand
        n, J = s.gearheads.ratio, s.motors.rotor_inertia_kg_m2
        if self.moved is None:
            return {
                "speed_peak_rad_s": n * demand.shaft_speed_peak,
                "speed_rms_rad_s": n * demand.shaft_speed_rms,
                "speed_mean_abs_rad_s": n * demand.shaft_speed_mean,
                "inertia_ratio": demand.load_inertia / n**2 / J,
            }
        return {
            "speed_peak_rad_s": self.largest(np.abs, self.speed),
            "speed_rms_rad_s": np.sqrt(nodes.mean(self.speed**2)),
            "speed_mean_abs_rad_s": nodes.mean(np.abs(self.speed)),
            "inertia_ratio": self.moved.load_inertia / n**2 / J,
            "shaft_torque_peak_nm": self.largest(np.abs, self.moved.torque),
            **{_equivalent(p): torque for p, torque in self.moved.torque_equivalent.items()},
        }

    def _voltage(self) -> FloatArray:
        """Largest of the voltages with and without L di/dt, hot or cold."""
        cold = judge_cold(self.samples.motors, self.samples.surroundings)
        return np.fmax(
            self._voltage_of(self.judged, self.current), self._voltage_of(cold, _current(self.torque, cold))
        )

    def _voltage_of(self, judged: JudgedMotor, current: FloatArray) -> FloatArray:
        electrical = (
            judged.resistance_ohm,
            judged.inductance_h,
            judged.torque_constant_nm_per_a,
            judged.reactance_per_speed,
        )

        def voltage(current: FloatArray, speed: FloatArray, slope: FloatArray) -> FloatArray:
            with_slope = terminal_voltage(current, speed, slope, *electrical)
            return np.maximum(with_slope, terminal_voltage(current, speed, np.zeros(1), *electrical))

        return self.largest(voltage, current, self.speed, self.nodes.slope(current))


def _current(torque: FloatArray, judged: JudgedMotor) -> FloatArray:
    """Current for an air-gap torque at the temperatures of `judged`. [A]"""
    return np.asarray(current_of_torque(torque, judged.torque_constant_nm_per_a, judged.saturation_per_a2))


def _overload(
    history: CurrentHistory, squared: FloatArray, peak: FloatArray, continuous: FloatArray
) -> FloatArray:
    """I²t accumulator; nothing gathers where the current never exceeds the continuous one. [A²·s]"""
    found = np.where(np.isnan(continuous), np.nan, 0.0)
    above = np.flatnonzero(peak > continuous)
    if len(above):
        some = squared if len(above) == len(peak) else squared[:, above]
        found[above] = history.overload(some, continuous[above] ** 2)
    return found


def _combined(weights: FloatArray, functions: FloatArray) -> FloatArray:
    """Sum of six functions with weights of shape (6, B)."""
    total = weights[0] * functions[0]
    for weight, function in zip(weights[1:], functions[1:], strict=True):
        total += weight * function
    return np.asarray(total)
