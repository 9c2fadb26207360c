"""Estimators of sensitivity against functions whose indices are known in closed form."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import qmc

from actuator_sizing.core.proportion import wilson_interval
from actuator_sizing.core.sobol_indices import exchanged, sobol_indices

REPLICATES, ROWS = 8, 1024


def estimate(function, d, groups):
    """Indices of a function on the unit cube."""
    a, b, mixed = [], [], []
    for seed in range(REPLICATES):
        both = qmc.Sobol(2 * d, scramble=True, seed=np.random.default_rng(seed)).random(ROWS)
        a.append(both[:, :d])
        b.append(both[:, d:])
        mixed.append(exchanged(a[-1], b[-1], groups))
    return sobol_indices(function(np.array(a)), function(np.array(b)), function(np.array(mixed)))


def test_ishigami():
    """Ishigami & Homma (1990), a = 7, b = 0.1; the indices follow from its variance in closed form (D)."""
    a, b = 7.0, 0.1

    def function(u):
        x = np.pi * (2.0 * u - 1.0)
        return (np.sin(x[..., 0]) + a * np.sin(x[..., 1]) ** 2 + b * x[..., 2] ** 4 * np.sin(x[..., 0]))[
            ..., None
        ]

    v1 = 0.5 * (1.0 + b * np.pi**4 / 5.0) ** 2
    v2, v13 = a**2 / 8.0, b**2 * np.pi**8 * (1.0 / 18.0 - 1.0 / 50.0)
    variance = v1 + v2 + v13
    found = estimate(function, 3, ((0,), (1,), (2,)))
    first, total = np.array([v1, v2, 0.0]) / variance, np.array([v1 + v13, v2, v13]) / variance
    # Four standard errors as the estimator itself states them, and those errors are small enough to mean something.
    assert np.all(np.abs(found.first[0] - first) < 4.0 * found.first_error[0] + 1e-4)
    assert np.all(np.abs(found.total[0] - total) < 4.0 * found.total_error[0] + 1e-4)
    assert found.first_error.max() < 0.01
    assert found.total_error.max() < 0.01


def test_linear_function_and_groups():
    """Variances add: 1 : 4 : 9 over 14; a group has the sum of its members (D)."""
    weights = np.array([1.0, 2.0, 3.0])
    found = estimate(lambda u: (u @ weights)[..., None], 3, ((0,), (1, 2)))
    np.testing.assert_allclose(found.first[0], [1 / 14, 13 / 14], atol=4 * found.first_error.max())
    np.testing.assert_allclose(found.total[0], [1 / 14, 13 / 14], atol=4 * found.total_error.max())


def test_a_shift_changes_no_index():
    weights = np.array([1.0, 2.0])
    near, far = (
        estimate(lambda u, c=c: (u @ weights + c)[..., None], 2, ((0,), (1,))) for c in (0.0, 1000.0)
    )
    np.testing.assert_allclose(near.first, far.first, atol=1e-9)


def test_what_does_not_spread_has_no_index():
    found = estimate(lambda u: np.ones((*u.shape[:-1], 1)), 2, ((0,), (1,)))
    assert np.isnan(found.first).all()
    assert np.isnan(found.total).all()


@pytest.mark.parametrize(("successes", "count"), [(0, 10), (10, 10), (3, 7), (990, 1000)])
def test_wilson_ends_are_the_proportions_that_are_one_score_away(successes, count):
    """The definition of the interval: |p̂ − p| = z √(p (1 − p)/n) at both ends (D)."""
    z = 1.7
    for p in wilson_interval(successes, count, z):
        if 0.0 < p < 1.0:
            assert abs(successes / count - p) == pytest.approx(z * np.sqrt(p * (1.0 - p) / count))
    low, high = wilson_interval(successes, count, z)
    assert 0.0 <= low <= successes / count <= high <= 1.0
    assert high > low


def test_wilson_covers_as_often_as_it_says():
    """Exact coverage at p = 0.97, n = 400 by summing the binomial: within 2 % of the 95 % (Wilson's own scatter)."""
    from scipy.stats import binom

    n, p = 400, 0.97
    inside = [k for k in range(n + 1) if wilson_interval(k, n)[0] <= p <= wilson_interval(k, n)[1]]
    assert binom.pmf(inside, n, p).sum() == pytest.approx(0.95, abs=0.02)
