"""What every mechanism tells the sizing chain: its geometry, its effort, its losses."""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, ClassVar, Self

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

GRAVITY_M_S2 = 9.80665  # standard acceleration of gravity, CGPM 1901

LINEAR, ROTARY = "linear", "rotary"
LOAD, SHAFT = "load", "shaft"  # where the motion of the duty cycle is stated
MASS, INERTIA = "mass", "inertia"  # what a payload is


@dataclass(frozen=True)
class Parameter:
    """One quantity that a mechanism takes from the `axis` table.

    Attributes
    ----------
    name : str
        Name in the `axis` table, e.g. ``"lead"``; the field is the same with underscores.
    kind : str
        Kind of quantity, a key of `actuator_sizing.units.KINDS`.
    help : str
        One line for the template and the documentation.
    default : float or None
        Value assumed when the row is missing; None means required unless `optional`.
    minimum, maximum : float
        Allowed range in SI, inclusive.
    positive : bool
        Zero is not allowed either.
    optional : bool
        May be missing without a default; the mechanism says what follows.
    example : str
        Filled-in example for the template, as a user would type it, with its unit after a blank.
    """

    name: str
    kind: str
    help: str
    default: float | None = None
    minimum: float = -np.inf
    maximum: float = np.inf
    positive: bool = False
    optional: bool = False
    example: str = ""

    @property
    def field(self) -> str:
        """Name of the attribute that holds the value."""
        return self.name.lower().replace(" ", "_").replace("-", "_")


@dataclass(frozen=True)
class Efforts:
    """Effort at the load along +x by cause [N or N·m]; the total is what the transmission must give."""

    inertia: FloatArray
    gravity: FloatArray
    friction: FloatArray
    process: FloatArray

    @property
    def total(self) -> FloatArray:
        """Sum of all causes."""
        return self.inertia + self.gravity + self.friction + self.process

    @property
    def size(self) -> FloatArray:
        """Sum of the magnitudes of all causes."""
        return sum((abs(part) for part in (self.gravity, self.friction, self.process)), abs(self.inertia))


@dataclass(frozen=True)
class Transfer:
    """How load and driven shaft follow the coordinate q in which the motion is stated.

    Attributes
    ----------
    position, load_rate, load_bend : ndarray
        Load coordinate x, counted from the start of the cycle, dx/dq and d²x/dq². [-]
    shaft_rate, shaft_bend : ndarray
        dφ/dq and d²φ/dq² of the driven shaft. [-]
    shaft_angle : ndarray or None
        φ itself where the geometry changes with it; None where it does not matter. [rad]
    """

    position: FloatArray
    load_rate: FloatArray
    load_bend: FloatArray
    shaft_rate: FloatArray
    shaft_bend: FloatArray
    shaft_angle: FloatArray | None = None

    @property
    def lever(self) -> FloatArray:
        """dx/dφ: torque at the driven shaft per effort at the load. [m/rad or -]"""
        return self.load_rate / self.shaft_rate


@dataclass(frozen=True)
class Complaint:
    """What is wrong with a mechanism's own geometry, or with a motion that it cannot make."""

    quantity: str  # name of a parameter; empty where the motion is at fault
    got: str
    allowed: str
    remedy: str
    severity: str = "error"


class Mechanism(ABC):
    """A one-degree-of-freedom chain from the load coordinate x to the driven shaft φ.

    Subclasses are frozen dataclasses whose fields are the `parameters` in SI. A constant-ratio mechanism
    only states `ratio_at`; one whose ratio changes along the stroke derives from `shaft_map.ShaftMap`.
    """

    name: ClassVar[str]
    help: ClassVar[str]
    coordinate: ClassVar[str]  # LINEAR (x in m) or ROTARY (x in rad)
    payload_kind: ClassVar[str] = ""  # MASS or INERTIA; empty: by the coordinate
    motion_at: ClassVar[str] = LOAD  # where the motion is stated unless the case says otherwise
    drives_linear_motor: ClassVar[bool] = False
    needs_map: ClassVar[bool] = False  # takes the table `map`
    #: field that takes the parts of the inertia inventory which are referred to the load or driven shaft
    load_parts_field: ClassVar[str] = ""
    shaft_parts_field: ClassVar[str] = ""
    parameters: ClassVar[tuple[Parameter, ...]]

    @classmethod
    def from_values(cls, values: Mapping[str, float | None], points: Sequence[Sequence[float]] = ()) -> Self:
        """Build from SI values keyed by parameter name; a missing optional value is NaN.

        `points` are the rows of the table `map` (shaft angle, position), for a mechanism that needs them.

        Raises
        ------
        KeyError
            If a required value is missing; the reader reports that before it calls.
        """
        arguments: dict[str, Any] = {}
        for parameter in cls.parameters:
            value = values.get(parameter.name)
            if value is None:
                value = parameter.default
            if value is None and parameter.optional:
                value = np.nan
            if value is None:
                raise KeyError(parameter.name)
            arguments[parameter.field] = float(value)
        if cls.needs_map:
            arguments["points"] = tuple((float(angle), float(position)) for angle, position in points)
        return cls(**arguments)

    @classmethod
    def carries_mass(cls) -> bool:
        """Whether a payload is a mass rather than an inertia."""
        return (cls.payload_kind or (MASS if cls.coordinate == LINEAR else INERTIA)) == MASS

    @property
    def resolved_by_nodes(self) -> bool:
        """Whether every piece of a polynomial or sinusoidal motion is resolved without subdivision."""
        return True

    def complaints(self) -> Iterable[Complaint]:
        """What is wrong with the stated quantities, held against each other."""
        return ()

    def reach(self, at_shaft: bool) -> tuple[float, float]:
        """Smallest and largest q that the motion may reach, counted from the start. [m or rad]"""
        return -np.inf, np.inf

    def motion_complaints(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        payload: float,
        process: float,
    ) -> Iterable[Complaint]:
        """What the load cannot do at nodes of a phase; arguments at the load, SI."""
        return ()

    # -- geometry -----------------------------------------------------------------------------------
    @abstractmethod
    def ratio_at(self, position: FloatArray) -> tuple[FloatArray, FloatArray]:
        """dφ/dx and d²φ/dx² at `position`."""

    def transfer(self, stated: FloatArray, at_shaft: bool) -> Transfer:
        """Load and shaft over the stated coordinate; this form is for a constant ratio.

        Parameters
        ----------
        stated : ndarray
            Coordinate q of the duty cycle, counted from its start. [-]
        at_shaft : bool
            q is the angle of the driven shaft rather than the load coordinate.
        """
        one, zero = np.ones_like(stated), np.zeros_like(stated)
        if not at_shaft:
            r, dr = self.ratio_at(stated)
            return Transfer(stated, one, zero, r, dr)
        r = self.ratio_at(zero)[0]
        return Transfer(stated / r, 1.0 / r, zero, one, zero)

    def borders(self, stated: FloatArray, at_shaft: bool) -> FloatArray:
        """Values of q at which the geometry has a kink, between the smallest and largest of `stated`. [-]"""
        return np.empty(0)

    # -- load ---------------------------------------------------------------------------------------
    @abstractmethod
    def efforts(
        self,
        position: FloatArray,
        speed: FloatArray,
        acceleration: FloatArray,
        direction: FloatArray,
        payload: FloatArray,
        process: FloatArray,
    ) -> Efforts:
        """Effort along +x by cause.

        `direction` is the sign of motion on the smooth piece (0 at rest, where friction does not act);
        all arguments broadcast together.
        """

    @abstractmethod
    def inertia_at_shaft(self, payload: FloatArray) -> FloatArray:
        """Largest inertia of load and mechanism at the driven shaft for a payload. [kg·m², or kg]"""

    def inertia_over(self, position: FloatArray, lever: FloatArray, payload: float) -> float:
        """Largest inertia at the driven shaft over a part of the motion. [kg·m², or kg]"""
        return float(np.max(self.inertia_at_shaft(np.asarray(payload))))

    # -- losses between load and driven shaft -------------------------------------------------------
    @property
    def efficiency_forward(self) -> float:
        """Power to the load over power at the driven shaft, when motoring. [-]"""
        return 1.0

    @property
    def efficiency_back(self) -> float:
        """Power at the driven shaft over power from the load, when the load drives; ≤ 0 self-locking. [-]"""
        return 1.0

    @property
    def shaft_inertia_kg_m2(self) -> float:
        """Inertia of what turns with the driven shaft, behind the stage's efficiency. [kg·m²]"""
        return 0.0

    def shaft_torques(
        self, geometry: Transfer, speed: FloatArray, acceleration: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """Torque of inertia and of gravity of what moves with the driven shaft rather than with the load.

        Parameters
        ----------
        geometry : Transfer
            Where the mechanism stands. [-]
        speed : ndarray
            Speed of the driven shaft. [rad/s]
        acceleration : ndarray
            Acceleration of the driven shaft. [rad/s²]

        Returns
        -------
        inertia, gravity : ndarray
            At the driven shaft, behind the stage's efficiency. [N·m]
        """
        return self.shaft_inertia_kg_m2 * acceleration, np.zeros_like(acceleration)

    @property
    def shaft_friction_nm(self) -> float:
        """Coulomb friction of bearings and seals at the driven shaft. [N·m]"""
        return 0.0

    @property
    def specific_gravity_m_s2(self) -> float:
        """Gravity along +x that acts on the motor's own moving mass (linear motors). [m/s²]"""
        return 0.0

    @property
    def specific_friction_m_s2(self) -> float:
        """Guide friction per motor mass (linear motors on the same guide). [m/s²]"""
        return 0.0


def direction_of(speed: FloatArray) -> FloatArray:
    """Sign of the motion at instants of one phase; at a stop, that of the phase's largest speed. [-]"""
    fastest = np.sign(speed[int(np.argmax(np.abs(speed)))])
    return np.where(speed == 0.0, fastest, np.sign(speed))


def back_driving_efficiency(efficiency_forward: float) -> float:
    """Back-driving efficiency for equal friction loss both ways: ``2 − 1/η``.

    Parameters
    ----------
    efficiency_forward : float
        Forward efficiency, 0 < η ≤ 1. [-]

    Returns
    -------
    float
        Back-driving efficiency; zero or negative means self-locking. [-]

    Notes
    -----
    The loss torque, taken equal in both directions at the same load torque, is ``T (1/η − 1)``.
    Derived from first principles; common practice.

    Examples
    --------
    >>> back_driving_efficiency(0.9)
    0.8889
    """
    return 2.0 - 1.0 / efficiency_forward
