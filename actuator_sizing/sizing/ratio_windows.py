"""Which transmission ratios each motor can live with, and which of the catalog are among them."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.core.moments import (
    gearhead_products,
    gearhead_rows,
    mean_products,
    motor_columns,
    motor_products,
)
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters
from actuator_sizing.core.ratio_windows import TorqueMoments, torque_moments
from actuator_sizing.errors import InputError, Problem
from actuator_sizing.sizing.checks.motor import MOTOR_SPEED, RMS_CURRENT, continuous_torque_squared
from actuator_sizing.sizing.cycles import CycleDemand
from actuator_sizing.sizing.fitting import fits_axis
from actuator_sizing.sizing.motor_limits import MotorLimits, one_gearhead
from actuator_sizing.sizing.ratio_results import CatalogRatio, MotorWindow, RatioWindows
from actuator_sizing.sizing.ratio_search import search_intervals

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

_WIDEST = 1e6  # from one end of a search to the other, where nothing bounds it
_ROUNDING = 1e-9  # what the exact evaluation may differ from the closed forms by
_MOTORS_AT_A_TIME = 512


def ratio_windows(
    cycles: tuple[CycleDemand, ...],
    *,
    transmission: GearheadParameters | None = None,
    progress: Callable[[float], None] | None = None,
) -> RatioWindows:
    """Work out the ratio windows of every motor that fits the axis.

    Parameters
    ----------
    cycles : tuple of CycleDemand
        The cycles of the case; a ratio must keep the limits in each of them. [-]
    transmission : GearheadParameters, optional
        One row with the losses and inertia to work with, its ratio of no account; by default the median
        efficiencies of the catalog's gearheads, or an ideal transmission where it has none. [-]
    progress : callable, optional
        Called with the part done, 0 to 1. [-]

    Returns
    -------
    RatioWindows
        Closed sets of ratios that keep RMS, peak, speed and voltage, whatever drive comes after. The best ratio is
        that of the first cycle.

    Raises
    ------
    InputError
        If the axis has a linear motor, no motor fits it, or no check of the motor is applied.

    Notes
    -----
    RMS torque and speed bound a window in closed form (`core.ratio_windows`); within it, and where the torque
    saturates, the ends are roots of the checks themselves, found to rounding, so that a ratio at an end passes.
    """
    case = cycles[0].case
    motors, gearheads = fits_axis(case)
    limits = MotorLimits(cycles)
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
    case = limits.case
    motors = case.motor_parameters.take(index)
    missing = limits.missing(motors)
    rows = gearhead_rows(replace(transmission, ratio=np.ones(1)))[0]
    columns = motor_columns(
        motors.rotor_inertia_kg_m2, motors.friction_torque_nm, motors.viscous_friction_nm_s
    )
    rating = continuous_torque_squared(motors, case.surroundings)
    by_cycle = []
    for each in limits.cycles:
        products = mean_products(each.demand.duration_s, each.demand.functions)
        by_cycle.append([torque_moments(products, rows, column) for column in columns])
    moments = by_cycle[0]
    closed = []
    for i in range(len(motors)):
        form = _ClosedForm((), np.inf)
        if not missing[i]:
            form = _ClosedForm(((0.0, np.inf),), np.inf)
            for each, of_cycle in zip(limits.cycles, by_cycle, strict=True):
                form = form.within(limits, each, of_cycle[i], rating[:, i], float(motors.speed_max_rad_s[i]))
        closed.append(form)
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

    def within(
        self,
        limits: MotorLimits,
        each: CycleDemand,
        moments: TorqueMoments,
        rating: FloatArray,
        speed_max: float,
    ) -> _ClosedForm:
        """What is left of it when one more cycle must be kept."""
        top, rms = self.top, self.rms
        if MOTOR_SPEED in limits.checks and each.demand.shaft_speed_peak > 0.0:
            top = min(top, limits.allowed(MOTOR_SPEED) * speed_max / each.demand.shaft_speed_peak)
        if RMS_CURRENT in limits.checks and RMS_CURRENT.concerns_cycle(each.cycle.runs):
            speed = each.demand.shaft_speed_rms
            # Saturation only asks for more current than this.
            l_0, l_1, l_2 = limits.allowed(RMS_CURRENT) ** 2 * rating * np.array([1.0, speed, speed**2])
            kept = moments.ratios_within((float(l_0), float(l_1), float(l_2)))
            rms = tuple((max(a, c), min(b, d)) for a, b in rms for c, d in kept if max(a, c) <= min(b, d))
        return _ClosedForm(rms, top)

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
    """Transmissions of the catalog that keep the limits of each motor, by RMS torque and speed, then exactly."""
    case = limits.case
    motors, catalog = case.motor_parameters.take(index), case.gearhead_parameters.take(gearheads)
    names = [case.gearheads.names[int(g)] for g in gearheads]
    if not len(gearheads):
        return [()] * len(index)
    possible = np.broadcast_to(~np.array(unknown)[None, :], (len(gearheads), len(index))).copy()
    for each in limits.cycles:
        possible &= _possible(limits, each, motors, catalog)
    row, column = np.nonzero(possible)  # gearhead, motor
    inside: list[list[CatalogRatio]] = [[] for _ in index]
    if len(row):
        excess, _ = limits.excess(motors.take(column), catalog.take(row))
        for g, m in zip(row[excess <= 0.0], column[excess <= 0.0], strict=True):
            inside[m].append(CatalogRatio(names[g], float(catalog.ratio[g])))
    return [tuple(sorted(found, key=lambda c: (c.ratio, c.gearhead))) for found in inside]


def _possible(
    limits: MotorLimits, each: CycleDemand, motors: MotorParameters, catalog: GearheadParameters
) -> NDArray[np.bool_]:
    """Which motors keep speed and, saturation left out, RMS torque on which gearheads, shape (N, M)."""
    demand = each.demand
    n = catalog.ratio[:, None]
    possible = np.ones((len(catalog), len(motors)), dtype=bool)
    if MOTOR_SPEED in limits.checks:
        most = limits.allowed(MOTOR_SPEED) * motors.speed_max_rad_s * (1.0 + _ROUNDING)
        possible &= ~(n * demand.shaft_speed_peak > most)
    if RMS_CURRENT in limits.checks and RMS_CURRENT.concerns_cycle(each.cycle.runs):
        columns = motor_columns(
            motors.rotor_inertia_kg_m2, motors.friction_torque_nm, motors.viscous_friction_nm_s
        )
        products = mean_products(demand.duration_s, demand.functions)
        square = (motor_products(columns) @ gearhead_products(products, gearhead_rows(catalog))).T
        omega = n * demand.shaft_speed_rms
        a, b, c = continuous_torque_squared(motors, limits.case.surroundings)
        most = limits.allowed(RMS_CURRENT) ** 2 * (a + b * omega + c * omega**2)
        possible &= ~(square > most + _ROUNDING * np.abs(a))
    return possible
