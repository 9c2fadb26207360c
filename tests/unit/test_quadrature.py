"""Quadrature, extrema and sign splits on pieces, against closed forms."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from actuator_sizing.core.quadrature import (
    NODES,
    differentiation_matrix,
    integrate,
    largest,
    largest_magnitude,
    lobatto,
    roots,
    signed_integrals,
)

X, W = lobatto()


def test_weights_integrate_polynomials_up_to_twice_the_nodes_less_three():
    for degree in range(2 * NODES - 2):
        exact = 2.0 / (degree + 1) if degree % 2 == 0 else 0.0
        # Rounding of sixteen terms of size one.
        assert np.dot(W, X**degree) == pytest.approx(exact, abs=1e-14)


def test_half_a_sine_period_is_differentiated_to_rounding_of_the_nodes():
    f = np.sin(0.5 * np.pi * X)
    exact = 0.5 * np.pi * np.cos(0.5 * np.pi * X)
    # Differentiation amplifies rounding by about the square of the node count.
    np.testing.assert_allclose(differentiation_matrix() @ f, exact, atol=NODES**2 * 1e-15)


def test_two_close_roots_are_both_found():
    np.testing.assert_allclose(roots((X - 0.301) * (X - 0.304)), [0.301, 0.304], atol=1e-9)


def test_a_touching_root_is_no_sign_change():
    assert len(roots((X - 0.25) ** 2)) == 0


def test_roots_at_the_border_are_left_out():
    assert len(roots((X + 1.0) ** 2 * (X - 1.0) ** 2)) == 0


@given(st.floats(-0.95, 0.95), st.floats(0.1, 10.0))
def test_the_peak_of_a_parabola_is_found_between_the_nodes(at, height):
    values = (height - (X - at) ** 2)[None, None]
    maximum, piece, position = largest(values)
    # Newton on an exact parabola: rounding only.
    assert maximum[0] == pytest.approx(height, rel=1e-13, abs=1e-13)
    assert piece[0] == 0
    assert position[0] == pytest.approx(at, abs=1e-6)


def test_magnitude_sees_the_negative_side_across_a_sign_change():
    values = np.stack([0.5 * X, -1.5 + (X - 0.2) ** 2])[None]
    maximum, piece, _ = largest_magnitude(values)
    assert maximum[0] == pytest.approx(1.5, rel=1e-12)
    assert piece[0] == 1


@given(st.lists(st.floats(-3.0, 3.0), min_size=1, max_size=6), st.floats(0.01, 100.0))
def test_positive_and_negative_parts_add_up(coefficients, duration):
    values = np.polynomial.polynomial.polyval(X, coefficients)[None, None]
    positive, negative = signed_integrals(np.array([duration]), values)
    total = integrate(np.array([duration]), values)
    scale = duration * (1.0 + np.abs(values).max())
    assert positive[0] - negative[0] == pytest.approx(float(total[0]), abs=1e-12 * scale)
    assert positive[0] >= -1e-12 * scale
    assert negative[0] >= -1e-12 * scale


def test_sign_split_of_a_sine_with_three_crossings():
    f = np.sin(1.5 * np.pi * X)  # crossings at -2/3, 0, 2/3; positive on (-1, -2/3) and (0, 2/3)
    positive, negative = signed_integrals(np.array([2.0]), f[None, None])
    loop = 2.0 / (1.5 * np.pi)  # area of one half wave
    # Sixteen nodes interpolate one and a half periods to about 1e-7.
    assert positive[0] == pytest.approx(1.5 * loop, abs=1e-6)
    assert negative[0] == pytest.approx(1.5 * loop, abs=1e-6)


def test_straight_pieces_peak_at_an_end():
    values = np.random.default_rng(3).normal(size=(7, 40, 2))
    values[2] = 0.25  # constant: any place will do
    maximum, piece, position = largest(values)
    np.testing.assert_array_equal(maximum, values.max(axis=(1, 2)))
    there = 0.5 * (
        values[np.arange(7), piece, 0] * (1 - position) + values[np.arange(7), piece, 1] * (1 + position)
    )
    np.testing.assert_array_equal(there, maximum)
