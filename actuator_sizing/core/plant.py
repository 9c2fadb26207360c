"""Motor and load as a linear plant with friction and backlash: one mass, or two coupled by a spring.

Everything is referred to the motor shaft. States are current, motor speed, twist (motor angle minus load angle),
load speed and motor angle; with one mass, twist stays zero and both speeds are one. For a linear motor metres,
newtons and kilograms stand for radians, N·m and kg·m². A sinusoidal machine is held at zero direct-axis current,
so that its quadrature axis is this model and the cross-coupled reactance only takes voltage away.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.propagation import zero_order_hold

FloatArray = NDArray[np.float64]

CURRENT, MOTOR_SPEED, TWIST, LOAD_SPEED, MOTOR_ANGLE = range(5)
#: Inputs: voltage, external torque on the motor, external torque on the load (both speed up where positive).
VOLTAGE, MOTOR_TORQUE, LOAD_TORQUE = range(3)


@dataclass(frozen=True, kw_only=True)
class Plant:
    """Motor and load, referred to the motor shaft.

    Attributes
    ----------
    resistance_ohm, inductance_h, torque_constant_nm_per_a : float
        DC equivalent at stated temperatures; the inductance is positive.
    motor_inertia_kg_m2, load_inertia_kg_m2 : float
        Rotor and what turns rigidly with it; the rest.
    stiffness_nm_per_rad : float
        Spring between the two masses, > 0; NaN: rigid, one mass.
    damping_nm_s : float
        Damping parallel to the spring.
    motor_viscous_nm_s, load_viscous_nm_s : float
        Friction in proportion to speed.
    motor_coulomb_nm, load_coulomb_nm : float
        Coulomb friction, which sticks at rest.
    backlash_rad : float
        Whole gap between the flanks; only with a spring.
    reactance_ohm_s : float
        Pole pairs times inductance; 0: cross coupling not counted.
    """

    resistance_ohm: float
    inductance_h: float
    torque_constant_nm_per_a: float
    motor_inertia_kg_m2: float
    load_inertia_kg_m2: float = 0.0
    stiffness_nm_per_rad: float = math.nan
    damping_nm_s: float = 0.0
    motor_viscous_nm_s: float = 0.0
    load_viscous_nm_s: float = 0.0
    motor_coulomb_nm: float = 0.0
    load_coulomb_nm: float = 0.0
    backlash_rad: float = 0.0
    reactance_ohm_s: float = 0.0

    def __post_init__(self) -> None:
        """Refuse what has no solution."""
        for name in ("resistance_ohm", "inductance_h", "motor_inertia_kg_m2"):
            _need(name, getattr(self, name), getattr(self, name) > 0.0, "a finite number > 0")
        for name in ("load_inertia_kg_m2", "damping_nm_s", "motor_viscous_nm_s", "load_viscous_nm_s",
                     "motor_coulomb_nm", "load_coulomb_nm", "backlash_rad", "reactance_ohm_s",
                     "torque_constant_nm_per_a"):  # fmt: skip
            _need(name, getattr(self, name), getattr(self, name) >= 0.0, "a finite number ≥ 0")
        if not math.isnan(self.stiffness_nm_per_rad):
            _need("stiffness_nm_per_rad", self.stiffness_nm_per_rad, self.stiffness_nm_per_rad > 0.0,
                  "> 0, or NaN for a rigid shaft")  # fmt: skip
            _need("load_inertia_kg_m2", self.load_inertia_kg_m2, self.load_inertia_kg_m2 > 0.0,
                  "> 0 behind a spring")  # fmt: skip

    @property
    def is_rigid(self) -> bool:
        """Whether motor and load are one mass."""
        return math.isnan(self.stiffness_nm_per_rad)

    @property
    def total_inertia_kg_m2(self) -> float:
        """Both masses. [kg·m²]"""
        return self.motor_inertia_kg_m2 + self.load_inertia_kg_m2

    @property
    def resonance_rad_s(self) -> float:
        """Free–free natural frequency ``√(k (1/J_m + 1/J_L))``; NaN if rigid. [rad/s]"""
        return math.sqrt(self.stiffness_nm_per_rad * (1.0 / self.motor_inertia_kg_m2
                         + 1.0 / self.load_inertia_kg_m2)) if not self.is_rigid else math.nan  # fmt: skip

    @property
    def antiresonance_rad_s(self) -> float:
        """Load on the spring with the motor locked, ``√(k/J_L)``; NaN if rigid. [rad/s]"""
        return math.nan if self.is_rigid else math.sqrt(self.stiffness_nm_per_rad / self.load_inertia_kg_m2)

    def matrices(self, *, engaged: bool = True) -> tuple[FloatArray, FloatArray]:
        """System and input matrix of the linear part.

        Parameters
        ----------
        engaged : bool
            False inside the backlash, where the spring carries nothing.

        Returns
        -------
        A : ndarray, shape (5, 5)
            Of current, motor speed, twist, load speed, motor angle. [-]
        B : ndarray, shape (5, 3)
            Of voltage, motor torque, load torque. [-]
        """
        R, L, K = self.resistance_ohm, self.inductance_h, self.torque_constant_nm_per_a
        A, B = np.zeros((5, 5)), np.zeros((5, 3))
        A[0, :2], B[0, 0] = (-R / L, -K / L), 1.0 / L
        A[4, 1] = 1.0
        if self.is_rigid:
            J = self.total_inertia_kg_m2
            for row in (1, 3):
                A[row, 0], B[row, 1:] = K / J, 1.0 / J
                A[row, 1] = -(self.motor_viscous_nm_s + self.load_viscous_nm_s) / J
            return A, B
        k, c = (self.stiffness_nm_per_rad, self.damping_nm_s) if engaged else (0.0, 0.0)
        J_m, J_L = self.motor_inertia_kg_m2, self.load_inertia_kg_m2
        A[1] = [K / J_m, -(self.motor_viscous_nm_s + c) / J_m, -k / J_m, c / J_m, 0.0]
        A[2] = [0.0, 1.0, 0.0, -1.0, 0.0]
        A[3] = [0.0, c / J_L, k / J_L, -(self.load_viscous_nm_s + c) / J_L, 0.0]
        B[1, 1], B[3, 2] = 1.0 / J_m, 1.0 / J_L
        return A, B

    def poles_per_s(self) -> FloatArray:
        """Poles of the linear part, the free angle left out, slowest first. [1/s]"""
        keep = [0, 1] if self.is_rigid else [0, 1, 2, 3]
        poles = np.linalg.eigvals(self.matrices()[0][np.ix_(keep, keep)])
        return np.asarray(poles[np.argsort(np.abs(poles))])

    def sampled(self, step_s: float) -> tuple[tuple[float, ...], tuple[float, ...]]:
        """Exact zero-order hold as rows for the cascade: coupled, and inside the backlash.

        Parameters
        ----------
        step_s : float
            Sampling time. [s]

        Returns
        -------
        coupled, free : tuple of float
            Rows of states and inputs one after another, then the flags and levels of friction. [-]
        """
        return _sampled(self, step_s)

    def rigid(self) -> Plant:
        """The same plant with the spring infinitely stiff."""
        return replace(self, stiffness_nm_per_rad=math.nan, backlash_rad=0.0)


@lru_cache(maxsize=128)
def _sampled(plant: Plant, step_s: float) -> tuple[tuple[float, ...], tuple[float, ...]]:
    coupled = _rows(plant, step_s, engaged=True)
    has_gap = plant.backlash_rad > 0.0 and not plant.is_rigid
    return coupled, _rows(plant, step_s, engaged=False) if has_gap else coupled


def _rows(plant: Plant, step_s: float, *, engaged: bool) -> tuple[float, ...]:
    Phi, Gamma = zero_order_hold(*plant.matrices(engaged=engaged), step_s)
    Phi = Phi.copy()
    Phi[4, 4] = 0.0  # the loop adds the angle itself
    rows: list[float] = []
    for row in range(5):
        rows += [*Phi[row, :4].tolist(), *Gamma[row].tolist()]
    coulomb = (plant.motor_coulomb_nm, plant.load_coulomb_nm)
    if plant.is_rigid:
        coulomb = (sum(coulomb), 0.0)
    return (*rows, float(plant.is_rigid), 0.5 * plant.backlash_rad, *coulomb)


def _need(name: str, value: float, good: bool, allowed: str) -> None:
    if not good or not math.isfinite(value):
        raise ValueError(f"plant: {name} is {value!r}, expected {allowed}")


def series_stiffness(*stiffness_nm_per_rad: float) -> float:
    """Stiffness of springs one behind the other; those not known (NaN) are left out, NaN if none is known.

    Parameters
    ----------
    *stiffness_nm_per_rad : float
        Springs, all at the same shaft. [N·m/rad]

    Returns
    -------
    float
        ``1/Σ(1/k)``. [N·m/rad]

    Examples
    --------
    >>> series_stiffness(2.0, 2.0, float("nan"))
    1.0
    """
    known = [k for k in stiffness_nm_per_rad if not math.isnan(k)]
    return 1.0 / sum(1.0 / k for k in known) if known else math.nan
