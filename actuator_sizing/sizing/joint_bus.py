"""Several axes on one DC bus: the sum of their powers at the worst of the offsets in time that are possible."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import BusPartner, Case
from actuator_sizing.core.bus import bus_cycle, stored_voltage
from actuator_sizing.core.quadrature import lobatto, series_value, to_series
from actuator_sizing.errors import InputError, Problem
from actuator_sizing.sizing.bus import BusResults, drawn, own_results, results_of
from actuator_sizing.sizing.bus_power import BusPower, needed_voltage, power_at_bus, terminal_power
from actuator_sizing.sizing.bus_sag import bus_under_load, is_soft, sag
from actuator_sizing.sizing.bus_side import BusSide, bus_side, clamping_threshold, supply_feeds_back
from actuator_sizing.sizing.checks.base import Sets

FloatArray = NDArray[np.float64]

_LONGEST = 48  # cycles of either axis within the time after which both repeat together
_SAME = 1e-9  # relative difference of periods that is rounding
_OFFSETS = 48  # evenly over the period of a partner whose offset is free
_MOST_PIECES = 1_500_000  # of all sets and offsets together; beyond it the extremes are taken to coincide


@dataclass(frozen=True)
class PartnerPower:
    """Another axis as the bus sees it, in its own periodic time."""

    name: str
    offset_s: float  # NaN: free
    period_s: float
    border_s: FloatArray  # (M + 1,) of its pieces
    series: FloatArray  # (M, K) Legendre coefficients of its power at the bus
    capacitance_f: float
    results: BusResults  # one row, as if it were alone

    @property
    def means_w(self) -> tuple[float, float]:
        """Means of what it takes and of what it gives back, before anything is stored or shared. [W]"""
        energy = _nodes(self).runs.energy_j / self.period_s
        return float(np.maximum(energy, 0.0).sum()), float(np.maximum(-energy, 0.0).sum())


def is_joint(sets: Sets) -> bool:
    """Whether other axes are on the bus."""
    return bool(sets.partners)


def bus_results(sets: Sets) -> BusResults:
    """The bus of every set with all axes that are on it, in periodic steady state, at the worst possible offsets.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]

    Returns
    -------
    BusResults
        Shape (S,). Each field is the worst over the offsets by itself. [-]

    Notes
    -----
    Exact over the common period where periods are commensurable and at most one offset is free: fixed offsets are
    taken as stated, a free one is sought on an even grid. Elsewhere the extremes of the axes are taken to coincide
    and no axis is counted on to take what another gives back, which is on the safe side: one store for all, which
    empties into nothing below zero, is never fuller than the stores of each by itself together.
    """
    own = sets.once(own_results)
    if not is_joint(sets):
        return own
    partners = sets.partners
    side = _joint_side(sets, partners)
    repeats = _repeats(sets.demand.cycle_s, partners)
    tried = _offsets(partners)
    if repeats is None or tried is None or not _affordable(sets, partners, repeats, len(tried)):
        return _coinciding(sets, own, partners, side)
    power, needed = _own_power(sets, side)
    found = [_at_offsets(sets, side, power, needed, partners, offsets, repeats) for offsets in tried]
    return _worst(found, sets.demand.cycle_s)


def joint_rule(sets: Sets) -> str:
    """How the axes on the bus were put together, in words; empty for one axis.

    Parameters
    ----------
    sets : Sets
        Evaluated sets. [-]
    """
    if not is_joint(sets):
        return ""
    partners = sets.partners
    names = ", ".join(partner.name for partner in partners)
    repeats = _repeats(sets.demand.cycle_s, partners)
    tried = _offsets(partners)
    if repeats is None:
        return (
            f"with {names}, whose period and this one have no common one: the extremes are taken to coincide"
        )
    if tried is None or not _affordable(sets, partners, repeats, len(tried)):
        return f"with {names}, whose offsets are free: the extremes are taken to coincide"
    span = f"over {repeats} cycles of this axis, after which all repeat"
    if len(tried) == 1:
        return f"with {names} at the stated offsets, {span}"
    return f"with {names} at the worst of {len(tried)} offsets, {span}"


# -- partners -----------------------------------------------------------------------------------------
def partner_axis(host: Case, partner: BusPartner) -> tuple[Case, NDArray[np.intp]]:
    """Case of a partner as it is on the bus of its host, and its set.

    Parameters
    ----------
    host : Case
        The case that names it. [-]
    partner : BusPartner
        Its row, with its case read. [-]

    Returns
    -------
    case : Case
        With the supply of the host, whose resistor and capacitors count once. [-]
    index : ndarray of int, shape (1, 3)
        Its motor, gearhead and drive. [-]

    Raises
    ------
    InputError
        If its parts are not named; `compare` puts in the best of its own case.
    """
    if partner.axis is None or not partner.motor:
        raise InputError(
            [Problem("bus_partners", partner.row, "motor", "no parts", "motor and drive of the partner",
                     "Name its parts, or compare this case, which takes the best set of that case.")]
        )  # fmt: skip
    axis = replace(partner.axis.by_cycle()[0], partners=())
    named = ((axis.motors, partner.motor), (axis.gearheads, partner.gearhead), (axis.drives, partner.drive))
    index = [catalog.names.index(name) for catalog, name in named]
    kept = ("supply", "supply feeds back", "supply internal resistance", "supply current limit")
    options = {**axis.options, **{name: host.options.get(name) for name in kept}}
    options |= dict.fromkeys(("bus capacitance", "other power on the bus", "brake resistor"))
    low, high = host.surroundings.bus_min_v, host.surroundings.bus_max_v
    surroundings = replace(axis.surroundings, bus_min_v=low, bus_max_v=high)
    return replace(axis, surroundings=surroundings, options=options), np.array([index], dtype=np.intp)


def partner_power(partner: BusPartner, sets: Sets) -> PartnerPower:
    """What an evaluated partner draws from the bus.

    Parameters
    ----------
    partner : BusPartner
        Its row. [-]
    sets : Sets
        Its set, evaluated on the case of `partner_axis`. [-]

    Returns
    -------
    PartnerPower
        In its own periodic time. [-]
    """
    side = bus_side(sets, np.full(1, np.nan))
    power = power_at_bus(terminal_power(sets, sets.index[:, :2]), np.zeros(1, dtype=np.intp), side)
    kept_pieces = power.duration_s[0] > 0.0
    duration, values = power.duration_s[0][kept_pieces], power.power_w[0][kept_pieces]
    return PartnerPower(
        name=partner.name,
        offset_s=partner.offset_s,
        period_s=float(duration.sum()),
        border_s=np.concatenate([[0.0], np.cumsum(duration)]),
        series=values @ to_series(values.shape[1]).T,
        capacitance_f=float(np.nan_to_num(sets.drives.capacitance_f[0], nan=0.0)),
        results=own_results(sets),
    )


def partners_known(sets: Sets) -> bool:
    """Whether the drives of all other axes on the bus state their efficiency."""
    return not any(np.isnan(partner.results.supply_power_peak_w[0]) for partner in sets.partners)


def _joint_side(sets: Sets, partners: tuple[PartnerPower, ...]) -> BusSide:
    """The bus with the capacitors of every drive on it; those that are not known count as nothing."""
    more = sum(partner.capacitance_f for partner in partners)
    if more != 0.0:
        outside = float(np.nan_to_num(sets.option("bus capacitance"), nan=0.0)) + more
        options = {**sets.case.options, "bus capacitance": outside}
        sets = replace(sets, case=replace(sets.case, options=options), _found={})
    side = bus_side(sets, clamping_threshold(sets))
    # What the bus gives is known only where the losses of every drive on it are.
    return side if partners_known(sets) else replace(side, stated_efficiency=np.full(len(side), np.nan))


def _repeats(period_s: float, partners: tuple[PartnerPower, ...]) -> int | None:
    """Cycles of this axis after which it and its partners repeat together; None where they never do."""
    together = 1
    for partner in partners:
        ratio = Fraction(period_s / partner.period_s).limit_denominator(_LONGEST)
        if ratio == 0 or abs(float(ratio) * partner.period_s - period_s) > _SAME * period_s:
            return None
        together = int(np.lcm(together, ratio.denominator))
        if max(together, together * float(ratio)) > _LONGEST:
            return None
    return together


def _offsets(partners: tuple[PartnerPower, ...]) -> list[tuple[float, ...]] | None:
    """Offsets to try; None where more than one is free."""
    free = [number for number, partner in enumerate(partners) if np.isnan(partner.offset_s)]
    if len(free) > 1:
        return None
    stated = [partner.offset_s for partner in partners]
    if not free:
        return [tuple(stated)]
    tried = []
    for part in np.arange(_OFFSETS) / _OFFSETS:
        stated[free[0]] = float(part) * partners[free[0]].period_s
        tried.append(tuple(stated))
    return tried


def _affordable(sets: Sets, partners: tuple[PartnerPower, ...], repeats: int, offsets: int) -> bool:
    total = repeats * sets.demand.cycle_s
    pieces = 2 * repeats * len(sets.demand.duration_s)
    pieces += sum(int(round(total / p.period_s)) * len(p.series) for p in partners)
    return len(sets) * offsets * pieces <= _MOST_PIECES


# -- exact, over the common period --------------------------------------------------------------------
def _own_power(sets: Sets, side: BusSide) -> tuple[BusPower, FloatArray]:
    """Power at the bus and voltage needed of every set."""
    pairs, pair = np.unique(sets.index[:, :2], axis=0, return_inverse=True)
    terminals = terminal_power(sets, pairs)
    pair = pair.reshape(-1)
    return power_at_bus(terminals, pair, side), needed_voltage(terminals, pair)


def _at_offsets(
    sets: Sets,
    side: BusSide,
    own: BusPower,
    needed_v: FloatArray,
    partners: tuple[PartnerPower, ...],
    offsets: tuple[float, ...],
    repeats: int,
) -> BusResults:
    """Results of all sets over the common period at given offsets."""
    count, period = own.power_w.shape[2], sets.demand.cycle_s
    total = repeats * period
    fixed = [
        np.mod(partner.border_s[:-1] + offset + np.arange(int(round(total / partner.period_s)))[:, None]
               * partner.period_s, total).ravel()
        for partner, offset in zip(partners, offsets, strict=True)
    ]  # fmt: skip
    starts = np.cumsum(own.duration_s, axis=1) - own.duration_s
    ours = (starts[:, None] + period * np.arange(repeats)[:, None]).reshape(len(starts), -1)
    others = np.broadcast_to(np.concatenate(fixed), (len(starts), sum(map(len, fixed))))
    borders = np.sort(np.concatenate([ours, others, np.full((len(starts), 1), total)], axis=1), axis=1)
    borders[:, 0] = 0.0
    length = np.diff(borders, axis=1)
    middle = 0.5 * (borders[:, 1:] + borders[:, :-1])
    node = 0.5 * (lobatto(count)[0] + 1.0)
    time = borders[:, :-1, None] + node * length[..., None]
    edges = np.concatenate([starts, np.full((len(starts), 1), period)], axis=1)
    matrix = to_series(count).T
    place = _pieces(edges, middle, period)
    watts = _sampled(edges, own.power_w @ matrix, place, time, middle, period)
    for partner, offset in zip(partners, offsets, strict=True):
        at, inside = partner.border_s[None], middle - offset
        where = _pieces(at, inside, partner.period_s)
        watts = watts + _sampled(at, partner.series[None], where, time - offset, inside, partner.period_s)
    power = BusPower(length, watts)
    under = None
    if is_soft(sets):
        needed = _sampled(edges, needed_v @ matrix, place, time, middle, period)
        under = bus_under_load(sets, needed, power, side)
    members = np.arange(len(sets))
    return results_of(sets, members, side, drawn(sets, power, total, side.room_j), total, under)


def _pieces(edges: FloatArray, middle: FloatArray, period: float) -> NDArray[np.intp]:
    """Piece of each row in which the middle of each interval lies, periodic; `edges` has one row or as many."""
    inside = np.mod(middle, period)
    rows = edges if len(edges) == len(inside) else np.broadcast_to(edges, (len(inside), edges.shape[1]))
    found = [np.searchsorted(edge, t, side="right") - 1 for edge, t in zip(rows, inside, strict=True)]
    return np.asarray(np.clip(np.array(found), 0, edges.shape[1] - 2), dtype=np.intp)


def _sampled(
    edges: FloatArray,
    series: FloatArray,
    place: NDArray[np.intp],
    time: FloatArray,
    middle: FloatArray,
    period: float,
) -> FloatArray:
    """Values at the nodes of the intervals, (S, I, K); a polynomial on a piece is one on every part of it."""
    row = (
        np.arange(len(place))[:, None]
        if len(edges) == len(place)
        else np.zeros((len(place), 1), dtype=np.intp)
    )
    start, end = edges[row, place], edges[row, place + 1]
    # Nodes at the ends of an interval belong to its own piece, whatever rounding says.
    turns = np.floor(middle / period) * period
    inside = time - turns[..., None]
    with np.errstate(divide="ignore", invalid="ignore"):
        x = 2.0 * (inside - start[..., None]) / (end - start)[..., None] - 1.0
    x = np.clip(np.nan_to_num(x), -1.0, 1.0)
    coefficients = np.moveaxis(series[row, place], 2, 0)[..., None]
    return series_value(np.broadcast_to(coefficients, (series.shape[2], *x.shape)), x)


_SMALLEST = ("voltage_min_v",)
_TOGETHER = {
    "voltage_max_v": ("voltage_max_at_s",),
    "brake_pulse_j": ("brake_pulse_s",),
    "supply_power_peak_w": ("supply_power_peak_at_s",),
    "sag_utilisation": ("sag_voltage_needed_v", "sag_voltage_available_v", "sag_at_s"),
    "voltage_min_v": ("voltage_min_at_s",),
}


def _worst(found: list[BusResults], cycle_s: float) -> BusResults:
    """Each field at the worst of the offsets by itself; instants fall into the cycle of this axis."""
    follows = {name: leader for leader, names in _TOGETHER.items() for name in names}
    values = {f.name: np.stack([getattr(each, f.name) for each in found]) for f in fields(BusResults)}
    chosen = {}
    for name, column in values.items():
        leader = values[follows.get(name, name)]
        sign = -1.0 if follows.get(name, name) in _SMALLEST else 1.0
        worst = np.where(np.isnan(leader), -np.inf, sign * leader).argmax(axis=0)
        chosen[name] = column[worst, np.arange(column.shape[1])]
        if name.endswith("_at_s"):
            chosen[name] = np.mod(chosen[name], cycle_s)
    return BusResults(**chosen)


# -- bound --------------------------------------------------------------------------------------------
def _coinciding(sets: Sets, own: BusResults, partners: tuple[PartnerPower, ...], side: BusSide) -> BusResults:
    """Extremes of all axes at once, and nothing that one gives back counted on by another."""
    alone = [partner.results for partner in partners]
    peaks = sum(float(r.supply_power_peak_w[0]) for r in alone)
    known = np.where(np.isnan(side.stated_efficiency), np.nan, 1.0)
    free = replace(
        sets, case=replace(sets.case, options={**sets.case.options, "brake resistor": None}), _found={}
    )
    stored = _stored(own_results(free), sets) + sum(_stored(r, sets) for r in alone)
    highest = stored_voltage(sets.surroundings.bus_max_v, side.stored_f, stored)
    highest = np.fmin(highest, np.where(np.isnan(side.threshold_v), np.inf, side.threshold_v))
    power, needed = _own_power(sets, side)
    energy = power.runs.energy_j / sets.demand.cycle_s
    taken = np.maximum(energy, 0.0).sum(axis=1) + sum(partner.means_w[0] for partner in partners)
    returned = np.maximum(-energy, 0.0).sum(axis=1) + sum(partner.means_w[1] for partner in partners)
    back_peak = np.maximum(BusPower(power.duration_s, -power.power_w).largest()[0], 0.0)
    returned_peak = back_peak + sum(_returned_peak(partner) for partner in partners)
    feeds_back = supply_feeds_back(sets)
    clamps = ~np.isnan(side.threshold_v) & (not feeds_back)
    under = None
    if is_soft(sets):
        under = bus_under_load(
            sets, needed, BusPower(power.duration_s, power.power_w + np.nan_to_num(peaks)), side
        )
    droop = sag(sets, np.arange(len(sets)), under)
    mean = known * taken
    rms = own.supply_power_rms_w + sum(float(r.supply_power_rms_w[0]) for r in alone)
    pulse = np.where(clamps, own.brake_pulse_j + sum(_largest_return(partner) for partner in partners), 0.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = own.brake_pulse_ratio * np.where(own.brake_pulse_j > 0.0, pulse / own.brake_pulse_j, 1.0)
    return replace(
        own,
        capacitance_f=side.capacitance_f,
        voltage_max_v=own.voltage_max_v if feeds_back else np.fmax(highest, own.voltage_max_v),
        brake_energy_j=np.where(clamps, returned * sets.demand.cycle_s, 0.0),
        brake_power_mean_w=np.where(clamps, returned, 0.0),
        brake_power_peak_w=np.where(clamps, returned_peak, 0.0),
        brake_pulse_j=pulse,
        brake_pulse_ratio=ratio,
        returned_power_peak_w=returned_peak if feeds_back else own.returned_power_peak_w,
        supply_power_mean_w=mean,
        supply_power_peak_w=own.supply_power_peak_w + peaks,
        supply_power_rms_w=rms,
        sag_utilisation=known * droop.utilisation,
        sag_voltage_needed_v=known * droop.needed_v,
        sag_voltage_available_v=known * droop.available_v,
        sag_at_s=known * droop.at_s,
        voltage_min_v=known * droop.lowest_v,
        voltage_min_at_s=known * droop.lowest_at_s,
    )


def _stored(results: BusResults, sets: Sets) -> FloatArray:
    """Largest energy that an axis by itself leaves on a bus without chopper. [J]"""
    squares = results.voltage_max_v**2 - sets.surroundings.bus_max_v**2
    return np.asarray(0.5 * results.capacitance_f * np.maximum(squares, 0.0))


def _nodes(partner: PartnerPower) -> BusPower:
    count = partner.series.shape[1]
    matrix = np.polynomial.legendre.legvander(lobatto(count)[0], count - 1)
    return BusPower(np.diff(partner.border_s)[None], (partner.series @ matrix.T)[None])


def _returned_peak(partner: PartnerPower) -> float:
    power = _nodes(partner)
    return max(float(BusPower(power.duration_s, -power.power_w).largest()[0][0]), 0.0)


def _largest_return(partner: PartnerPower) -> float:
    """Largest energy that it gives back between two times of motoring. [J]"""
    return float(bus_cycle(_nodes(partner).runs, np.ones(1), np.zeros(1)).dumped_pulse_j[0])
