"""Distributions of one input, against scipy.stats and closed forms."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from actuator_sizing.core.distributions import Distribution, is_possible, mixing_matrix, smallest_eigenvalue

REFERENCE = {
    "normal": lambda c, w, k: stats.norm(c, w),
    "uniform": lambda c, w, k: stats.uniform(c - w, 2 * w),
    "triangular": lambda c, w, k: stats.triang(0.5, c - w, 2 * w),
    "truncated normal": lambda c, w, k: stats.truncnorm(-k, k, c, w),
}


@pytest.mark.parametrize("shape", REFERENCE)
@pytest.mark.parametrize("truncation", [0.7, 2.0, 4.0])
def test_against_scipy(shape, truncation):
    mine = Distribution(shape, 7.0, 0.4, truncation)
    theirs = REFERENCE[shape](7.0, 0.4, truncation)
    scores = np.linspace(-5.0, 5.0, 101)
    # 1e-9: scipy's own inverse of the truncated normal in the tails.
    np.testing.assert_allclose(mine.of_scores(scores), theirs.ppf(stats.norm.cdf(scores)), rtol=1e-9)
    assert mine.standard_deviation == pytest.approx(theirs.std(), rel=1e-9)
    assert mine.bounds == pytest.approx(theirs.support())


@given(
    shape=st.sampled_from(sorted(REFERENCE)),
    scores=st.lists(st.floats(-8.0, 8.0), min_size=2, max_size=20),
    width=st.floats(1e-6, 1e3),
)
def test_symmetric_rising_and_within_bounds(shape, scores, width):
    drawn = Distribution(shape, 0.0, width)
    z = np.sort(np.array(scores))
    values = drawn.of_scores(z)
    low, high = drawn.bounds
    slack = 1e-9 * width
    assert np.all(np.diff(values) >= -slack)
    assert np.all((values >= low - slack) & (values <= high + slack))
    np.testing.assert_allclose(drawn.of_scores(-z), -values, atol=slack)


def test_mixing_gives_the_correlation_back():
    wanted = np.array([[1.0, 0.8, 1.0], [0.8, 1.0, 0.8], [1.0, 0.8, 1.0]])  # first and last move as one
    L = mixing_matrix(wanted)
    np.testing.assert_allclose(L @ L.T, wanted, atol=1e-12)
    np.testing.assert_allclose(mixing_matrix(np.eye(4)), np.eye(4), atol=1e-15)


def test_which_matrices_are_possible():
    assert is_possible(np.ones((3, 3)))
    chain = np.array([[1.0, 0.9, 0.0], [0.9, 1.0, 0.9], [0.0, 0.9, 1.0]])
    assert not is_possible(chain)
    assert smallest_eigenvalue(chain) == pytest.approx(1.0 - 0.9 * np.sqrt(2.0))
