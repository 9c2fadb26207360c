"""Fan and pumps: what a fluid asks of a turning shaft."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import ClassVar

import numpy as np

from actuator_sizing.core.mechanisms.base import (
    Complaint,
    Efforts,
    FloatArray,
    Parameter,
    back_driving_efficiency,
)
from actuator_sizing.core.mechanisms.rotary import TURNING_PARAMETERS, TurningLoad


@dataclass(frozen=True, kw_only=True)
class Fan(TurningLoad):
    """Fan or centrifugal pump: ``T = T_s + (T_r − T_s)(ω/ω_r)²`` against the motion, in both directions.

    Affinity laws of turbomachines; the static part T_s is a head to be overcome, held by a non-return valve
    while nothing turns.
    """

    name: ClassVar[str] = "fan"
    help: ClassVar[str] = "fan or centrifugal pump: torque with the square of speed, and a static head"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("rated speed", "angular speed", "speed at which the torque is stated", positive=True, minimum=0.0,
                  example="900 rpm"),
        Parameter("rated torque", "torque", "torque of the fluid at that speed", minimum=0.0, example="0.6 Nm"),
        Parameter("static torque", "torque", "part of the rated torque that a static head asks at any speed",
                  default=0.0, minimum=0.0, example="0 Nm"),
        *(replace(p, example="0.02 kg·m²") if p.name == "load inertia"
          else replace(p, example="0.05 Nm") if p.name == "friction torque" else p for p in TURNING_PARAMETERS),
    )  # fmt: skip

    rated_speed: float
    rated_torque: float
    static_torque: float = 0.0

    def complaints(self) -> Iterable[Complaint]:
        """A static part above the whole."""
        if self.static_torque > self.rated_torque:
            yield Complaint("static torque", f"{self.static_torque:.6g} N·m",
                            f"at most the rated torque, {self.rated_torque:.6g} N·m",
                            "The rated torque includes the static part.")  # fmt: skip

    def efforts(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        direction: FloatArray,
        payload: FloatArray,
        process: FloatArray,
    ) -> Efforts:
        """Inertia and bearing, and the fluid as process."""
        plain = super().efforts(position, speed, acceleration, direction, payload, process)
        dynamic = (self.rated_torque - self.static_torque) * (speed / self.rated_speed) ** 2
        return replace(plain, process=plain.process + (self.static_torque + dynamic) * direction)


@dataclass(frozen=True, kw_only=True)
class DisplacementPump(TurningLoad):
    """Gear, vane or piston pump: ``T = V Δp/(2π)``, with hydromechanical losses by direction.

    The pressure keeps its sign when the shaft turns back: the pump is then a motor.
    """

    name: ClassVar[str] = "displacement pump"
    help: ClassVar[str] = "positive-displacement pump or motor: torque with pressure"
    parameters: ClassVar[tuple[Parameter, ...]] = (
        Parameter("displacement volume", "volume", "volume moved in one turn", positive=True, minimum=0.0,
                  example="4 cm³"),
        Parameter("pressure difference", "pressure", "outlet less inlet pressure", example="12 bar"),
        Parameter("hydromechanical efficiency", "ratio", "ideal torque over shaft torque when pumping", default=1.0,
                  positive=True, minimum=0.01, maximum=1.0, example="88 %"),
        *(replace(p, example="0.001 kg·m²") if p.name == "load inertia"
          else replace(p, example="0.1 Nm") if p.name == "friction torque" else p for p in TURNING_PARAMETERS),
    )  # fmt: skip

    displacement_volume: float
    pressure_difference: float
    hydromechanical_efficiency: float = 1.0

    def efforts(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        direction: FloatArray,
        payload: FloatArray,
        process: FloatArray,
    ) -> Efforts:
        """Inertia and bearing, and the pressure as process."""
        plain = super().efforts(position, speed, acceleration, direction, payload, process)
        ideal = self.displacement_volume * self.pressure_difference / (2.0 * np.pi)
        eta = self.hydromechanical_efficiency
        delivers = ideal * direction
        factor = np.where(
            delivers > 0.0, 1.0 / eta, np.where(delivers < 0.0, back_driving_efficiency(eta), 1.0)
        )
        return replace(plain, process=plain.process + ideal * factor)
