"""The bounds of a block packed for compiled loops: a few nanoseconds a pair, no buffers of the size of a tile."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.sizing.bounds import Form, Ratio
from actuator_sizing.sizing.tile import RUNAWAY, TINY, BlockBounds
from actuator_sizing.sizing.tile_kernel import bounds_of_rows, compiled_loops

#: Columns of the table of ratios: which form or vector of the motors takes each part, −1 for none.
# check, cycle, forms of top, offset and bottom, vectors of braking, peak, square and drain, whether a root is taken
_MOST_FOUND = 2**18  # places for pairs of interest


@dataclass(frozen=True)
class Packed:
    """The bounds of a block as the arguments of `bounds_of_rows`."""

    rows: NDArray[np.float64]  # (N, K) parts of the gearheads that may cancel
    columns: NDArray[np.float64]  # (K, M)
    single_rows: NDArray[np.float32]
    single_columns: NDArray[np.float32]
    vectors: NDArray[np.float32]  # (V, M) factors of the motors
    forms: NDArray[np.int64]  # (F, 3) whether in single precision, first and last of its parts
    squares: NDArray[np.int64]  # (C,) form of the mean square in each cycle
    peaks: NDArray[np.int64]  # (P, 2) cycle and form of the torque at each instant that can govern
    repeats: NDArray[np.bool_]  # (C,)
    #: (R, 10) check, cycle, forms of top, offset and bottom, vectors of braking, peak, square and drain (−1: none),
    #: whether the root is taken
    ratios: NDArray[np.int64]
    scales: NDArray[np.float32]  # (checks,)
    gearhead_worst: NDArray[np.float32]  # (N,)

    @classmethod
    def of(cls, bounds: BlockBounds) -> Packed:
        """Pack the bounds of a block."""
        packer = _Packer()
        squares = [packer.form(block.mean_square) for block in bounds.blocks]
        peaks = [
            (cycle, packer.form(form))
            for cycle, block in enumerate(bounds.blocks)
            for form in block.torque_peak
        ]
        ratios = [
            packer.ratio(place, cycle, ratio)
            for place, (_, members, _) in enumerate(bounds.by_motor)
            for cycle, ratio in members
        ]
        motors = len(bounds.blocks[0].motors)
        gearheads = len(bounds.gearhead_worst)
        (rows, columns), (single_rows, single_columns) = (
            packer.stacked(dtype, gearheads, motors) for dtype in (np.float64, np.float32)
        )
        return cls(
            rows,
            columns,
            single_rows,
            single_columns,
            np.array(packer.vectors, dtype=np.float32).reshape(-1, motors),
            np.array(packer.forms, dtype=np.int64).reshape(-1, 3),
            np.array(squares, dtype=np.int64),
            np.array(peaks, dtype=np.int64).reshape(-1, 2),
            np.array([block.repeats for block in bounds.blocks]),
            np.array(ratios, dtype=np.int64).reshape(-1, 10),
            np.array([scale for _, _, scale in bounds.by_motor], dtype=np.float32),
            np.ascontiguousarray(bounds.gearhead_worst[:, 0]),
        )


class _Packer:
    """Collects forms and vectors, each once."""

    def __init__(self) -> None:
        self.forms: list[tuple[int, int, int]] = []
        self.vectors: list[NDArray[np.float32]] = []
        self._parts: dict[Any, list[Form]] = {np.float64: [], np.float32: []}
        self._count = {np.float64: 0, np.float32: 0}

    def form(self, form: Form | None) -> int:
        """Number of a form, −1 for none."""
        if form is None:
            return -1
        dtype: Any = np.float32 if form.columns.dtype == np.float32 else np.float64
        start = self._count[dtype]
        self._parts[dtype].append(form)
        self._count[dtype] = start + len(form.columns)
        self.forms.append((int(dtype is np.float32), start, self._count[dtype]))
        return len(self.forms) - 1

    def vector(self, values: Any) -> int:
        """Number of a vector of the motors, −1 for none."""
        if values is None:
            return -1
        self.vectors.append(values)
        return len(self.vectors) - 1

    def ratio(self, check: int, cycle: int, ratio: Ratio) -> tuple[int, ...]:
        """A row of the table of ratios."""
        forms = (self.form(part) for part in (ratio.top, ratio.offset, ratio.bottom))
        vectors = (
            self.vector(part) for part in (ratio.braking, ratio.per_peak, ratio.per_square, ratio.drain)
        )
        return (check, cycle, *forms, *vectors, int(ratio.is_squared))

    def stacked(self, dtype: Any, gearheads: int, motors: int) -> tuple[Any, Any]:
        """Rows and columns of all forms of one precision beside one another."""
        parts = self._parts[dtype]
        rows = [np.empty((gearheads, 0), dtype), *(part.rows for part in parts)]
        columns = [np.empty((0, motors), dtype), *(part.columns for part in parts)]
        stacked = np.concatenate(rows, axis=1), np.concatenate(columns)
        return tuple(np.ascontiguousarray(part, dtype=dtype) for part in stacked)  # type: ignore[return-value]


@dataclass(frozen=True)
class Rows:
    """What the bounds say of some gearheads and every motor of a block."""

    by_motor: NDArray[
        np.int64
    ]  # failing pairs by each check that depends on the motor, in the order of the bounds
    by_gearhead: NDArray[np.int64]  # (N,) failing pairs that the gearhead alone governs
    #: pairs that pass, and those that fail by no more than was asked for
    gearhead: NDArray[np.int64]  # (K,)
    motor: NDArray[np.int64]  # (K,)
    worst: NDArray[np.float32]  # (K,) largest utilisation over allowed
    torque_peak: NDArray[np.float32]  # (K,) lower bound [N·m]
    mean_square: NDArray[np.float32]  # (K,) exact, of the cycles that repeat the largest [N²·m²]


class BoundsKernel:
    """The bounds of one block, ready to be worked out some gearheads at a time.

    Parameters
    ----------
    bounds : BlockBounds
        The bounds. [-]
    limit : float
        Utilisation over allowed beyond which a pair fails. [-]
    loops : callable, optional
        `bounds_of_rows`, compiled or not; default: compiled where the compiler is installed. [-]
    """

    def __init__(self, bounds: BlockBounds, limit: float, loops: Callable[..., int] | None = None):
        self._loops = loops or compiled_loops() or bounds_of_rows
        self._packed = Packed.of(bounds)
        self._limit: Any = np.float32(limit)
        motors = len(bounds.blocks[0].motors)
        size = max(motors, _MOST_FOUND)
        self._buffers = np.empty((7 + 2 * len(bounds.blocks), motors), dtype=np.float32)
        self._found = np.empty((size, 2), dtype=np.int64)
        self._values = np.empty((size, 3), dtype=np.float32)

    def work(self, first: int, end: int, bar: float) -> Rows:
        """Work out gearheads from `first` on, up to `end` or until there is no room for more pairs.

        Parameters
        ----------
        first, end : int
            Gearheads of the block. [-]
        bar : float
            How near a failing pair must be to be of interest. [-]

        Returns
        -------
        Rows
            At least one gearhead. [-]
        """
        p = self._packed
        near: Any = np.float32(bar)
        counts = np.zeros((end, len(p.scales) + 2), dtype=np.int64)
        done = self._loops(
            (p.rows, p.columns, p.single_rows, p.single_columns, p.vectors, p.forms),
            p.squares,
            p.peaks,
            p.repeats,
            p.ratios,
            p.scales,
            p.gearhead_worst[:end],
            first,
            self._limit,
            near,
            self._buffers,
            counts,
            self._found,
            self._values,
            TINY,
            RUNAWAY,
        )
        count = int(counts[first, -1])
        mine = counts[first : first + done]
        gearhead, motor = self._found[:count].T.copy()
        return Rows(mine[:, :-2].sum(axis=0), mine[:, -2], gearhead, motor, *self._values[:count].T.copy())
