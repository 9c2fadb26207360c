"""Column headings with units, read off the suffix of a name in code."""

from __future__ import annotations


def heading(name: str) -> str:
    """Write a column's name with its unit in brackets.

    Parameters
    ----------
    name : str
        Name in code with its SI suffix, e.g. ``"motor_torque_nm"``.

    Examples
    --------
    >>> heading("motor_torque_nm"), heading("governing_check"), heading("speed_peak_rad_s")
    ('motor torque [N·m]', 'governing check', 'speed peak [rad/s]')
    """
    words, unit = name_and_unit(name)
    return f"{words} [{unit}]" if unit else words


def name_and_unit(name: str) -> tuple[str, str]:
    """Split a name in code into words and the label of its SI unit; no unit where the suffix tells none.

    Examples
    --------
    >>> name_and_unit("winding_max_degc"), name_and_unit("inertia_ratio"), name_and_unit("pole_real_per_s")
    (('winding max', '°C'), ('inertia ratio', ''), ('pole real', '1/s'))
    """
    from actuator_sizing.units import SUFFIXES

    parts = name.split("_")
    for start in range(1, len(parts)):
        suffix = "_".join(parts[start:])
        if suffix in SUFFIXES and suffix != "ratio":
            if parts[start - 1] == "per":
                return " ".join(parts[: start - 1]), f"1/{SUFFIXES[suffix]}"
            return " ".join(parts[:start]), SUFFIXES[suffix]
    return " ".join(parts), ""
