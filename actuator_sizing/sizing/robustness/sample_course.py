"""Courses of many samples of one set over its cycle, and everything that checks read off them."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.capability import terminal_voltage
from actuator_sizing.core.machine import (
    JudgedMotor,
    current_of_torque,
    judge,
    judge_cold,
    motor_amperes_per_drive_ampere,
)
from actuator_sizing.core.moments import gearhead_rows, motor_columns
from actuator_sizing.core.thermal import HeatLoss
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.robustness.cycle_nodes import CycleNodes, MovedLoad, moved_load
from actuator_sizing.sizing.robustness.drive_current import CurrentHistory
from actuator_sizing.sizing.robustness.heat import HeatPlan, hottest_winding
from actuator_sizing.sizing.robustness.heat_parts import HeatParts
from actuator_sizing.sizing.robustness.state import Samples
from actuator_sizing.sizing.thermal_data import thermal_network
from actuator_sizing.sizing.torque_plane import plane_ratio

FloatArray = NDArray[np.float64]
#: A function of signals, and the signals.
Peak = tuple[Callable[..., FloatArray], tuple[FloatArray, ...]]

#: A piece takes part in the search of a peak if it comes this near to the leading one in a pilot sample, or would if
#: it came nearer by its own scatter among them once more.
_NEAR, _TOUCHING = 0.9, 1.0
#: Quantities that are peaks, and how many functions each is the largest of: motoring or braking, hot or cold.
_PEAKS = {"torque": 1, "voltage": 2, "plane": 4}
Pieces = dict[str, tuple[NDArray[np.intp], ...]]
_UPPER = tuple((i, j) for i in range(6) for j in range(i, 6))


@dataclass(frozen=True)
class PreparedCycle:
    """What every sample of a set shares.

    Attributes
    ----------
    demand : Demand
        The cycle in full. [-]
    nodes : CycleNodes
        The cycle at few nodes. [-]
    parts : HeatParts
        How it is divided for heating. [-]
    history : CurrentHistory
        What the drive sees, from squares at the nodes. [-]
    """

    demand: Demand
    nodes: CycleNodes
    parts: HeatParts
    history: CurrentHistory

    @cached_property
    def products(self) -> FloatArray:
        """Products of the six functions of the demand at the nodes, shape (P·K, 21), pairs of unlike ones doubled."""
        flat = self.nodes.demand.functions.reshape(6, -1)
        return np.stack([flat[i] * flat[j] * (1.0 if i == j else 2.0) for i, j in _UPPER], axis=1)

    @cached_property
    def of_products(self) -> tuple[FloatArray, FloatArray, CurrentHistory]:
        """Mean, means over the parts, and history of the squared torque, from products of its coefficients."""
        pieces = (*self.nodes.q.shape, len(_UPPER))
        return (
            self.nodes.weights @ self.products,
            self.parts.means(self.products.reshape(pieces)).T,
            self.history.of_basis(self.products),
        )


class SampleCourse:
    """B samples over the cycle; arrays of node values have the shape (P, K, B).

    Parameters
    ----------
    cycle : PreparedCycle
        The cycle. [-]
    samples : Samples
        B samples, their drives derated. [-]
    pieces : dict of str to tuple of ndarray of int, optional
        Pieces in which peaks are looked for, for each function of each quantity; default all. [-]
    """

    def __init__(self, cycle: PreparedCycle, samples: Samples, pieces: Pieces | None = None):
        self.cycle, self.samples, self.nodes = cycle, samples, cycle.nodes
        everywhere = np.arange(len(cycle.nodes.q))
        self.pieces = pieces or {name: (everywhere,) * count for name, count in _PEAKS.items()}
        motors, gearheads = samples.motors, samples.gearheads
        motor = motor_columns(
            motors.rotor_inertia_kg_m2, motors.friction_torque_nm, motors.viscous_friction_nm_s
        )
        self.weights = np.einsum("bi,bij->jb", motor, gearhead_rows(gearheads))
        self.judged: JudgedMotor = judge(motors, samples.surroundings)
        self.cold: JudgedMotor = judge_cold(motors, samples.surroundings)
        self.moved: MovedLoad | None = moved_load(self.nodes, samples) if samples.moves_demand else None
        self.bends = bool(np.any(self.judged.saturation_per_a2 > 0.0))

    # -- signals ------------------------------------------------------------------------------------
    def _torque_at(self, pieces: NDArray[np.intp]) -> FloatArray:
        if self.moved is not None:
            return _combined(self.weights, self.moved.functions[:, pieces])
        functions = self.nodes.demand.functions[:, pieces]
        return np.asarray((functions.reshape(6, -1).T @ self.weights).reshape(*functions.shape[1:], -1))

    @cached_property
    def torque(self) -> FloatArray:
        """Air-gap torque on every piece. [N·m]"""
        return self._torque_at(np.arange(len(self.nodes.q)))

    @cached_property
    def current(self) -> FloatArray:
        """Current on every piece at judged temperatures. [A]"""
        return _current(self.torque, self.judged)

    def _speed_at(self, pieces: NDArray[np.intp]) -> FloatArray:
        if self.moved is not None:
            speed = self.moved.functions[5][pieces]
        else:
            speed = self.nodes.demand.shaft_speed[pieces][..., None]
        return np.asarray(speed * self.samples.gearheads.ratio)

    # -- mean squares -------------------------------------------------------------------------------
    @cached_property
    def squares(self) -> tuple[FloatArray, FloatArray, FloatArray, CurrentHistory, FloatArray]:
        """Mean square of torque and of current, means over the parts, and what the history is taken of.

        Where current goes with torque all of them are quadratic in the six coefficients of the torque, and exact
        without a course; else they are taken from the current at the nodes.
        """
        if self.moved is None and not self.bends:
            mean, parts, history = self.cycle.of_products
            products = np.stack([self.weights[i] * self.weights[j] for i, j in _UPPER])
            per_torque = 1.0 / self.judged.torque_constant_nm_per_a**2
            torque = mean @ products
            return (
                torque,
                torque * per_torque,
                (parts @ products * per_torque).T,
                history,
                products * per_torque,
            )
        squared = self.current**2
        return (
            self.nodes.mean(self.torque**2),
            self.nodes.mean(squared),
            self.cycle.parts.means(squared),
            self.cycle.history,
            squared.reshape(-1, len(self.samples)),
        )

    def heat_loss(self) -> HeatLoss:
        """Losses of every sample at reference temperatures."""
        m, parts = self.samples.motors, self.cycle.parts
        cold = self.judged.torque_constant_nm_per_a / m.torque_constant_nm_per_a
        n = self.samples.gearheads.ratio
        # Samples last while it is computed: the steps of the cycle then read whole rows.
        if self.moved is None:
            each, square = (means[:, None] for means in parts.of_speed)
        else:
            each, square = (parts.means(f(self.moved.functions[5])).T for f in (np.abs, np.square))
        by_speed = m.friction_torque_nm * n * each + m.viscous_friction_nm_s * n**2 * square
        by_speed += m.brake_coil_w * parts.released[:, None]
        return HeatLoss(
            duration_s=parts.duration_s,
            copper_loss_w=(m.resistance_ohm * cold**2)[:, None] * self.squares[2],
            speed_loss_w=by_speed.T,
            resistance_coefficient_per_k=m.resistance_coefficient_per_k,
            resistance_reference_degc=m.resistance_reference_degc,
            magnet_coefficient_per_k=m.magnet_coefficient_per_k,
            magnet_reference_degc=m.magnet_reference_degc,
        )

    # -- peaks --------------------------------------------------------------------------------------
    def largest(self, function: Callable[..., FloatArray], *signals: FloatArray) -> FloatArray:
        """Largest value over the pieces of a function of signals, refined on the piece that leads at its nodes."""
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

    def _functions(self, quantity: str) -> Iterator[Peak]:
        """Functions that a quantity is the largest of, each with its signals on the pieces to look at."""
        pieces = self.pieces[quantity]
        if quantity == "torque":
            yield np.abs, (self._torque_at(pieces[0]),)
            return
        of = self._voltage if quantity == "voltage" else self._plane
        for number, some in enumerate(pieces):
            if len(some):
                yield of(number, some)

    def _voltage(self, number: int, pieces: NDArray[np.intp]) -> Peak:
        """Larger of the voltages with and without L di/dt, hot (0) or cold (1)."""
        judged = (self.judged, self.cold)[number]
        electrical = (
            judged.resistance_ohm,
            judged.inductance_h,
            judged.torque_constant_nm_per_a,
            judged.reactance_per_speed,
        )

        def voltage(current: FloatArray, speed: FloatArray, slope: FloatArray) -> FloatArray:
            with_slope = terminal_voltage(current, speed, slope, *electrical)
            return np.maximum(with_slope, terminal_voltage(current, speed, np.zeros(1), *electrical))

        current = _current(self._torque_at(pieces), judged)
        return voltage, (current, self._speed_at(pieces), self.nodes.slope(current, pieces))

    def _plane(self, number: int, pieces: NDArray[np.intp]) -> Peak:
        """Torque over voltage-limited torque, as in `torque_plane`: motoring hot and cold, braking hot and cold."""
        judged, branch = (self.judged, self.cold)[number % 2], number // 2
        each = np.arange(len(self.samples))
        direction = self.nodes.demand.direction[pieces][:, None, None]
        along = self._torque_at(pieces) * np.where(direction == 0.0, 1.0, direction)
        demanded = np.where(direction == 0.0, np.abs(along), -along if branch else along)

        def ratio(torque: FloatArray, speed: FloatArray) -> FloatArray:
            return plane_ratio(branch, torque, speed, judged, each)[0]

        return ratio, (demanded, np.abs(self._speed_at(pieces)))

    def _peak(self, quantity: str) -> FloatArray:
        """Largest value of a quantity, shape (B,)."""
        found = np.zeros(len(self.samples))
        for function, signals in self._functions(quantity):
            found = np.fmax(found, self.largest(function, *signals))
        return found

    def leading_pieces(self) -> Pieces:
        """Pieces of a pilot that come near the leading one, for each function of each quantity."""
        chosen = {}
        for quantity in _PEAKS:
            at_nodes = [np.max(function(*signals), axis=1) for function, signals in self._functions(quantity)]
            top = np.max([each.max(axis=0) for each in at_nodes], axis=0)
            kept = []
            for each in at_nodes:
                with np.errstate(divide="ignore", invalid="ignore"):
                    share = np.where(top > 0.0, each / top, 0.0)
                share = np.nan_to_num(share, nan=1.0)  # both infinite
                near = share.max(axis=1)
                kept.append(np.flatnonzero((near >= _NEAR) | (near + np.ptp(share, axis=1) >= _TOUCHING)))
            chosen[quantity] = tuple(kept)
        return chosen

    # -- what the checks measure --------------------------------------------------------------------
    def columns(self, plan: HeatPlan) -> dict[str, FloatArray]:
        """Everything that the sampled checks measure, by name, shape (B,) each."""
        s, judged = self.samples, self.judged
        torque_square, mean_square, _, history, basis = self.squares
        torque_peak = self._peak("torque")
        current_peak = _current(torque_peak, judged)
        heat = hottest_winding(
            plan, thermal_network(s.motors, s.surroundings), self.heat_loss(), s.surroundings.ambient_degc
        )
        per_drive = 1.0 / motor_amperes_per_drive_ampere(s.motors, s.drives)
        in_drive = basis * per_drive**2
        return self._of_load() | {
            "torque_peak_nm": torque_peak,
            "torque_rms_nm": np.sqrt(np.maximum(torque_square, 0.0)),
            "current_peak_a": current_peak,
            "current_rms_a": np.sqrt(np.maximum(mean_square, 0.0)),
            "voltage_peak_v": self._peak("voltage"),
            "voltage_available_v": judged.voltage_available_v,
            "plane_utilisation": self._peak("plane"),
            "copper_loss_mean_w": (judged.resistance_ohm - judged.cable_ohm) * mean_square,
            "thermal_known": heat.known,
            "has_equilibrium": heat.has_equilibrium,
            "winding_max_degc": heat.winding_max_degc,
            "resistance_ohm": judged.resistance_ohm - judged.cable_ohm,
            "torque_constant_nm_per_a": judged.torque_constant_nm_per_a,
            "judged_winding_degc": judged.winding_degc,
            "magnet_degc": judged.magnet_degc,
            "drive_current_peak_a": current_peak * per_drive,
            "drive_current_rms_a": np.sqrt(np.maximum(history.windowed_square(in_drive), 0.0)),
            "overload_a2s": _overload(
                history, in_drive, current_peak * per_drive, s.drives.continuous_current_a
            ),
        }

    def _of_load(self) -> dict[str, FloatArray]:
        """What does not depend on the current: speeds, inertia, torque of the driven shaft."""
        s, nodes, demand = self.samples, self.nodes, self.cycle.demand
        n, J = s.gearheads.ratio, s.motors.rotor_inertia_kg_m2
        if self.moved is None:
            return {
                "speed_peak_rad_s": n * demand.shaft_speed_peak,
                "speed_rms_rad_s": n * demand.shaft_speed_rms,
                "speed_mean_abs_rad_s": n * demand.shaft_speed_mean,
                "inertia_ratio": demand.load_inertia / n**2 / J,
            }
        speed = self.moved.functions[5]
        return {
            "speed_peak_rad_s": n * self.largest(np.abs, speed),
            "speed_rms_rad_s": n * np.sqrt(nodes.mean(speed**2)),
            "speed_mean_abs_rad_s": n * nodes.mean(np.abs(speed)),
            "inertia_ratio": self.moved.load_inertia / n**2 / J,
            "shaft_torque_peak_nm": self.largest(np.abs, self.moved.torque),
            **{equivalent_name(p): torque for p, torque in self.moved.torque_equivalent.items()},
        }


def equivalent_name(exponent: float) -> str:
    """Name of the column with the equivalent torque for an exponent."""
    return f"shaft_torque_equivalent_{exponent:.3g}_nm"


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
