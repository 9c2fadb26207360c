"""What may be asked of a simulation: its parts, settings and length, refused in words where they mean nothing."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np

from actuator_sizing.case.model import Case
from actuator_sizing.errors import InputError, Problem
from actuator_sizing.sizing.axis_plant import AxisPlant

#: Longest run, so that every run ends; about a quarter of a minute without the optional compiler.
MOST_SAMPLES = 10_000_000


def parse_settings(changes: tuple[str, ...]) -> dict[str, float | str | bool]:
    """Settings typed as ``name=value``.

    Parameters
    ----------
    changes : tuple of str
        Such as ``"position_gain_per_s=40"``; yes and no for what is switched.

    Returns
    -------
    dict
        By name. [-]

    Raises
    ------
    InputError
        If one is not a name, an equals sign and a value.

    Examples
    --------
    >>> parse_settings(("position_gain_per_s=40", "is_delayed=no"))
    {'position_gain_per_s': 40.0, 'is_delayed': False}
    """
    answer: dict[str, float | str | bool] = {}
    for change in changes:
        name, equals, text = (part.strip() for part in change.partition("="))
        if not equals or not name or not text:
            raise wrong(name or "settings", repr(change), "name=value", "Write for example is_delayed=no.")
        if name == "anti_windup":
            answer[name] = text
        elif text in ("yes", "no"):
            answer[name] = text == "yes"
        else:
            try:
                answer[name] = float(text)
            except ValueError:
                raise wrong(name, repr(text), "a number in SI, yes or no", "Correct the value.") from None
    return answer


def find_set(case: Case, motor: str | None, gearhead: str | None, drive: str | None) -> tuple[int, int, int]:
    """Find the parts of a set in the catalogs by their names.

    Parameters
    ----------
    case : Case
        The case. [-]
    motor, gearhead, drive : str or None
        Names; no gearhead (or ``"direct"``) is direct drive. Without a motor, the best set of `compare`.

    Returns
    -------
    tuple of int
        Motor, gearhead and drive by their index in the catalogs. [-]

    Raises
    ------
    InputError
        If a name is not in its catalog.
    """
    if motor is None and gearhead is None and drive is None:
        from actuator_sizing.sizing.comparison import compare

        best = compare(case, detail=1).best
        return best.motor_index, best.gearhead_index, best.drive_index
    if motor is None or drive is None:
        missing = "motor" if motor is None else "drive"
        raise wrong(missing, "no name", f"motor and drive, or neither of them for the best set of {case.name}",
                     f"Name the {missing}.")  # fmt: skip
    if gearhead in (None, "direct") and gearhead not in case.gearheads.names:
        direct = np.flatnonzero(case.gearhead_parameters.is_direct)
        if not len(direct):
            raise wrong("gearhead", "no name", "a gearhead: direct drive is not allowed",
                         "Name a gearhead.")  # fmt: skip
        gear = int(direct[0])
    else:
        gear = _index(case.gearheads.names, str(gearhead), "gearheads")
    return _index(case.motors.names, motor, "motors"), gear, _index(case.drives.names, drive, "drives")


def _index(names: tuple[str, ...], name: str, table: str) -> int:
    if name in names:
        return names.index(name)
    from actuator_sizing.case.columns import nearest

    close = nearest(name, (n for n in names if n))
    remedy = f"Did you mean '{close}'?" if close else f"The names stand in the first column of {table}."
    raise InputError([Problem(table, None, table[:-1], f"'{name}'", "a name in the table", remedy)])


def check_length(axis: AxisPlant, input_: str | Path, cycles: int) -> None:
    """Refuse a run that is too long to wait for, or too short to tell anything.

    Parameters
    ----------
    axis : AxisPlant
        The set. [-]
    input_ : str or Path
        What is commanded; only the cycle has a length of its own. [-]
    cycles : int
        How many cycles. [-]

    Raises
    ------
    InputError
        With the length and what is allowed.
    """
    if str(input_) != "cycle":
        return
    samples = axis.model.demand.cycle_s * cycles * axis.rate_hz
    if samples > MOST_SAMPLES:
        raise wrong("cycles", f"{samples:.3g} samples of {1.0 / axis.rate_hz:.3g} s",
                     f"at most {MOST_SAMPLES:,} samples".replace(",", " "),
                     "Ask for fewer cycles or a lower rate.")  # fmt: skip
    if samples < 10.0:
        raise wrong("rate", f"{axis.rate_hz:g} Hz", "at least ten samples in a cycle", "Raise the rate.")


def check_finite(name: str, value: float, allowed: str, low: float, high: float) -> None:
    """Refuse a number out of its range; NaN is a number not given.

    Parameters
    ----------
    name : str
        What it is.
    value : float
        The number. [-]
    allowed : str
        The range in words.
    low, high : float
        Excluded lower and included upper end. [-]

    Raises
    ------
    InputError
        With the name and the range.
    """
    if math.isnan(value):
        return  # not given
    if not low < value <= high or math.isinf(value):
        raise wrong(name, repr(value), allowed, "Give a value in this range.")


def wrong(what: str, got: str, allowed: str, remedy: str) -> InputError:
    """What is wrong with a request.

    Parameters
    ----------
    what, got, allowed, remedy : str
        Its name, what was read, what is allowed, what to do.

    Returns
    -------
    InputError
        To be raised.
    """
    return InputError([Problem("simulate", None, what, got, allowed, remedy)])
