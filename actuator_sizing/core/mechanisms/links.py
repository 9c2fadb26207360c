"""The mass of a rod or coupler that swings while both of its pins move."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from actuator_sizing.core.mechanisms.base import Complaint, Parameter


def link_parameters(word: str, pin: str) -> tuple[Parameter, ...]:
    """Quantities of a moving link: ``<word> mass``, ``<word> centre`` and ``<word> inertia``.

    Parameters
    ----------
    word : str
        What the trade calls it: rod, link, coupler.
    pin : str
        Its pin on the driven side.
    """
    return (
        Parameter(f"{word} mass", "mass", f"mass of the {word}", default=0.0, minimum=0.0, example="0 kg"),
        Parameter(f"{word} centre", "length", f"distance of its centre of mass from the {pin}; the middle when "
                  "empty", minimum=0.0, optional=True),
        Parameter(f"{word} inertia", "inertia", "about its centre of mass; that of a slender bar when empty",
                  minimum=0.0, optional=True),
    )  # fmt: skip


@dataclass(frozen=True)
class MovingLink:
    """A rigid link as two point masses at its pins and an inertia that turns with it, which is exact.

    Masses ``m (1 − s/L)`` and ``m s/L`` have mass and centre of the link; what its moment of inertia differs
    from theirs, ``J − m s (L − s)``, goes with the link's own turning. First principles.

    Attributes
    ----------
    mass_kg : float
        Mass m. [kg]
    length_m : float
        Between the pins, L. [m]
    centre_m : float
        Distance s of the centre of mass from the driven pin; NaN: the middle. [m]
    inertia_kg_m2 : float
        About the centre of mass, J; NaN: ``m L²/12``, a slender bar. [kg·m²]
    """

    mass_kg: float
    length_m: float
    centre_m: float = np.nan
    inertia_kg_m2: float = np.nan

    @property
    def _share(self) -> float:
        return 0.5 if np.isnan(self.centre_m) else self.centre_m / self.length_m

    @property
    def driven_pin_kg(self) -> float:
        """Point mass at the pin on the driven side. [kg]"""
        return self.mass_kg * (1.0 - self._share)

    @property
    def far_pin_kg(self) -> float:
        """Point mass at the other pin. [kg]"""
        return self.mass_kg * self._share

    @property
    def turning_kg_m2(self) -> float:
        """What is left to turn with the link; below zero where the pins stand further out than the mass. [kg·m²]"""
        slender = self.mass_kg * self.length_m**2 / 12.0
        own = slender if np.isnan(self.inertia_kg_m2) else self.inertia_kg_m2
        return own - self.mass_kg * self._share * (1.0 - self._share) * self.length_m**2

    def complaints(self, word: str) -> tuple[Complaint, ...]:
        """A moment of inertia that no link of that mass and length has.

        Parameters
        ----------
        word : str
            As in `link_parameters`.
        """
        if self.mass_kg == 0.0 and self.inertia_kg_m2 > 0.0:
            return (
                Complaint(f"{word} inertia", f"{self.inertia_kg_m2:.6g} kg·m² of a {word} without mass",
                          f"'{word} mass' above 0", f"State the mass of the {word}."),
            )  # fmt: skip
        return ()
