"""Trade spellings of units, read with the kind of quantity that the column holds.

The kind decides what a spelling means: lb is a force in a torque and a mass in a payload, 1/min is a speed
of rotation where a speed of rotation is expected, `"` is an inch or an arc second. A spelling that could
mean two things, or that does not have the dimension of the kind, is refused with a text that says what it is.
Not a general unit library: the closed tables of `unit_kinds`, a small parser, a check of dimensions.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from actuator_sizing.errors import ActuatorSizingError
from actuator_sizing.unit_kinds import KINDS, SYMBOLS, Kind
from actuator_sizing.unit_meaning import accepted, factor_of, lookup, meant, mismatch, shown, with_article
from actuator_sizing.unit_syntax import LONGEST, SpellingError, fold_characters, read_product, split_basis

__all__ = [
    "KINDS",
    "SUFFIXES",
    "Kind",
    "Unit",
    "UnitError",
    "from_si",
    "parse_unit",
    "si_unit",
    "suffix_unit",
    "to_si",
]

KELVIN_AT_0_DEGC = 273.15
_TEMPERATURES = {
    "°c": (1.0, 0.0), "degc": (1.0, 0.0), "deg c": (1.0, 0.0), "c": (1.0, 0.0), "celsius": (1.0, 0.0),
    "°f": (5.0 / 9.0, -160.0 / 9.0), "degf": (5.0 / 9.0, -160.0 / 9.0), "deg f": (5.0 / 9.0, -160.0 / 9.0),
    "f": (5.0 / 9.0, -160.0 / 9.0), "k": (1.0, -KELVIN_AT_0_DEGC), "kelvin": (1.0, -KELVIN_AT_0_DEGC),
}  # fmt: skip

#: Code suffix -> label of its SI unit; docstrings, JSON keys and report headings agree through this table.
SUFFIXES: dict[str, str] = {
    "nm": "N·m", "n": "N", "kg_m2": "kg·m²", "kg": "kg", "m": "m", "m2": "m²", "rad": "rad", "s": "s", "v": "V",
    "a": "A", "a_s": "A/s",
    "w": "W", "j": "J", "ohm": "Ω", "h": "H", "f": "F", "hz": "Hz", "pa": "Pa", "k": "K", "degc": "°C",
    "w_m2": "W/m²",
    "rad_s": "rad/s", "rad_s2": "rad/s²", "rad_s3": "rad/s³", "m_s": "m/s", "m_s2": "m/s²", "m_s3": "m/s³",
    "nm_per_a": "N·m/A", "n_per_a": "N/A", "v_s_per_rad": "V·s/rad", "v_s_per_m": "V·s/m",
    "rad_per_s_v": "rad/(s·V)", "nm_per_sqrt_w": "N·m/√W", "k_w": "K/W", "j_k": "J/K", "per_k": "1/K",
    "nm_s": "N·m·s/rad", "n_s_m": "N·s/m", "n_s_per_m": "N·s/m", "nm_per_rad": "N·m/rad", "n_per_m": "N/m",
    "kg_m3": "kg/m³", "per_a2": "1/A²", "a2": "A²", "a2_s": "A²·s", "nm2": "N²·m²", "w_per_k": "W/K",
    "a_rms": "A", "a_peak": "A", "v_rms": "V", "ratio": "-",
}  # fmt: skip


class UnitError(ActuatorSizingError, ValueError):
    """A unit that is not understood, or that does not belong to the kind of quantity."""


@dataclass(frozen=True)
class Unit:
    """A spelling as understood: ``SI = value · factor + offset``.

    Attributes
    ----------
    kind : str
        Kind of quantity, a key of `KINDS`.
    factor : float
        SI units per unit. [-]
    offset : float
        SI value of zero; other than 0 only for absolute temperatures. [-]
    spelling : str
        As typed, blanks trimmed.
    basis : str
        ``""``, ``"rms"``, ``"peak"`` or ``"DC"``; for voltages also ``"line-to-line"`` or ``"phase"``, alone
        or after rms and peak.
    """

    kind: str
    factor: float
    offset: float
    spelling: str
    basis: str = ""


def si_unit(kind: str) -> str:
    """Label of the SI unit of a kind, e.g. ``"N·m"`` for torque.

    Examples
    --------
    >>> si_unit("back-EMF constant")
    'V·s/rad'
    """
    return KINDS[kind].si_unit


def suffix_unit(name: str) -> str | None:
    """SI unit that the suffix of a name in code states, or None if it has no known suffix.

    Examples
    --------
    >>> suffix_unit("torque_constant_nm_per_a"), suffix_unit("mechanism")
    ('N·m/A', None)
    """
    parts = name.split("_")
    for start in range(1, len(parts)):
        label = SUFFIXES.get("_".join(parts[start:]))
        if label is not None:
            return label
    return None


def to_si(values: Any, unit: Unit) -> Any:
    """Convert a float, an array or a sequence from `unit` to SI.

    Examples
    --------
    >>> to_si(3000.0, parse_unit("1/min", "angular speed"))
    314.159
    """
    return _numeric(values) * unit.factor + unit.offset


def from_si(values: Any, unit: Unit) -> Any:
    """Convert a float, an array or a sequence from SI to `unit`.

    Examples
    --------
    >>> from_si(0.0, parse_unit("°F", "temperature"))
    32.0
    """
    return (_numeric(values) - unit.offset) / unit.factor


def _numeric(values: Any) -> Any:
    if isinstance(values, list | tuple):
        import numpy as np

        return np.asarray(values, dtype=float)
    return values


def parse_unit(text: str, kind: str | tuple[str, ...]) -> Unit:
    """Read a unit as the trade spells it.

    Parameters
    ----------
    text : str
        The spelling, e.g. ``"kg·cm²"``, ``"oz-in-s^2"``, ``"Vrms/krpm"``, ``"min⁻¹"``.
    kind : str or tuple of str
        Kind of quantity expected, a key of `KINDS`; of several, the one that the spelling fits.

    Returns
    -------
    Unit
        Factor and offset to SI, with rms, peak or DC kept as basis.

    Raises
    ------
    UnitError
        If the spelling is not understood, does not have the dimension of the kind, or fits several kinds.

    Notes
    -----
    Factors follow from the definitions 1 lb = 0.45359237 kg, 1 in = 25.4 mm (both 1959) and
    g = 9.80665 m/s² (CGPM 1901).

    Examples
    --------
    >>> parse_unit("lb-in-s²", "inertia").factor
    0.112985
    >>> parse_unit("Nm/Arms", "torque constant").basis
    'rms'
    """
    if not isinstance(text, str):
        raise UnitError(f"A unit must be text, got {type(text).__name__}.")
    if len(text) > 4 * LONGEST:
        raise UnitError(f"{shown(text[:LONGEST])} is too long for a unit.")
    if isinstance(kind, str):
        return _parse(text, kind)
    units, faults = [], []
    for alternative in kind:
        try:
            units.append(_parse(text, alternative))
        except UnitError as fault:
            faults.append(str(fault))
    if len(units) > 1:
        meanings = " or ".join(unit.kind for unit in units)
        raise UnitError(f"{shown(text)} can mean {meanings} here. Write the unit out.")
    if not units:
        raise UnitError(" Or: ".join(faults))
    return units[0]


@lru_cache(maxsize=4096)
def _parse(text: str, kind_name: str) -> Unit:
    kind = KINDS[kind_name]
    spelling = text.strip()[: LONGEST + 1]
    if kind_name == "price":
        return _price(spelling)
    if len(spelling) > LONGEST:
        raise UnitError(f"{shown(text)} is too long for a unit. {accepted(kind)}")
    folded = fold_characters(spelling)
    if kind_name == "temperature":
        return _temperature(folded, spelling, kind)
    if kind_name in ("ratio", "count"):
        return _plain_number(folded, spelling, kind)
    if not folded:
        raise UnitError(f"The unit is missing. {accepted(kind)}")
    try:
        bare, basis = split_basis(folded)
        product = read_product(bare, kind_name)
    except SpellingError as fault:
        raise UnitError(f"{shown(spelling)}: {fault} {accepted(kind)}") from None
    if basis and not kind.with_basis:
        raise UnitError(
            f"{shown(spelling)}: '{basis}' does not belong to the unit of {with_article(kind_name)}."
        )
    if basis.split(" ")[-1] in ("line-to-line", "phase") and kind.needs != "V" and kind_name != "voltage":
        raise UnitError(f"{shown(spelling)}: '{basis}' belongs to voltages only.")
    unknown = [name for name, _ in product.powers if lookup(name, kind, False) is None]
    if unknown:
        raise UnitError(
            f"{shown(spelling)}: '{unknown[0][:20]}' is not a known unit.{meant(unknown[0])} {accepted(kind)}"
        )
    for pound_is_force in (False, True) if kind.pound_is_force is None else (kind.pound_is_force,):
        factor = factor_of(product, kind, pound_is_force)
        if factor is not None:
            if not (math.isfinite(factor) and 1e-30 < factor < 1e30):
                raise UnitError(
                    f"{shown(spelling)}: a factor of {factor:.3g} is not a unit. {accepted(kind)}"
                )
            return Unit(kind_name, factor, 0.0, spelling, basis)
    raise UnitError(mismatch(product, kind, spelling))


# -- kinds with spellings of their own ----------------------------------------------------------------------


def _temperature(folded: str, spelling: str, kind: Kind) -> Unit:
    found = _TEMPERATURES.get(" ".join(folded.casefold().replace("° ", "°").split()))
    if found is None:
        raise UnitError(f"{shown(spelling)} is not a temperature. {accepted(kind)}")
    return Unit("temperature", *found, spelling)


def _plain_number(folded: str, spelling: str, kind: Kind) -> Unit:
    if folded in ("", "-", "1"):
        return Unit(kind.name, 1.0, 0.0, spelling)
    if kind.name == "ratio" and folded in ("%", "percent", "‰", "ppm"):
        return Unit(kind.name, SYMBOLS["%" if folded == "percent" else folded].factor, 0.0, spelling)
    raise UnitError(f"{shown(spelling)} is not the unit of a {kind.name}. {accepted(kind)}")


def _price(spelling: str) -> Unit:
    if len(spelling) <= 30 and re.fullmatch(r"[^\d\[\](){}<>=+*]*", spelling):
        return Unit("price", 1.0, 0.0, spelling)
    raise UnitError(f"{shown(spelling)} is not a currency. {accepted(KINDS['price'])}")
