"""Bounds worked out for a tile of N gearheads × M motors, in buffers that stay in the cache."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.sizing.block import Block
from actuator_sizing.sizing.bounds import Form, Ratio

if TYPE_CHECKING:
    from actuator_sizing.sizing.checks.base import Check

SingleArray = NDArray[np.float32]

# In place of zero and less in a denominator. Where torque is out of reach and the winding runs away too, the torque
# is to govern, as it does when the set is evaluated exactly: of infinite checks the first in the list counts.
TINY, RUNAWAY = 1e-30, 1e-12
_ONE = np.float32(1.0)


@dataclass(frozen=True)
class BlockBounds:
    """The bounds of all checks for N gearheads × M motors over every cycle, not yet worked out."""

    blocks: tuple[Block, ...]  # one for each cycle
    #: number in the list of checks, its ratios with the number of their cycle, and one over the allowed utilisation
    by_motor: tuple[tuple[int, tuple[tuple[int, Ratio], ...], float], ...]
    gearhead_worst: SingleArray  # (N, 1) largest of those that depend on the gearhead alone
    gearhead_check: NDArray[np.intp]  # (N,) which check that is

    @classmethod
    def of(
        cls,
        blocks: tuple[Block, ...],
        checks: tuple[Check, ...],
        allowed: Mapping[str, float],
    ) -> BlockBounds:
        """Ask every check for its bound.

        Parameters
        ----------
        blocks : tuple of Block
            The same gearheads and motors under every cycle. [-]
        checks : tuple of Check
            Checks that have a bound. [-]
        allowed : mapping
            Allowed utilisation by check key. [-]

        Returns
        -------
        BlockBounds
            Of several cycles the largest bound counts. [-]
        """
        gearheads = blocks[0].gearheads
        count = len(gearheads)
        worst, which = np.zeros(count), np.zeros(count, dtype=np.intp)
        by_motor = []
        for number, check in enumerate(checks):
            assert check.bound is not None
            ratios: list[tuple[int, Ratio]] = []
            for cycle, block in enumerate(blocks):
                if not check.concerns_cycle(block.runs):
                    continue
                bound = check.bound(block)
                if isinstance(bound, tuple):
                    ratios += [(cycle, ratio) for ratio in bound]
                    continue
                utilisation = bound.reshape(count) / allowed[check.key]
                if check.group == "gearhead":
                    utilisation = np.where(gearheads.is_direct, 0.0, utilisation)
                higher = utilisation > worst  # NaN, not known, is never the worst
                worst, which = np.where(higher, utilisation, worst), np.where(higher, number, which)
            if ratios:
                by_motor.append((number, tuple(ratios), 1.0 / allowed[check.key]))
        return cls(
            blocks,
            tuple(by_motor),
            worst.astype(np.float32)[:, None],
            which,
        )


@dataclass(frozen=True)
class Tile:
    """What the bounds say of N gearheads × M motors; valid until the next tile is worked out."""

    worst: SingleArray  # (N, M) largest utilisation over allowed
    by_motor: tuple[tuple[int, SingleArray], ...]  # the same of each check that depends on the motor
    torque_peak: SingleArray  # (N, M) lower bound [N·m]
    mean_square: SingleArray  # (N, M) exact, of the cycles that repeat the largest [N²·m²]


class TileWorker:
    """Works out tiles of at most `size` pairs, always in the same buffers."""

    def __init__(self, size: int):
        self._size = size
        self._buffers: dict[str, NDArray[Any]] = {}
        self._views: dict[tuple[str, tuple[int, int]], NDArray[Any]] = {}
        self._rows: dict[tuple[float, int], SingleArray] = {}

    def _buffer(self, name: str, shape: tuple[int, int], dtype: type = np.float32) -> NDArray[Any]:
        view = self._views.get((name, shape))
        if view is None:
            count = shape[0] * shape[1]
            flat = self._buffers.get(name)
            if flat is None or len(flat) < count:
                flat = self._buffers[name] = np.empty(max(self._size, count), dtype=dtype)
            view = self._views[name, shape] = flat[:count].reshape(shape)
        return view

    def _row(self, value: float, count: int) -> SingleArray:
        """A row of one value: faster than a scalar where numpy looks for the larger."""
        row = self._rows.get((value, count))
        if row is None:
            row = self._rows[value, count] = np.full(count, value, dtype=np.float32)
        return row

    def mask(self, name: str, shape: tuple[int, int]) -> NDArray[np.bool_]:
        """A buffer of truth values, shape (N, M), its content left over from before."""
        return self._buffer(name, shape, np.bool_)

    def work(self, bounds: BlockBounds, which: slice) -> Tile:
        """Work out every bound for some of the gearheads of a block.

        Parameters
        ----------
        bounds : BlockBounds
            The bounds of the block. [-]
        which : slice
            Which of its gearheads. [-]

        Returns
        -------
        Tile
            In buffers that the next call overwrites. [-]
        """
        gearhead_worst = bounds.gearhead_worst[which]
        shape = (len(gearhead_worst), len(bounds.blocks[0].motors))
        cycles = [self._pair_quantities(block, which, n, shape) for n, block in enumerate(bounds.blocks)]
        worst, part = self._buffer("worst", shape), self._buffer("part", shape)
        worst[:] = gearhead_worst
        found = []
        for number, ratios, scale in bounds.by_motor:
            largest = self._buffer(f"check {number}", shape)
            for place, (cycle, ratio) in enumerate(ratios):
                self._ratio(ratio, which, *cycles[cycle], part if place else largest)
                if place:
                    np.maximum(largest, part, out=largest)
            if scale != 1.0:
                np.multiply(largest, np.float32(scale), out=largest)
            np.maximum(worst, largest, out=worst)
            found.append((number, largest))
        square, peak = cycles[0]
        # A cycle that runs once has no mean for the drive's continuous rating.
        if not bounds.blocks[0].repeats:
            square.fill(0.0)
        for block, (other_square, other_peak) in zip(bounds.blocks[1:], cycles[1:], strict=True):
            np.maximum(peak, other_peak, out=peak)
            if block.repeats:
                np.maximum(square, other_square, out=square)
        return Tile(worst, tuple(found), peak, square)

    def _pair_quantities(
        self, block: Block, which: slice, cycle: int, shape: tuple[int, int]
    ) -> tuple[SingleArray, SingleArray]:
        """Mean square of the air-gap torque and lower bound of its peak in one cycle."""
        square, peak = self._buffer(f"square {cycle}", shape), self._buffer(f"peak {cycle}", shape)
        self._product(block.mean_square.part(which), square)
        np.maximum(square, self._row(0.0, shape[1]), out=square)
        peak.fill(0.0)
        part = self._buffer("part", shape)
        for form in block.torque_peak:
            self._product(form.part(which), part)
            np.maximum(peak, part, out=peak)
        return square, peak

    def _product(self, form: Form, out: SingleArray) -> None:
        """``rows @ columns`` in the precision of the form, into single precision."""
        if form.columns.dtype == np.float32:
            np.matmul(form.rows, form.columns, out=out)
            return
        double = self._buffer("double", (out.shape[0], out.shape[1]), np.float64)
        np.matmul(form.rows, form.columns, out=double)
        np.copyto(out, double, casting="same_kind")

    def _ratio(
        self, ratio: Ratio, which: slice, square: SingleArray, peak: SingleArray, out: SingleArray
    ) -> None:
        """Work out one ratio for some of the gearheads."""
        shape = (out.shape[0], out.shape[1])
        spare = self._buffer("spare", shape)
        started = ratio.top is not None
        if ratio.top is not None:
            self._product(ratio.top.part(which), out)
        if ratio.braking is not None:
            np.minimum(out, np.multiply(out, ratio.braking, out=spare), out=out)
        if ratio.offset is not None:
            self._product(ratio.offset.part(which), spare)
            np.add(out, spare, out=out)
        for quantity, factor in ((peak, ratio.per_peak), (square, ratio.per_square)):
            if factor is None:
                continue
            np.multiply(quantity, factor, out=spare if started else out)
            if started:
                np.add(out, spare, out=out)
            started = True
        if ratio.bottom is not None or ratio.drain is not None:
            self._divide(ratio, which, square, out)
        if ratio.is_squared:
            np.sqrt(out, out=out)

    def _divide(self, ratio: Ratio, which: slice, square: SingleArray, out: SingleArray) -> None:
        """Divide by ``bottom − drain · q``, by next to nothing where that is zero or less."""
        shape = (out.shape[0], out.shape[1])
        bottom = self._buffer("spare", shape)
        if ratio.drain is not None:
            np.multiply(square, ratio.drain, out=bottom)
            if ratio.bottom is None:
                np.subtract(_ONE, bottom, out=bottom)
            else:
                whole = self._buffer("whole", shape)
                self._product(ratio.bottom.part(which), whole)
                np.subtract(whole, bottom, out=bottom)
        elif ratio.bottom is not None:
            self._product(ratio.bottom.part(which), bottom)
        floor = TINY if ratio.drain is None else RUNAWAY
        np.maximum(bottom, self._row(floor, shape[1]), out=bottom)
        np.divide(out, bottom, out=out)
