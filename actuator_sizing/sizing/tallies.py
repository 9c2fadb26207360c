"""What the screening keeps of the many sets that it sees: the best, and why the others lost."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]


class Pool:
    """The best `keep` rows by key, then by index, whatever number is added and in whatever order."""

    def __init__(self, keep: int, width: int, bar: float = np.inf):
        self.keep = keep
        self.bar = bar  # no worse key can get in any more
        self._rows: list[IndexArray] = [np.empty((0, width), dtype=np.intp)]
        self._keys: list[FloatArray] = [np.empty(0)]
        self._size = 0

    def add(self, rows: IndexArray, keys: FloatArray | NDArray[np.float32]) -> None:
        """Offer rows."""
        good = keys <= self.bar
        self._rows.append(rows[good])
        self._keys.append(keys[good].astype(float))
        self._size += int(good.sum())
        if self._size > 4 * self.keep:
            self._trim()

    def _trim(self) -> None:
        """Let go what cannot be among the best; what ties with the last of them stays as long as it is not much."""
        rows, keys = self._gathered()
        if len(keys) > 2 * self.keep:
            rows, keys = self.best()
        self._rows, self._keys, self._size, self.bar = [rows], [keys], len(keys), float(keys.max())

    def _gathered(self) -> tuple[IndexArray, FloatArray]:
        """The best in no order, with those that tie with the last of them."""
        rows, keys = np.concatenate(self._rows), np.concatenate(self._keys)
        if len(keys) > self.keep:
            good = keys <= np.partition(keys, self.keep - 1)[self.keep - 1]
            rows, keys = rows[good], keys[good]
        return rows, keys

    def extend(self, other: Pool) -> None:
        """Offer what another pool holds."""
        self.add(*other._gathered())

    def best(self) -> tuple[IndexArray, FloatArray]:
        """The rows, best first, and their keys."""
        rows, keys = self._gathered()
        # Ties fall back on the index, so that the answer does not depend on the block size.
        order = np.lexsort((*rows.T[::-1], keys))[: self.keep]
        return rows[order], keys[order]

    def __getstate__(self) -> dict[str, object]:
        """What travels between processes: the best alone."""
        rows, keys = self.best()
        return {"keep": self.keep, "bar": self.bar, "_rows": [rows], "_keys": [keys], "_size": len(keys)}


class Losses:
    """Counts of rejected sets by check and, for catalogs of a size to list, the sets themselves."""

    def __init__(self, names: tuple[str, ...], *, listed: bool):
        self.names = names
        self.counts = np.zeros(len(names), dtype=np.int64)
        self.listed = listed
        self._rows: list[IndexArray] = [np.empty((0, 3), dtype=np.intp)]
        self._checks: list[IndexArray] = [np.empty(0, dtype=np.intp)]
        self._bounds: list[FloatArray] = [np.empty(0)]

    def keep(self, rows: IndexArray, check: IndexArray, bound: FloatArray) -> None:
        """List the sets themselves."""
        if self.listed:
            self._rows.append(rows)
            self._checks.append(check)
            self._bounds.append(bound)

    def extend(self, other: Losses) -> None:
        """Add what another part of the work counted and listed."""
        self.counts += other.counts
        self.keep(*other.table())

    def table(self) -> tuple[IndexArray, IndexArray, FloatArray]:
        """All listed sets, the check that governs each, and its bound over allowed."""
        return np.concatenate(self._rows), np.concatenate(self._checks), np.concatenate(self._bounds)
