"""Mass and moment of inertia of plain parts from their dimensions."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Part:
    """One line of the inertia inventory, all pieces of it together.

    Attributes
    ----------
    name, shape : str
        As stated. [-]
    referred_to : str
        ``"driven shaft"``, ``"load"`` or ``"motor"``. [-]
    mass_kg : float
        Mass of all pieces; NaN where only the inertia is known. [kg]
    inertia_kg_m2 : float
        Inertia of all pieces about the axis that they turn about. [kg·m²]
    row : int
        Spreadsheet row. [-]
    rule : str
        How the inertia follows from what is stated. [-]
    """

    name: str
    shape: str
    referred_to: str
    mass_kg: float
    inertia_kg_m2: float
    row: int
    rule: str


def cylinder_mass(diameter_m: float, inner_diameter_m: float, length_m: float, density_kg_m3: float) -> float:
    """Mass of a solid or hollow cylinder.

    Parameters
    ----------
    diameter_m : float
        Outer diameter. [m]
    inner_diameter_m : float
        Bore; 0 for a solid one. [m]
    length_m : float
        Length. [m]
    density_kg_m3 : float
        Density. [kg/m³]

    Returns
    -------
    float
        ``π ρ L (D² − d²)/4``. [kg]

    Examples
    --------
    >>> cylinder_mass(0.025, 0.0, 1.0, 7850.0)
    3.8534
    """
    return 0.25 * np.pi * density_kg_m3 * length_m * (diameter_m**2 - inner_diameter_m**2)


def cylinder_inertia(mass_kg: float, diameter_m: float, inner_diameter_m: float) -> float:
    """Inertia of a solid or hollow cylinder about its own axis.

    Parameters
    ----------
    mass_kg : float
        Mass. [kg]
    diameter_m : float
        Outer diameter. [m]
    inner_diameter_m : float
        Bore; 0 for a solid one. [m]

    Returns
    -------
    float
        ``m (D² + d²)/8``. [kg·m²]

    Examples
    --------
    >>> cylinder_inertia(cylinder_mass(0.08, 0.05, 0.06, 7850.0), 0.08, 0.05)
    0.001605
    """
    return mass_kg * (diameter_m**2 + inner_diameter_m**2) / 8.0


def block_inertia(mass_kg: float, length_m: float, width_m: float) -> float:
    """Inertia of a block about the axis through its centre across length and width.

    Parameters
    ----------
    mass_kg : float
        Mass. [kg]
    length_m, width_m : float
        The sides across the axis. [m]

    Returns
    -------
    float
        ``m (a² + b²)/12``. [kg·m²]

    Examples
    --------
    >>> block_inertia(4.0, 0.2, 0.1)
    0.0167
    """
    return mass_kg * (length_m**2 + width_m**2) / 12.0


def about_offset_axis(inertia_kg_m2: float, mass_kg: float, offset_m: float) -> float:
    """Inertia about a parallel axis (Steiner).

    Parameters
    ----------
    inertia_kg_m2 : float
        Inertia about the axis through the centre of mass. [kg·m²]
    mass_kg : float
        Mass. [kg]
    offset_m : float
        Distance of the axes. [m]

    Returns
    -------
    float
        ``J + m e²``. [kg·m²]

    Examples
    --------
    >>> about_offset_axis(block_inertia(4.0, 0.2, 0.1), 4.0, 0.15)
    0.1067
    """
    return inertia_kg_m2 + mass_kg * offset_m**2 if offset_m else inertia_kg_m2
