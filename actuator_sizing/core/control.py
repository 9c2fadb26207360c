"""The textbook cascade of current, speed and position loop: its settings, how they are found, how it runs."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.cascade_kernel import (
    CURRENT,
    CURRENT_INTEGRATOR,
    FILTERED_SPEED,
    LAST_SEEN,
    LAST_VOLTAGE,
    LOAD_SPEED,
    MOTOR_ANGLE,
    MOTOR_SPEED,
    RECORDED,
    RECORDED_DIRECT,
    STATES,
    TWIST,
    cascade_loop,
    compiled_loop,
)
from actuator_sizing.core.plant import Plant

FloatArray = NDArray[np.float64]

BACK_CALCULATION, CONDITIONAL = "back-calculation", "conditional"
EMF_GAIN = 9  # place in `LoopSettings.row` of the only gain that is relative to the plant
_NO_DIRECT_AXIS = (0.0, 1.0, 0.0, 0.0)
_CHUNK = 65_536  # samples held in memory at a time
#: Above so many samples the compiler's start is worth its time, where it is installed.
_WORTH_COMPILING = 2_000_000


@dataclass(frozen=True, kw_only=True)
class LoopSettings:
    """Every setting of the cascade, in SI and in the motor's kind of ampere.

    Attributes
    ----------
    sample_time_s : float
        Sampling time of all loops.
    position_gain_per_s : float
        Speed commanded per position error.
    speed_gain_a_s_per_rad, speed_reset_time_s : float
        Speed PI: current per speed error, and its reset time (infinite: no integrator).
    current_gain_v_per_a, current_reset_time_s : float
        Current PI: voltage per current error, and its reset time.
    speed_feedforward_ratio, torque_feedforward_ratio, back_emf_feedforward_ratio : float
        Part of the commanded speed, of the planned current, of the back-EMF that is added in advance.
    setpoint_filter_s : float
        Time constant of the filter of the speed set point; 0: none.
    notch_rad_s, notch_width_ratio : float
        Notch filter of the current set point: its frequency (0: none) and the damping of its poles.
    current_limit_a, voltage_limit_v : float
        What motor and drive allow.
    reactance_ohm_s : float
        Pole pairs times inductance, where cross coupling takes voltage away.
    anti_windup : str
        ``"back-calculation"`` or ``"conditional"`` for the speed loop; the current loop always back-calculates.
    encoder_step_rad : float
        Resolution of the motor's encoder; 0: ideal.
    is_delayed : bool
        Whether the voltage acts one sample after the measurement.
    is_dq : bool
        Whether a sinusoidal machine with known reactance has a direct axis of its own, commanded to zero current
        and decoupled as far as the back-EMF is; else it is held at zero and the reactance only takes voltage away.
    """

    sample_time_s: float
    position_gain_per_s: float
    speed_gain_a_s_per_rad: float
    speed_reset_time_s: float
    current_gain_v_per_a: float
    current_reset_time_s: float
    speed_feedforward_ratio: float = 1.0
    torque_feedforward_ratio: float = 1.0
    back_emf_feedforward_ratio: float = 1.0
    setpoint_filter_s: float = 0.0
    notch_rad_s: float = 0.0
    notch_width_ratio: float = 0.7
    current_limit_a: float = math.inf
    voltage_limit_v: float = math.inf
    reactance_ohm_s: float = 0.0
    anti_windup: str = BACK_CALCULATION
    encoder_step_rad: float = 0.0
    is_delayed: bool = True
    is_dq: bool = False

    def __post_init__(self) -> None:
        """Refuse settings that mean nothing."""
        for f in fields(self):
            value = getattr(self, f.name)
            if not isinstance(value, int | float):
                continue
            positive = f.name in ("sample_time_s", "speed_reset_time_s", "current_reset_time_s",
                                  "current_limit_a", "voltage_limit_v", "notch_width_ratio")  # fmt: skip
            good = value > 0.0 if positive else value >= 0.0
            unbounded = f.name.endswith(("_limit_a", "_limit_v", "_reset_time_s"))
            if not good or not (math.isfinite(value) or unbounded):
                raise ValueError(
                    f"loop setting {f.name} is {value!r}, expected a finite number {'>' if positive else '≥'} 0"
                )
        if self.anti_windup not in (BACK_CALCULATION, CONDITIONAL):
            raise ValueError(f"anti_windup is {self.anti_windup!r}, expected back-calculation or conditional")
        if self.notch_rad_s * self.sample_time_s >= math.pi:
            raise ValueError("the notch lies above half the sampling rate; lower it or sample faster")

    def row(self) -> tuple[float, ...]:
        """The settings as the loop takes them."""
        h = self.sample_time_s
        speed_integral = self.speed_gain_a_s_per_rad * h / self.speed_reset_time_s
        current_integral = self.current_gain_v_per_a * h / self.current_reset_time_s
        # Tracking time of the back-calculation: the reset time of each loop (K. J. Åström and T. Hägglund,
        # PID Controllers, 2nd ed., section 3.5, from memory).
        return (
            self.position_gain_per_s,
            self.speed_feedforward_ratio,
            self.speed_gain_a_s_per_rad,
            speed_integral,
            min(h / self.speed_reset_time_s, 1.0),
            1.0 if self.anti_windup == CONDITIONAL else 0.0,
            self.current_gain_v_per_a,
            current_integral,
            min(h / self.current_reset_time_s, 1.0),
            self.back_emf_feedforward_ratio,
            self.current_limit_a,
            self.voltage_limit_v,
            self.reactance_ohm_s,
            -math.expm1(-h / self.setpoint_filter_s) if self.setpoint_filter_s > 0.0 else 1.0,
            float(self.is_delayed),
            self.encoder_step_rad,
            h,
            *self._notch(),
            *_NO_DIRECT_AXIS,
        )

    def _notch(self) -> tuple[float, ...]:
        """Flag and coefficients of the notch: bilinear transform, exact at its own frequency."""
        w, h = self.notch_rad_s, self.sample_time_s
        if w == 0.0:
            return (0.0, 1.0, 0.0, 0.0, 0.0, 0.0)
        g = math.tan(0.5 * w * h)
        zero, pole = 2.0 * 0.1 * self.notch_width_ratio * g, 2.0 * self.notch_width_ratio * g
        scale = 1.0 + pole + g * g
        middle = 2.0 * (g * g - 1.0) / scale
        return (1.0, (1.0 + zero + g * g) / scale, middle, (1.0 - zero + g * g) / scale,
                middle, (1.0 - pole + g * g) / scale)  # fmt: skip

    def unlimited(self) -> LoopSettings:
        """The linear part: no limits, ideal encoder."""
        return replace(
            self,
            current_limit_a=math.inf,
            voltage_limit_v=math.inf,
            encoder_step_rad=0.0,
            reactance_ohm_s=0.0,
            is_dq=False,
        )


class Cascade:
    """A plant under the cascade, advanced piece by piece; the states stay from one call to the next."""

    def __init__(
        self, plant: Plant, settings: LoopSettings, *, angle_rad: float = 0.0, speed_rad_s: float = 0.0,
        load_torque_nm: float = 0.0, is_compiled: bool = False,
    ) -> None:  # fmt: skip
        """Start in equilibrium with a steady speed and a steady external torque on the load.

        Parameters
        ----------
        plant : Plant
            What is moved.
        settings : LoopSettings
            The loops.
        angle_rad, speed_rad_s : float
            Angle and speed at the start. [rad], [rad/s]
        load_torque_nm : float
            External torque on the load at the start. [N·m]
        is_compiled : bool
            Run the loop as machine code, where the optional compiler is installed.
        """
        self.settings = settings
        self._gains = settings.row()
        self._loop: Callable[..., None] = (compiled_loop() if is_compiled else None) or cascade_loop
        self.is_compiled = self._loop is not cascade_loop
        self.change(plant)
        K = plant.torque_constant_nm_per_a
        held = load_torque_nm - plant.load_viscous_nm_s * speed_rad_s
        current = (plant.motor_viscous_nm_s * speed_rad_s - held) / K
        state = [0.0] * STATES
        state[CURRENT], state[MOTOR_SPEED], state[LOAD_SPEED] = current, speed_rad_s, speed_rad_s
        state[MOTOR_ANGLE] = state[LAST_SEEN] = angle_rad
        if settings.encoder_step_rad > 0.0:
            step = settings.encoder_step_rad
            state[LAST_SEEN] = (
                math.floor(angle_rad / step + 0.5) * step - speed_rad_s * settings.sample_time_s
            )
        voltage = plant.resistance_ohm * current + K * speed_rad_s
        state[LAST_VOLTAGE] = voltage
        state[FILTERED_SPEED] = speed_rad_s
        state[CURRENT_INTEGRATOR] = voltage - settings.back_emf_feedforward_ratio * speed_rad_s * K
        if not plant.is_rigid:
            state[TWIST] = -held / plant.stiffness_nm_per_rad - math.copysign(0.5 * plant.backlash_rad, held)
            if held == 0.0:
                state[TWIST] = 0.0
        self.state = state

    def change(self, plant: Plant) -> None:
        """Go on with another plant, for example another payload.

        Parameters
        ----------
        plant : Plant
            What is moved from here on.
        """
        self.plant = plant
        self._plant, self._free = plant.sampled(self.settings.sample_time_s)
        gains = list(self._gains)
        gains[EMF_GAIN] = self.settings.back_emf_feedforward_ratio * plant.torque_constant_nm_per_a
        if self.settings.is_dq:
            gains[-len(_NO_DIRECT_AXIS) :] = direct_axis(plant, self.settings)
        self._gains = tuple(gains)

    def advance(
        self,
        angle_rad: FloatArray,
        speed_rad_s: FloatArray,
        feedforward_a: FloatArray,
        load_torque_nm: FloatArray,
    ) -> Mapping[str, Any]:
        """Run over samples and record what happened at each of them.

        Parameters
        ----------
        angle_rad, speed_rad_s : ndarray, shape (n,)
            Commanded angle and speed at each sample. [rad], [rad/s]
        feedforward_a : ndarray, shape (n,)
            Current added in advance. [A]
        load_torque_nm : ndarray, shape (n,)
            External torque on the load over each sample, positive where it speeds up. [N·m]

        Returns
        -------
        dict of str to ndarray, shape (n,)
            `cascade_kernel.RECORDED` and ``saturated``: 1 current, 2 voltage, 3 both; of a machine in dq states
            `RECORDED_DIRECT` too. [-]
        """
        n = len(angle_rad)
        names = (*RECORDED, *RECORDED_DIRECT) if self.settings.is_dq else RECORDED
        inputs = (angle_rad, speed_rad_s, feedforward_a, load_torque_nm)
        if self.is_compiled:
            record = np.zeros((len(RECORDED) + len(RECORDED_DIRECT), n))
            saturated = np.zeros(n, dtype=np.int64)
            state = np.array(self.state)
            arrays = [np.ascontiguousarray(x, dtype=float) for x in inputs]
            self._loop(state, self._plant, self._free, self._gains, *arrays, record, saturated)
            self.state = state.tolist()
            return dict(zip(names, record, strict=False)) | {"saturated": saturated}
        parts: list[list[FloatArray]] = []
        flags: list[FloatArray] = []
        for start in range(0, n, _CHUNK):
            lists = [np.asarray(x[start : start + _CHUNK], dtype=float).tolist() for x in inputs]
            count = len(lists[0])
            rows = [[0.0] * count for _ in names]
            flag = [0] * count
            room = rows if len(rows) > len(RECORDED) else [*rows, [], []]
            self._loop(self.state, self._plant, self._free, self._gains, *lists, room, flag)
            parts.append([np.array(row) for row in rows])
            flags.append(np.array(flag))
        columns = (
            [np.concatenate(column) for column in zip(*parts, strict=True)]
            if parts
            else [np.empty(0)] * len(names)
        )
        return dict(zip(names, columns, strict=True)) | {
            "saturated": np.concatenate(flags) if flags else np.empty(0)
        }


def direct_axis(plant: Plant, settings: LoopSettings) -> tuple[float, float, float, float]:
    """What the loop needs of the direct axis.

    Parameters
    ----------
    plant : Plant
        Motor with its reactance; without one there is no direct axis. [-]
    settings : LoopSettings
        The loops. [-]

    Returns
    -------
    tuple of float
        Half the turn of the current per speed and sample, decay over a sample, current per volt over a sample, and
        the decoupling voltage per speed and current. [-]
    """
    if not plant.reactance_ohm_s > 0.0:
        return _NO_DIRECT_AXIS
    h, R, L = settings.sample_time_s, plant.resistance_ohm, plant.inductance_h
    keep = math.exp(-R * h / L)
    return (
        0.5 * h * plant.reactance_ohm_s / L,
        keep,
        (1.0 - keep) / R,
        settings.back_emf_feedforward_ratio * plant.reactance_ohm_s,
    )


def worth_compiling(samples: int) -> bool:
    """Whether a run is long enough for the optional compiler, which takes seconds to start.

    Parameters
    ----------
    samples : int
        Length of the run. [-]

    Returns
    -------
    bool
        True where machine code is available and pays. [-]
    """
    return samples >= _WORTH_COMPILING and compiled_loop() is not None
