"""Friction against speed: Coulomb, breakaway with the Stribeck curve, viscous, and cold grease."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Friction:
    """Friction of one place, as an effort along the motion.

    Attributes
    ----------
    coulomb : float
        Friction in motion, independent of speed: seals, preload, guide. [N or N·m]
    breakaway : float
        Friction at the very start of motion; below `coulomb` it does not count. [N or N·m]
    stribeck_speed : float
        Speed at which the breakaway excess has fallen to 1/e. [m/s or rad/s]
    viscous : float
        In proportion to speed. [N·s/m or N·m·s/rad]
    cold_factor : float
        Factor on everything while the grease is cold. [-]
    """

    coulomb: float
    breakaway: float = 0.0
    stribeck_speed: float = 1.0
    viscous: float = 0.0
    cold_factor: float = 1.0

    def effort(
        self, speed: FloatArray, direction: FloatArray, load_part: FloatArray | float = 0.0
    ) -> FloatArray:
        """Effort that the drive must give against friction.

        Parameters
        ----------
        speed : ndarray
            Speed. [m/s or rad/s]
        direction : ndarray
            Sign of the motion on the smooth piece; 0 at rest, where friction is not counted on. [-]
        load_part : ndarray or float
            Friction in proportion to load, ``μ N``; grease does not change it. [N or N·m]

        Returns
        -------
        ndarray
            ``k (F_c + (F_b − F_c) exp(−(v/v_s)²)) sgn + k c v + μ N sgn``. [N or N·m]

        Notes
        -----
        Stribeck curve in the Gaussian form of Bo and Pavelescu with exponent 2 (Armstrong-Hélouvry,
        Dupont and Canudas de Wit, Automatica 30 (1994) 1083, quoted from memory). The sign is that of the
        piece, so that the breakaway stands at the very instant at which motion starts.

        Examples
        --------
        >>> import numpy as np
        >>> friction = Friction(10.0, 16.0, 0.01)
        >>> friction.effort(np.array([0.0, 1.0]), np.array([1.0, 1.0])).tolist()
        [16.0, 10.0]
        """
        steady: FloatArray | float = self.coulomb
        excess = self.breakaway - self.coulomb
        if excess > 0.0:
            steady = steady + excess * np.exp(-((speed / self.stribeck_speed) ** 2))
        dry = self.cold_factor * steady + load_part
        return np.asarray(dry * direction + self.cold_factor * self.viscous * speed)

    @property
    def is_curved(self) -> bool:
        """Whether friction bends with speed, so that pieces must be cut finer."""
        return self.breakaway > self.coulomb
