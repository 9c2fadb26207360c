"""What the screening keeps of the many sets that it sees: the best, and why the others lost."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


class Pool:
    """The best `keep` rows by key, then by index, whatever number is added and in whatever order."""

    def __init__(self, keep: int):
        self.keep = keep
        self.rows: list[NDArray[np.intp]] = []
        self.keys: list[FloatArray] = []
        self.size = 0
        self.bar = np.inf  # no worse key can get in any more

    def add(self, rows: NDArray[np.intp], keys: FloatArray | NDArray[np.float32]) -> None:
        """Offer rows."""
        good = keys <= self.bar
        self.rows.append(rows[good])
        self.keys.append(keys[good].astype(float))
        self.size += int(good.sum())
        if self.size > 4 * self.keep:
            rows, keys = self._best()
            self.rows, self.keys, self.size, self.bar = [rows], [keys], len(keys), keys[-1]

    def _best(self) -> tuple[NDArray[np.intp], FloatArray]:
        rows, keys = np.concatenate(self.rows), np.concatenate(self.keys)
        if len(keys) > self.keep:
            good = keys <= np.partition(keys, self.keep - 1)[self.keep - 1]
            rows, keys = rows[good], keys[good]
        # Ties fall back on the index, so that the answer does not depend on the block size.
        order = np.lexsort((*rows.T[::-1], keys))[: self.keep]
        return rows[order], keys[order]

    def sorted(self, width: int) -> NDArray[np.intp]:
        """The rows, best first."""
        return self._best()[0] if self.rows else np.empty((0, width), dtype=np.intp)


class Losses:
    """Counts of rejected sets by check and, for catalogs of a size to list, the sets themselves."""

    def __init__(self, names: tuple[str, ...], *, listed: bool):
        self.names = names
        self.counts = np.zeros(len(names), dtype=np.int64)
        self.listed = listed
        self.rows: list[NDArray[np.intp]] = []
        self.checks: list[NDArray[np.intp]] = []
        self.bounds: list[FloatArray] = []

    def keep(self, rows: NDArray[np.intp], check: NDArray[np.intp], bound: FloatArray) -> None:
        """List the sets themselves."""
        if self.listed:
            self.rows.append(rows)
            self.checks.append(check)
            self.bounds.append(bound)

    def table(self) -> tuple[NDArray[np.intp], NDArray[np.intp], FloatArray]:
        """All listed sets."""
        if not self.rows:
            return np.empty((0, 3), dtype=np.intp), np.empty(0, dtype=np.intp), np.empty(0)
        return np.concatenate(self.rows), np.concatenate(self.checks), np.concatenate(self.bounds)
