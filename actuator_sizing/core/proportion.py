"""How well a share of samples is known: confidence interval of a proportion."""

from __future__ import annotations

import math

#: Two-sided 95 % of a standard normal distribution.
SCORE_95 = 1.959963984540054


def wilson_interval(successes: int, count: int, score: float = SCORE_95) -> tuple[float, float]:
    """Confidence interval of a proportion from independent trials.

    Parameters
    ----------
    successes : int
        Trials that succeeded. [-]
    count : int
        Trials, at least one. [-]
    score : float
        Standard normal score of the two-sided confidence, 1.96 for 95 %. [-]

    Returns
    -------
    low, high : float
        Interval within 0 to 1; never empty, also where every trial succeeded. [-]

    Notes
    -----
    Score interval of E. B. Wilson, Journal of the American Statistical Association 22 (1927) 209–212 (from
    memory): the proportions p whose own standard error ``√(p (1 − p)/n)`` reaches the one that was found.

    Examples
    --------
    >>> wilson_interval(9, 10)
    (0.5958, 0.9821)
    """
    p, z2 = successes / count, score * score
    middle = (p + z2 / (2.0 * count)) / (1.0 + z2 / count)
    half = score / (1.0 + z2 / count) * math.sqrt(p * (1.0 - p) / count + z2 / (4.0 * count * count))
    # At the ends the formula is exact, but its rounding is not.
    low = 0.0 if successes == 0 else max(middle - half, 0.0)
    high = 1.0 if successes == count else min(middle + half, 1.0)
    return low, high
