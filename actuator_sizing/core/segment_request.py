"""What one row of the duty cycle asks for, checked for sense before anything is planned."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from actuator_sizing.errors import MotionError

ABSURD_BELOW, ABSURD_ABOVE = 1e-12, 1e15  # SI; beyond any axis, and safe from overflow in seventh powers

_SIGNED = ("displacement", "end speed", "amplitude")
_SHARES = ("acceleration share", "deceleration share", "jerk share")
_SUM_ROUNDING = _SMALLEST_SHARE = 1e-9


@dataclass(frozen=True)
class Request:
    """Columns of one segment by name, None where empty; all in SI.

    Attributes
    ----------
    law : str
        Motion law. [-]
    start_speed : float
        Speed at which the segment before ends. [m/s]
    values : Mapping
        Column name to value. [-]
    needs : str
        Which columns the law needs, for messages. [-]
    points : tuple of (float, float)
        Time [s] and position [m] from the start of the segment, for a spline. [-]
    """

    law: str
    start_speed: float
    values: Mapping[str, float | None]
    needs: str
    points: tuple[tuple[float, float], ...] = ()

    def get(self, column: str) -> float | None:
        """Value of a column, None when empty [-]."""
        return self.values[column]

    def has(self, column: str) -> bool:
        """Whether the column is filled in [-]."""
        return self.values[column] is not None

    def limit(self, column: str) -> float:
        """Value of a limit, infinite when empty [-]."""
        value = self.values[column]
        return math.inf if value is None else value

    def check(self, uses: frozenset[str]) -> None:
        """Refuse absurd numbers, wrong signs and columns that mean nothing to the law.

        Parameters
        ----------
        uses : frozenset of str
            Columns that the law understands. [-]

        Raises
        ------
        MotionError
            For the first column at fault.
        """
        _check_number("start speed", self.start_speed, signed=True, zero=True)
        for column, value in self.values.items():
            if value is None:
                continue
            if column not in uses:
                raise MotionError(
                    column, f"{value:.6g}", f"nothing: '{self.law}' does not use it", "Leave the cell empty."
                )
            if column in _SHARES:
                if not (value == 0.0 or _SMALLEST_SHARE <= value <= 1.0):
                    raise MotionError(column, f"{value:.6g}", "0 to 1 (0 % to 100 %)", "Correct the share.")
            else:
                _check_number(column, value, signed=column in _SIGNED, zero=column in _SIGNED)

    def require_move(self) -> float:
        """Displacement of a law from rest to rest, after a check that it is one.

        Returns
        -------
        float
            Signed distance, not zero. [m]

        Raises
        ------
        MotionError
            When it is missing or zero, or the segment does not start and end at rest.
        """
        if self.start_speed != 0.0:
            raise MotionError(
                "motion law",
                f"'{self.law}' after a segment that ends at {self.start_speed:.6g} (SI)",
                "a start from rest",
                "Put a 'speed ramp' with end speed 0 before it.",
            )
        if self.get("end speed"):
            raise MotionError(
                "end speed",
                f"{self.get('end speed'):.6g}",
                f"0 or empty: '{self.law}' ends at rest",
                "Leave the cell empty, or use 'speed ramp' and 'constant speed'.",
            )
        displacement = self.get("displacement")
        if not displacement:
            raise MotionError(
                "displacement",
                "nothing" if displacement is None else "0",
                f"a signed distance; '{self.law}' needs {self.needs}",
                "Enter the displacement, or use 'dwell' to stand still.",
            )
        return displacement

    def require_any(self, columns: tuple[str, ...], instead: str = "") -> None:
        """Refuse a segment whose time follows from nothing.

        Parameters
        ----------
        columns : tuple of str
            Columns of which one suffices. [-]
        instead : str
            Another column that would do, already known to be empty. [-]

        Raises
        ------
        MotionError
            When all are empty.
        """
        if any(self.has(column) for column in columns):
            return
        names = [f"'{column}'" for column in (*columns, instead) if column]
        listed = names[0] if len(names) == 1 else ", ".join(names[:-1]) + f" or {names[-1]}"
        raise MotionError(columns[0], "nothing", f"{self.needs}", f"Fill in {listed}.")

    def refuse_jerk_limit(self) -> None:
        """Refuse a limit of jerk for a law whose acceleration jumps.

        Raises
        ------
        MotionError
            When the column is filled in.
        """
        if self.has("maximum jerk"):
            raise MotionError(
                "maximum jerk",
                f"{self.limit('maximum jerk'):.6g}",
                f"nothing: the acceleration of '{self.law}' jumps, so its jerk has no limit",
                "Leave the cell empty, or choose 'jerk-limited' or another smooth law.",
            )

    def stage_shares(self, default: float) -> tuple[float, float]:
        """Shares of acceleration and deceleration; one that is empty follows the other.

        Parameters
        ----------
        default : float
            Share when both are empty. [-]

        Returns
        -------
        tuple of float
            Both above 0, together at most 1. [-]

        Raises
        ------
        MotionError
            When they are zero or leave no room.
        """
        k_a, k_d = self.get("acceleration share"), self.get("deceleration share")
        column = "acceleration share" if k_a is not None else "deceleration share"
        up = k_a if k_a is not None else (k_d if k_d is not None else default)
        down = k_d if k_d is not None else up
        if up <= 0.0 or down <= 0.0 or up + down > 1.0 + _SUM_ROUNDING:
            raise MotionError(
                column,
                f"{up:.6g} up and {down:.6g} down",
                "shares above 0 that add up to at most 1 (one left empty follows the other)",
                "Correct the shares.",
            )
        return (up, 1.0 - up) if abs(up + down - 1.0) <= _SUM_ROUNDING else (up, down)


def _check_number(column: str, value: float, *, signed: bool, zero: bool) -> None:
    size = abs(value) if signed else value
    if (zero and size == 0.0) or ABSURD_BELOW <= size <= ABSURD_ABOVE:
        return
    sign = "either sign, " if signed else "above zero, "
    raise MotionError(
        column,
        f"{value:.6g}",
        f"{sign}magnitude {ABSURD_BELOW:g} to {ABSURD_ABOVE:g} in SI",
        "Check the number and its unit.",
    )
