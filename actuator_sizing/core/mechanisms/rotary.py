"""A load that turns with the driven shaft, alone or under gravity."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from actuator_sizing.core.friction import Friction
from actuator_sizing.core.mechanisms.base import (
    GRAVITY_M_S2,
    MASS,
    ROTARY,
    Complaint,
    Efforts,
    FloatArray,
    Mechanism,
    Parameter,
)

TURNING_PARAMETERS = (
    Parameter("load inertia", "inertia", "everything that turns with the driven shaft, without payload",
              minimum=0.0, example="1.8 kg·m²"),
    Parameter("friction torque", "torque", "constant (Coulomb) friction of bearing and seals at the driven "
              "shaft", default=0.0, minimum=0.0, example="2 Nm"),
    Parameter("viscous friction", "rotary damping", "friction in proportion to speed at the driven shaft",
              default=0.0, minimum=0.0, example="0 Nm·s/rad"),
    Parameter("breakaway torque", "torque", "friction at the very start of motion; counts where it is above "
              "the friction torque", default=0.0, minimum=0.0, example="0 Nm"),
    Parameter("Stribeck speed", "angular speed", "speed at which breakaway has mostly given way to sliding",
              default=0.05, positive=True, minimum=0.0, maximum=1000.0, example="0.5 rpm"),
    Parameter("cold grease factor", "ratio", "factor on constant, breakaway and viscous friction while cold",
              default=1.0, minimum=0.1, maximum=20.0, example="1"),
)  # fmt: skip


@dataclass(frozen=True, kw_only=True)
class TurningLoad(Mechanism):
    """An inertia with friction on the driven shaft; the subclass adds what pulls at it."""

    coordinate: ClassVar[str] = ROTARY
    load_parts_field: ClassVar[str] = "load_inertia"
    shaft_parts_field: ClassVar[str] = "load_inertia"

    load_inertia: float
    friction_torque: float = 0.0
    viscous_friction: float = 0.0
    breakaway_torque: float = 0.0
    stribeck_speed: float = 0.05
    cold_grease_factor: float = 1.0

    @property
    def friction(self) -> Friction:
        """Friction of the bearing."""
        return Friction(
            self.friction_torque,
            self.breakaway_torque,
            self.stribeck_speed,
            self.viscous_friction,
            self.cold_grease_factor,
        )

    @property
    def resolved_by_nodes(self) -> bool:
        """Not where friction bends with speed."""
        return not self.friction.is_curved

    def ratio_at(self, position: FloatArray) -> tuple[FloatArray, FloatArray]:
        """One to one."""
        return np.ones_like(position), np.zeros_like(position)

    def _inertia(self, payload: FloatArray) -> FloatArray:
        return np.asarray(self.load_inertia + payload)

    def _held(self, position: FloatArray, payload: FloatArray) -> FloatArray:
        """Torque of gravity and springs along +x, from the derivative of their energy."""
        return 0.0 * position

    def efforts(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        direction: FloatArray,
        payload: FloatArray,
        process: FloatArray,
    ) -> Efforts:
        """Euler's law about a fixed axis; friction only where the load moves."""
        return Efforts(
            inertia=self._inertia(payload) * acceleration,
            gravity=self._held(position, payload),
            friction=self.friction.effort(speed, direction),
            process=process + 0.0 * position,
        )

    def inertia_at_shaft(self, payload: FloatArray) -> FloatArray:
        """Stated inertia plus payload."""
        return self._inertia(payload)


@dataclass(frozen=True, kw_only=True)
class RotaryLoad(TurningLoad):
    """Turntable, indexing table, spindle: ``φ = x``; the payload is an inertia."""

    name: ClassVar[str] = "rotary load"
    help: ClassVar[str] = "load that turns with the driven shaft: indexing table, turntable, roll"
    parameters: ClassVar[tuple[Parameter, ...]] = TURNING_PARAMETERS


@dataclass(frozen=True, kw_only=True)
class UnbalancedTable(TurningLoad):
    """Table on an inclined axis with its centre of mass off the axis.

    Energy ``m g e sin γ sin(x + x_0)``, γ being the angle of the axis from the vertical.
    """

    name: ClassVar[str] = "unbalanced table"
    help: ClassVar[str] = "rotary table with an eccentric mass on an inclined axis"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("eccentric mass", "mass", "mass whose centre lies off the axis; its inertia is added",
                  minimum=0.0, example="6 kg"),
        Parameter("eccentricity", "length", "distance of its centre of mass from the axis", minimum=0.0,
                  example="40 mm"),
        Parameter("axis inclination", "angle", "angle of the axis from the vertical: 90° is a level axis",
                  default=np.pi / 2, minimum=0.0, maximum=np.pi, example="30 deg"),
        Parameter("start angle", "angle", "angle of the eccentric mass above the horizontal line across the "
                  "axis, at the start of the cycle", default=0.0, minimum=-10.0, maximum=10.0,
                  example="0 deg"),
        *TURNING_PARAMETERS,
    )  # fmt: skip

    eccentric_mass: float
    eccentricity: float
    axis_inclination: float = np.pi / 2
    start_angle: float = 0.0

    @property
    def resolved_by_nodes(self) -> bool:
        """Not: gravity goes with the sine of the angle."""
        return False

    def _inertia(self, payload: FloatArray) -> FloatArray:
        return np.asarray(super()._inertia(payload) + self.eccentric_mass * self.eccentricity**2)

    def _held(self, position: FloatArray, payload: FloatArray) -> FloatArray:
        moment = self.eccentric_mass * GRAVITY_M_S2 * self.eccentricity * np.sin(self.axis_inclination)
        return np.asarray(moment * np.cos(position + self.start_angle))


@dataclass(frozen=True, kw_only=True)
class Arm(TurningLoad):
    """Arm on a level axis: ``V = (m l + m_p l_p − m_c l_c) g sin θ + ½ k (s(θ) − s_0)²``.

    θ is the angle of the arm above the horizontal, ``s² = a² + b² − 2 a b cos(θ_a − θ)`` the length of the
    spring from its anchor at distance a and angle θ_a to a point on the arm at distance b. The spring only
    pulls. The arm's own inertia about its axis is the load inertia.
    """

    name: ClassVar[str] = "arm"
    help: ClassVar[str] = "arm lifted against gravity, with a counterweight or a counterbalance spring"
    payload_kind: ClassVar[str] = MASS
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("arm mass", "mass", "mass of the arm without payload and counterweight", minimum=0.0,
                  example="8 kg"),
        Parameter("arm mass radius", "length", "distance of the arm's centre of mass from the axis",
                  minimum=0.0, example="250 mm"),
        Parameter("payload radius", "length", "distance of the payload from the axis", default=0.0,
                  minimum=0.0, example="100 mm"),
        Parameter("start angle", "angle", "angle of the arm above the horizontal at the start of the cycle",
                  default=0.0, minimum=-10.0, maximum=10.0, example="-30 deg"),
        Parameter("counterweight mass", "mass", "mass on the other side of the axis; its inertia is added",
                  default=0.0, minimum=0.0, example="0 kg"),
        Parameter("counterweight radius", "length", "distance of the counterweight from the axis", default=0.0,
                  minimum=0.0, example="0 mm"),
        Parameter("spring rate", "linear stiffness", "rate of the counterbalance spring (0 = none)",
                  default=0.0, minimum=0.0, example="0 N/mm"),
        Parameter("spring free length", "length", "length at which the spring pulls no more", default=0.0,
                  minimum=0.0, example="0 mm"),
        Parameter("spring anchor radius", "length", "distance of the fixed end of the spring from the axis",
                  default=0.0, minimum=0.0, example="0 mm"),
        Parameter("spring anchor angle", "angle", "angle of the fixed end above the horizontal",
                  default=np.pi / 2, minimum=-10.0, maximum=10.0, example="90 deg"),
        Parameter("spring arm radius", "length", "distance of the spring's end on the arm from the axis",
                  default=0.0, minimum=0.0, example="0 mm"),
        *TURNING_PARAMETERS,
    )  # fmt: skip

    arm_mass: float
    arm_mass_radius: float
    payload_radius: float = 0.0
    start_angle: float = 0.0
    counterweight_mass: float = 0.0
    counterweight_radius: float = 0.0
    spring_rate: float = 0.0
    spring_free_length: float = 0.0
    spring_anchor_radius: float = 0.0
    spring_anchor_angle: float = np.pi / 2
    spring_arm_radius: float = 0.0

    @property
    def resolved_by_nodes(self) -> bool:
        """Not: gravity goes with the cosine of the angle."""
        return False

    def complaints(self) -> Iterable[Complaint]:
        """A spring without its two ends, and an inertia below that of the stated mass."""
        if self.spring_rate > 0.0 and self.spring_anchor_radius * self.spring_arm_radius == 0.0:
            yield Complaint("spring rate", "a spring without two ends off the axis",
                            "spring anchor radius and spring arm radius above zero",
                            "State both, or leave the spring rate out.")  # fmt: skip
        least = self.arm_mass * self.arm_mass_radius**2
        if self.load_inertia < least * (1.0 - 1e-9):
            yield Complaint("load inertia", f"{self.load_inertia:.6g} kg·m²",
                            f"at least arm mass times its radius squared, {least:.6g} kg·m²",
                            "State the arm's inertia about the axis that it turns on.")  # fmt: skip

    def _inertia(self, payload: FloatArray) -> FloatArray:
        return np.asarray(
            self.load_inertia
            + payload * self.payload_radius**2
            + self.counterweight_mass * self.counterweight_radius**2
        )

    def _held(self, position: FloatArray, payload: FloatArray) -> FloatArray:
        theta = position + self.start_angle
        moment = (
            self.arm_mass * self.arm_mass_radius
            + payload * self.payload_radius
            - self.counterweight_mass * self.counterweight_radius
        )
        return np.asarray(moment * GRAVITY_M_S2 * np.cos(theta) + self._spring(theta))

    def _spring_length(self, theta: FloatArray) -> FloatArray:
        a, b = self.spring_anchor_radius, self.spring_arm_radius
        return np.sqrt(np.maximum(a**2 + b**2 - 2.0 * a * b * np.cos(self.spring_anchor_angle - theta), 0.0))

    def _spring(self, theta: FloatArray) -> FloatArray:
        """``dV/dθ = k (s − s_0) ds/dθ`` with ``ds/dθ = −a b sin(θ_a − θ)/s``."""
        if self.spring_rate == 0.0:
            return 0.0 * theta
        a, b = self.spring_anchor_radius, self.spring_arm_radius
        s = self._spring_length(theta)
        # The kink where the spring goes slack is a border; the middle of the piece says on which side it is.
        middle = s[..., s.shape[-1] // 2, None] if s.ndim else s
        taut = middle > self.spring_free_length
        with np.errstate(divide="ignore", invalid="ignore"):
            pull = self.spring_rate * (1.0 - self.spring_free_length / s)
        pull = np.where(taut & (s > 0.0), pull, 0.0)
        return np.asarray(-pull * a * b * np.sin(self.spring_anchor_angle - theta))

    def borders(self, stated: FloatArray, at_shaft: bool) -> FloatArray:
        """Angles at which the spring goes slack."""
        a, b = self.spring_anchor_radius, self.spring_arm_radius
        if self.spring_rate == 0.0 or not abs(a - b) < self.spring_free_length < a + b:
            return np.empty(0)
        apart = np.arccos((a**2 + b**2 - self.spring_free_length**2) / (2.0 * a * b))
        low, high = float(stated.min()), float(stated.max())
        at = np.array([self.spring_anchor_angle - apart, self.spring_anchor_angle + apart]) - self.start_angle
        turns = np.arange(
            np.floor((low - at.max()) / (2 * np.pi)), np.ceil((high - at.min()) / (2 * np.pi)) + 1
        )
        every = (at[:, None] + 2.0 * np.pi * turns).ravel()
        return np.sort(every[(every > low) & (every < high)])
