"""What is known of the ratios of each motor: its windows, its best ratio, and what of the catalog fits."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from actuator_sizing.core.parameters import GearheadParameters
from actuator_sizing.sizing.ratio_search import RatioInterval

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True)
class CatalogRatio:
    """A transmission of the catalog with which one motor keeps its limits, with its own losses and inertia."""

    gearhead: str  # empty: direct drive
    ratio: float


@dataclass(frozen=True)
class MotorWindow:
    """The ratios of one motor.

    Attributes
    ----------
    motor : str
        Its name.
    motor_index : int
        Its row in the catalog (0-based). [-]
    intervals : tuple of RatioInterval
        Closed set of ratios that keep every limit, ascending; empty where none does.
    best_ratio : float
        Ratio of the smallest RMS torque; infinite or NaN where there is none. [-]
    best_torque_rms_nm : float
        RMS torque there. [N·m]
    power_rate : float
        Square of the continuous torque near standstill over rotor inertia, in W/s. [-]
    power_rate_needed : float
        Square of the smallest RMS torque over rotor inertia: what the load asks of this motor at best,
        in W/s. [-]
    catalog : tuple of CatalogRatio
        Transmissions of the catalog that keep every limit.
    missing : tuple of str
        Data without which the window is not known; it is then empty.
    reason : str
        Why there is no window; empty where there is one.
    """

    motor: str
    motor_index: int
    intervals: tuple[RatioInterval, ...]
    best_ratio: float
    best_torque_rms_nm: float
    power_rate: float
    power_rate_needed: float
    catalog: tuple[CatalogRatio, ...]
    missing: tuple[str, ...]
    reason: str = ""

    def as_mapping(self) -> Mapping[str, Any]:
        """For results.json; an end without limit is None."""
        return {
            "motor": self.motor,
            "known": not self.missing,
            "missing": list(self.missing),
            "reason": self.reason or None,
            "windows": [interval.as_mapping() for interval in self.intervals],
            "best_ratio": self.best_ratio,
            "best_torque_rms_nm": self.best_torque_rms_nm,
            "power_rate": self.power_rate,
            "power_rate_needed": self.power_rate_needed,
            "catalog": [{"gearhead": c.gearhead or None, "ratio": c.ratio} for c in self.catalog],
        }


@dataclass(frozen=True)
class RatioWindows:
    """Ratio windows of every motor that fits the axis.

    Attributes
    ----------
    transmission : GearheadParameters
        One row: losses and inertia that the windows are worked out with.
    assumption : str
        Where these come from, in words.
    motors : tuple of MotorWindow
        In the order of the catalog.
    catalog_ratios : tuple of float
        Every ratio of the catalog, ascending. [-]
    """

    transmission: GearheadParameters
    assumption: str
    motors: tuple[MotorWindow, ...]
    catalog_ratios: tuple[float, ...]

    def of(self, motor: str) -> MotorWindow:
        """The window of one motor by its name.

        Raises
        ------
        KeyError
            If there is no such motor.
        """
        for window in self.motors:
            if window.motor == motor:
                return window
        raise KeyError(motor)

    @property
    def table(self) -> pd.DataFrame:
        """One row per motor and window; a motor without one has a row all the same."""
        import pandas as pd

        return pd.DataFrame([row for window in self.motors for row in _rows(window)])

    def _repr_html_(self) -> str:
        table = self.table.to_html(index=False, escape=True, float_format="{:.4g}".format, na_rep="-")
        return f"<p>{self.assumption}</p>{table}"


def _rows(window: MotorWindow) -> list[dict[str, Any]]:
    """Rows of one motor for tables."""
    intervals: tuple[RatioInterval | None, ...] = window.intervals or (None,)
    return [
        {
            "motor": window.motor,
            "ratio_from": np.nan if interval is None else interval.low,
            "ratio_to": np.nan if interval is None else interval.high,
            "bounded_below_by": "" if interval is None else interval.low_check,
            "bounded_above_by": "" if interval is None else interval.high_check,
            "best_ratio": window.best_ratio,
            "best_torque_rms_nm": window.best_torque_rms_nm,
            "power_rate": window.power_rate,
            "power_rate_needed": window.power_rate_needed,
            "catalog_ratios": ", ".join(f"{c.ratio:.5g}" for c in window.catalog),
            "why_none": window.reason,
        }
        for interval in intervals
    ]
