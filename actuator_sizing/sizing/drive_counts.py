"""How many drives a pair of motor and gearhead passes, and which check rejects it by the others, without asking each.

A drive passes a pair by two thresholds, peak and continuous current. How many drives have both of them high enough
is read off a table over the ranks of the two, so that a hundred drives cost hardly more than one.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.sizing.drive_side import DriveSide

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

_LARGEST_TABLE = 1024  # drives in one table of ranks: 4 MB


class _BothBelow:
    """Counts of items whose two thresholds both lie below two values."""

    def __init__(self, first: FloatArray, second: FloatArray):
        self._groups = [
            self._group(first[start : start + _LARGEST_TABLE], second[start : start + _LARGEST_TABLE])
            for start in range(0, len(first), _LARGEST_TABLE)
        ]

    @staticmethod
    def _group(first: FloatArray, second: FloatArray) -> tuple[FloatArray, FloatArray, NDArray[np.int32]]:
        ordered, other = np.sort(first), np.sort(second)
        count = len(first)
        table = np.zeros((count + 1, count + 1), dtype=np.int32)
        rank = np.argsort(np.argsort(first, kind="stable"), kind="stable")
        other_rank = np.argsort(np.argsort(second, kind="stable"), kind="stable")
        table[rank + 1, other_rank + 1] = 1
        return ordered, other, table.cumsum(axis=0, dtype=np.int32).cumsum(axis=1, dtype=np.int32)

    def count(self, x: FloatArray, y: FloatArray) -> tuple[IntArray, IntArray, IntArray]:
        """For each value how many lie below: in both thresholds, in the first, in the second; each (K,)."""
        both, first, second = (np.zeros(len(x), dtype=np.int64) for _ in range(3))
        for ordered, other, table in self._groups:
            a, b = np.searchsorted(ordered, x), np.searchsorted(other, y)
            both += table[a, b]
            first += a
            second += b
        return both, first, second


@dataclass(frozen=True)
class DriveCounts:
    """What D drives say to K pairs."""

    passing: IntArray  # (K,) drives that the pair passes
    rejected: tuple[int, int, int]  # sets by bus voltage range, continuous current, peak current
    nearly: NDArray[np.bool_]  # (K,) whether a drive rejects the pair by no more than `bar`


class DriveRanks:
    """D drives sorted by what they can carry, of one screening and one kind of commutation.

    Parameters
    ----------
    side : DriveSide
        Limits of all drives. [-]
    drives : ndarray of int, shape (D,)
        Which of them. [-]
    limit : float
        Utilisation over allowed beyond which a set is rejected. [-]
    """

    def __init__(self, side: DriveSide, drives: NDArray[np.intp], limit: float):
        self._limit = limit
        peak = (side.peak * side.peak_allowed)[drives]
        continuous = (side.continuous * side.continuous_allowed)[drives]
        with np.errstate(invalid="ignore"):
            slope = np.nan_to_num(peak / continuous, nan=np.inf, posinf=np.inf)
        bus = side.bus[drives]
        fits = bus <= limit
        self._fitting, self._alien = int(fits.sum()), int((~fits).sum())
        self._nearest_alien = float(bus[~fits].min(initial=np.inf))
        self._both = _BothBelow(peak[fits] * limit, continuous[fits] * limit)
        self._by_peak = _BothBelow(peak[fits] * limit, slope[fits])
        # Drives that the bus rejects whatever the current: the current still governs where it is further beyond.
        self._alien_peak = _BothBelow(peak[~fits] * bus[~fits], slope[~fits])
        self._alien_continuous = _BothBelow(continuous[~fits] * bus[~fits], slope[~fits])

    def count(self, peak_a: FloatArray, rms_a: FloatArray, bar: float) -> DriveCounts:
        """Count for K pairs, which of them the drives pass and why not.

        Parameters
        ----------
        peak_a, rms_a : ndarray, shape (K,)
            Lower bounds of largest and RMS motor current, as amplitudes. [A]
        bar : float
            How near a rejected set must be to be of interest. [-]

        Returns
        -------
        DriveCounts
            The same as by `DriveSide.utilisations` of every set. [-]
        """
        with np.errstate(over="ignore"):  # a pair without mean current, as in a cycle that runs once
            slope = peak_a / np.maximum(rms_a, np.finfo(float).tiny)
        rejected = self._rejected(peak_a, rms_a)
        by_peak = int(self._by_peak.count(peak_a, slope)[0].sum())
        by_continuous = int(rejected.sum()) - by_peak
        by_bus = 0
        nearly = rejected > self._rejected(peak_a * (self._limit / bar), rms_a * (self._limit / bar))
        if self._alien:
            peak = int(self._alien_peak.count(peak_a, slope)[0].sum())
            both, beyond, _ = self._alien_continuous.count(rms_a, slope)
            continuous = int((beyond - both).sum())
            by_bus = self._alien * len(peak_a) - peak - continuous
            by_peak += peak
            by_continuous += continuous
            nearly |= self._nearest_alien <= bar
        return DriveCounts(self._fitting - rejected, (by_bus, by_continuous, by_peak), nearly)

    def _rejected(self, peak_a: FloatArray, rms_a: FloatArray) -> IntArray:
        both, peak, continuous = self._both.count(peak_a, rms_a)
        return peak + continuous - both
