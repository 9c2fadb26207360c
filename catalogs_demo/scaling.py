"""Scaling laws behind the made-up parts of the demo catalogues. Every part is invented; the laws are physics.

Lengths in m, everything else SI. D is the frame diameter, L the length of the active part.

Motors, from the air gap outwards:

* torque per root of copper loss  ``K_M ∝ D² L / √(L + D/2)``: shear stress times air-gap surface times radius,
  copper loss in slots of depth ∝ D with end turns of length ∝ D;
* rotor inertia  ``J ∝ r⁴ L`` with r ∝ D (solid rotor);
* electrical time constant  ``L_e/R ∝ D^1.5``;
* friction torque and damping  ∝ D³ L (bearing, hysteresis and eddy losses go with the iron);
* thermal resistance  winding to housing ∝ 1/(D L) (slot lining), housing to air = 1/(h S) with the surface S;
* heat capacities  = copper mass and remaining mass times specific heat, so the time constants follow mass;
* continuous current  from the thermal resistances at the winding limit, copper loss only;
* windings of one frame differ in the number of turns N only:  K ∝ N, R ∝ N², L_e ∝ N², so ``K²/R``, ``L_e/R``,
  J, mass and price are one value per frame;
* price  = handling + feedback + a power of the mass (0.8: larger parts are cheaper per kilogram).

Gearheads: torque, stiffness and drag ∝ D³, inertia ∝ D⁵ (mass ∝ D³ times radius²), price ∝ D^1.5.
Drives: price and mass ∝ a power of the rated apparent power.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

COPPER_J_KG_K, IRON_J_KG_K = 385.0, 480.0
COPPER_DEGC = 235.0  # R ∝ 235 + ϑ, IEC 60034-1
SQRT_3_2 = math.sqrt(1.5)
LINK_UTILISATION = 0.72  # back-EMF at the design speed over the voltage that the bus can give
MODULATION = 0.95


@dataclass(frozen=True)
class MotorClass:
    """What a way of commutation has in common over all frames."""

    commutation: str
    motor_constant: float  # factor of K_M
    electrical_time_s: float  # L_e/R at D = 80 mm
    friction: float  # factor on the friction law
    peak_ratio: float  # peak over continuous current
    saturation: float  # peak torque over K I_peak
    winding_limit_degc: float
    rating_ambient_degc: float
    speed_80mm_rpm: float
    price_factor: float
    price_fixed: float


BRUSHED = MotorClass("brushed", 170.0, 1.4e-3, 3.0, 4.0, 1.0, 125.0, 25.0, 3600.0, 38.0, 14.0)
SIX_STEP = MotorClass("six-step", 230.0, 2.5e-3, 1.3, 3.0, 1.0, 155.0, 25.0, 5000.0, 62.0, 22.0)
SINUSOIDAL = MotorClass("sinusoidal", 280.0, 5.0e-3, 1.0, 3.5, 0.93, 155.0, 40.0, 5000.0, 92.0, 95.0)


@dataclass(frozen=True)
class Frame:
    """A motor before it is wound."""

    kind: MotorClass
    diameter_m: float
    length_m: float

    @property
    def motor_constant(self) -> float:
        """[N·m/√W]."""
        D, L = self.diameter_m, self.length_m
        return self.kind.motor_constant * D**2 * L / math.sqrt(L + 0.5 * D)

    @property
    def inertia(self) -> float:
        """[kg·m²]."""
        return 0.5 * math.pi * 5300.0 * (0.28 * self.diameter_m) ** 4 * self.length_m

    @property
    def electrical_time_s(self) -> float:
        return self.kind.electrical_time_s * (self.diameter_m / 0.080) ** 1.5

    @property
    def mass(self) -> float:
        return 4800.0 * math.pi / 4.0 * self.diameter_m**2 * (self.length_m + 0.6 * self.diameter_m)

    @property
    def copper_mass(self) -> float:
        return 0.10 * self.mass

    @property
    def friction_torque(self) -> float:
        return 0.025 * self.kind.friction * (self.diameter_m / 0.080) ** 3 * (self.length_m / 0.060)

    @property
    def damping(self) -> float:
        """[N·m·s/rad]."""
        per_krpm = 0.007 * (self.diameter_m / 0.080) ** 3 * (self.length_m / 0.060)
        return per_krpm / (1000.0 * math.pi / 30.0)

    @property
    def winding_to_housing(self) -> float:
        """[K/W]."""
        return 1.68e-3 / (self.diameter_m * self.length_m)

    @property
    def housing_to_air(self) -> float:
        """[K/W], mounted on a plate."""
        D, overall = self.diameter_m, self.length_m + 0.6 * self.diameter_m
        return 1.0 / (25.0 * (math.pi * D * overall + math.pi / 4.0 * D**2))

    @property
    def winding_time_s(self) -> float:
        return self.winding_to_housing * self.copper_mass * COPPER_J_KG_K

    @property
    def housing_time_s(self) -> float:
        return self.housing_to_air * (self.mass - self.copper_mass) * IRON_J_KG_K

    @property
    def speed_max_rpm(self) -> float:
        return self.kind.speed_80mm_rpm * (0.080 / self.diameter_m) ** 0.8

    @property
    def price(self) -> float:
        return self.kind.price_fixed + self.kind.price_factor * self.mass**0.8

    @property
    def continuous_loss_w(self) -> float:
        """Copper loss that brings the winding to its limit in the ambient of the rating."""
        rise = self.kind.winding_limit_degc - self.kind.rating_ambient_degc
        return rise / (self.winding_to_housing + self.housing_to_air)


@dataclass(frozen=True)
class Winding:
    """A frame wound for a bus voltage and a design speed, in the ampere of its sheet."""

    frame: Frame
    basis: str  # DC, rms or peak
    bus_v: float
    speed_share: float  # design speed over maximum speed

    @property
    def speed_rpm(self) -> float:
        return self.speed_share * self.frame.speed_max_rpm

    @property
    def torque_constant(self) -> float:
        """[N·m/A in this basis]."""
        volts = (
            self.bus_v
            * MODULATION
            * {"DC": 1.0, "rms": SQRT_3_2, "peak": SQRT_3_2 / math.sqrt(2.0)}[self.basis]
        )
        return LINK_UTILISATION * volts / (self.speed_rpm * math.pi / 30.0)

    @property
    def model_resistance(self) -> float:
        """``(K/K_M)²``: loss is this times current squared. [Ω]."""
        return (self.torque_constant / self.frame.motor_constant) ** 2

    @property
    def terminal_resistance(self) -> float:
        return self.model_resistance / {"DC": 1.0, "rms": 1.5, "peak": 0.75}[self.basis]

    @property
    def terminal_inductance(self) -> float:
        return self.terminal_resistance * self.frame.electrical_time_s

    @property
    def continuous_current(self) -> float:
        kind = self.frame.kind
        hot = self.model_resistance * (COPPER_DEGC + kind.winding_limit_degc) / (COPPER_DEGC + 25.0)
        return math.sqrt(self.frame.continuous_loss_w / hot)

    @property
    def peak_current(self) -> float:
        return self.frame.kind.peak_ratio * self.continuous_current

    @property
    def peak_torque(self) -> float:
        return self.frame.kind.saturation * self.torque_constant * self.peak_current


@dataclass(frozen=True)
class LinearUnit:
    """Coil unit of a linear motor: force constant and mass ∝ length, width."""

    width_m: float
    length_m: float
    bus_v: float
    speed_m_s: float

    @property
    def motor_constant(self) -> float:
        """Force per root of loss ∝ √(width · length · √width). [N/√W]."""
        return 620.0 * math.sqrt(self.width_m**1.5 * self.length_m)

    @property
    def force_constant(self) -> float:
        """[N/A rms]."""
        return LINK_UTILISATION * self.bus_v * MODULATION * SQRT_3_2 / self.speed_m_s

    @property
    def model_resistance(self) -> float:
        return (self.force_constant / self.motor_constant) ** 2

    @property
    def mass(self) -> float:
        return 3600.0 * self.width_m * self.length_m * 0.045

    @property
    def thermal_resistances(self) -> tuple[float, float]:
        area = self.width_m * self.length_m
        return 1.5e-3 / area, 1.0 / (60.0 * area)  # the carriage is the cooling plate

    @property
    def continuous_current(self) -> float:
        hot = self.model_resistance * (COPPER_DEGC + 130.0) / (COPPER_DEGC + 25.0)
        return math.sqrt((130.0 - 40.0) / sum(self.thermal_resistances) / hot)


@dataclass(frozen=True)
class Gear:
    """A planetary gearhead of one size and ratio."""

    diameter_m: float
    ratio: str
    stages: int

    @property
    def size(self) -> float:
        return self.diameter_m / 0.060

    @property
    def value(self) -> float:
        numerator, _, denominator = self.ratio.partition("/")
        return float(numerator) / float(denominator or 1)

    @property
    def torque(self) -> float:
        """Small ratios load the planets, ratio 10 a small sun. [N·m]."""
        first = self.value if self.stages == 1 else 5.0
        return 14.0 * self.size**3 * (1.0 - 0.012 * abs(first - 5.0) ** 1.9)

    @property
    def efficiency(self) -> float:
        return 0.97**self.stages

    @property
    def inertia(self) -> float:
        first = self.value if self.stages == 1 else 5.0
        return 0.14e-4 * self.size**5 * (0.6 + 1.2 / first)

    @property
    def drag(self) -> float:
        return 0.05 * self.size**3 * (0.7 + 0.3 / self.stages)

    @property
    def speed_rpm(self) -> float:
        return 3200.0 * self.size**-0.4

    @property
    def stiffness_nm_arcmin(self) -> float:
        return 2.6 * self.size**3

    @property
    def mass(self) -> float:
        return (0.65 + 0.35 * self.stages) * self.size**3

    @property
    def price(self) -> float:
        return 105.0 * self.size**1.5 * (1.0 + 0.25 * (self.stages - 1))


@dataclass(frozen=True)
class Feeder:
    """A drive for one bus and one continuous current."""

    bus_v: float
    basis: str
    current: float

    @property
    def power_w(self) -> float:
        amperes = self.current / (math.sqrt(2.0) if self.basis == "peak" else 1.0)
        return self.bus_v * amperes * (1.0 if self.basis == "DC" else SQRT_3_2)

    @property
    def price(self) -> float:
        fixed = {"DC": 45.0, "rms": 120.0, "peak": 110.0}[self.basis] * (1.0 if self.bus_v < 100.0 else 1.6)
        return fixed + 0.55 * self.power_w**0.75

    @property
    def mass(self) -> float:
        return 0.15 + 0.012 * self.power_w**0.65

    @property
    def efficiency(self) -> float:
        return 0.98 - 0.06 * (24.0 / self.bus_v) ** 0.8
