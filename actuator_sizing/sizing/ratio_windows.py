"""Which transmission ratios each motor can live with, and which of the catalog are among them."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.moments import gearhead_rows, mean_products, motor_columns
from actuator_sizing.core.parameters import GearheadParameters
from actuator_sizing.core.ratio_windows import TorqueMoments, torque_moments
from actuator_sizing.errors import InputError, Problem
from actuator_sizing.sizing.block import Block, GearheadSide, MotorSide
from actuator_sizing.sizing.checks.motor import MOTOR_SPEED, RMS_CURRENT, continuous_torque_squared
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.fitting import fits_axis
from actuator_sizing.sizing.motor_limits import MotorLimits, one_gearhead
from actuator_sizing.sizing.ratio_search import RatioInterval, search_intervals

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

_WIDEST = 1e6  # from one end of a search to the other, where nothing bounds it
_BOUND_ROUNDING = 1e-5  # of the bounds, which are in single precision
_MOTORS_AT_A_TIME = 512


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


def ratio_windows(
    case: Case,
    demand: Demand,
    *,
    transmission: GearheadParameters | None = None,
    progress: Callable[[float], None] | None = None,
) -> RatioWindows:
    """Work out the ratio windows of every motor that fits the axis.

    Parameters
    ----------
    case : Case
        The case. [-]
    demand : Demand
        Its cycle. [-]
    transmission : GearheadParameters, optional
        One row with the losses and inertia to work with, its ratio of no account; by default the median
        efficiencies of the catalog's gearheads, or an ideal transmission where it has none. [-]
    progress : callable, optional
        Called with the part done, 0 to 1. [-]

    Returns
    -------
    RatioWindows
        Closed sets of ratios that keep RMS, peak, speed and voltage, whatever drive comes after.

    Raises
    ------
    InputError
        If the axis has a linear motor, no motor fits it, or no check of the motor is applied.

    Notes
    -----
    RMS torque and speed bound a window in closed form (`core.ratio_windows`); within it, and where the torque
    saturates, the ends are roots of the checks themselves, found to rounding, so that a ratio at an end passes.
    """
    motors, gearheads = fits_axis(case)
    limits = MotorLimits(case, demand)
    _refuse_hopeless(case, motors, limits)
    used, assumption = _transmission(case, gearheads) if transmission is None else (
        transmission, "transmission as given"
    )  # fmt: skip
    windows: list[MotorWindow] = []
    for start in range(0, len(motors), _MOTORS_AT_A_TIME):
        block = motors[start : start + _MOTORS_AT_A_TIME]
        windows += _of_motors(limits, block, gearheads, used)
        if progress is not None:
            progress((start + len(block)) / len(motors))
    ratios = np.unique(case.gearhead_parameters.ratio[gearheads])
    return RatioWindows(used, assumption, tuple(windows), tuple(float(r) for r in ratios))


def _refuse_hopeless(case: Case, motors: IndexArray, limits: MotorLimits) -> None:
    if case.mechanism.drives_linear_motor:
        raise InputError(
            [Problem("axis", None, "mechanism", f"'{case.mechanism.name}'", "a mechanism with a turning motor",
                     "A linear motor has no transmission: leave the ratio windows out.")]
        )  # fmt: skip
    if not len(motors):
        raise InputError(
            [Problem("motors", None, "", "no motor that fits the axis", "at least one rotary motor",
                     "Add a motor to the catalog.")]
        )  # fmt: skip
    if not limits.checks:
        raise InputError(
            [Problem("limits", None, "applies", "no check of the motor", "at least one of RMS current, peak torque "
                     "over speed, peak current, speed and voltage", "Apply one of these checks.")]
        )  # fmt: skip


def _transmission(case: Case, gearheads: IndexArray) -> tuple[GearheadParameters, str]:
    """Medians of what the catalog's gearheads lose; what depends on their size is left to the catalog ratios."""
    g = case.gearhead_parameters.take(gearheads)
    real = ~g.is_direct
    if not real.any():
        return one_gearhead(1.0), "ideal transmission: the catalog has no gearhead"
    eta, back = (float(np.median(column[real])) for column in (g.efficiency, g.efficiency_back))
    return one_gearhead(1.0, efficiency=eta, efficiency_back=back), (
        f"transmission with the medians of the catalog's gearheads, efficiency {100.0 * eta:.4g} % and back-driving "
        f"{100.0 * back:.4g} %, without the inertia and running torque that come with a size"
    )


def _of_motors(
    limits: MotorLimits, index: IndexArray, gearheads: IndexArray, transmission: GearheadParameters
) -> list[MotorWindow]:
    case, demand = limits.case, limits.demand
    motors = case.motor_parameters.take(index)
    missing = limits.missing(motors)
    products = mean_products(demand.duration_s, demand.functions)
    rows = gearhead_rows(replace(transmission, ratio=np.ones(1)))[0]
    columns = motor_columns(
        motors.rotor_inertia_kg_m2, motors.friction_torque_nm, motors.viscous_friction_nm_s
    )
    moments = [torque_moments(products, rows, column) for column in columns]
    rating = continuous_torque_squared(motors, case.surroundings)
    closed = [
        _ClosedForm((), np.inf)
        if missing[i]
        else _ClosedForm.of(limits, moments[i], rating[:, i], float(motors.speed_max_rad_s[i]))
        for i in range(len(motors))
    ]
    outer = [form.searched for form in closed]
    found = search_intervals(limits, motors, transmission, outer)
    inside = _catalog(limits, index, gearheads, [bool(m) for m in missing])
    windows = []
    for i, parts in enumerate(found):
        best = moments[i].best_ratio()
        least = float(moments[i].mean_square(best)) if 0.0 < best < np.inf else np.nan
        inertia = float(motors.rotor_inertia_kg_m2[i])
        windows.append(
            MotorWindow(
                motor=case.motors.names[int(index[i])],
                motor_index=int(index[i]),
                intervals=parts,
                best_ratio=best,
                best_torque_rms_nm=float(np.sqrt(least)),
                power_rate=float(rating[0, i]) / inertia,
                power_rate_needed=least / inertia,
                catalog=inside[i],
                missing=missing[i],
                reason="" if parts else closed[i].why_none(missing[i]),
            )
        )
    return windows


@dataclass(frozen=True)
class _ClosedForm:
    """What RMS torque and speed allow by themselves: no ratio of the window lies outside."""

    rms: tuple[tuple[float, float], ...]
    top: float  # by speed

    @classmethod
    def of(
        cls, limits: MotorLimits, moments: TorqueMoments, rating: FloatArray, speed_max: float
    ) -> _ClosedForm:
        keys = {check.key for check in limits.checks}
        top = np.inf
        if MOTOR_SPEED.key in keys and limits.demand.shaft_speed_peak > 0.0:
            top = limits.allowed(MOTOR_SPEED) * speed_max / limits.demand.shaft_speed_peak
        intervals: tuple[tuple[float, float], ...] = ((0.0, np.inf),)
        if RMS_CURRENT.key in keys:
            speed = limits.demand.shaft_speed_rms
            # Saturation only asks for more current than this.
            l_0, l_1, l_2 = limits.allowed(RMS_CURRENT) ** 2 * rating * np.array([1.0, speed, speed**2])
            intervals = moments.ratios_within((float(l_0), float(l_1), float(l_2)))
        return cls(intervals, top)

    @property
    def searched(self) -> tuple[tuple[float, float], ...]:
        """Where both allow a ratio; never an end at zero, never endless."""
        return tuple(_finite(low, min(high, self.top)) for low, high in self.rms if low <= self.top)

    def why_none(self, missing: tuple[str, ...]) -> str:
        """In words."""
        if missing:
            return f"not known: {', '.join(missing)} missing"
        if not self.rms:
            return "RMS torque beyond the continuous rating at every ratio"
        if not self.searched:
            return f"RMS torque asks for a ratio of {self.rms[0][0]:.4g} or more, speed for {self.top:.4g} or less"
        return "peak torque or voltage leave nothing of what RMS torque and speed allow"


def _finite(low: float, high: float) -> tuple[float, float]:
    if low == 0.0 and np.isinf(high):
        return 1.0 / np.sqrt(_WIDEST), np.sqrt(_WIDEST)
    return (high / _WIDEST if low == 0.0 else low), (low * _WIDEST if np.isinf(high) else high)


def _catalog(
    limits: MotorLimits, index: IndexArray, gearheads: IndexArray, unknown: list[bool]
) -> list[tuple[CatalogRatio, ...]]:
    """Transmissions of the catalog that keep the limits of each motor, by bounds first and then exactly."""
    case, demand = limits.case, limits.demand
    motors, catalog = case.motor_parameters.take(index), case.gearhead_parameters.take(gearheads)
    names = [case.gearheads.names[int(g)] for g in gearheads]
    if not len(gearheads):
        return [()] * len(index)
    block = Block(
        demand, case.surroundings, np.nan, MotorSide.of(motors, case.surroundings),
        GearheadSide.of(catalog, demand).part(slice(0, None)),
    )  # fmt: skip
    possible = np.broadcast_to(~np.array(unknown)[None, :], (len(gearheads), len(index))).copy()
    with np.errstate(over="ignore"):
        for check in limits.checks:
            assert check.bound is not None
            possible &= ~(check.bound(block) / limits.allowed(check) > 1.0 + _BOUND_ROUNDING)
    row, column = np.nonzero(possible)  # gearhead, motor
    inside: list[list[CatalogRatio]] = [[] for _ in index]
    if len(row):
        excess, _ = limits.excess(motors.take(column), catalog.take(row))
        for g, m in zip(row[excess <= 0.0], column[excess <= 0.0], strict=True):
            inside[m].append(CatalogRatio(names[g], float(catalog.ratio[g])))
    return [tuple(sorted(found, key=lambda c: (c.ratio, c.gearhead))) for found in inside]
