"""Numbers of the report: rounding, missing values, units of the trade."""

import math

import pytest

from actuator_sizing.report.formatting import compared, display_unit, number, percent, quantity


@pytest.mark.parametrize(
    ("value", "limit", "text"),
    [
        (0.873, 1.0, "87.3 %"),
        (1.0, 1.0, "100.0 %"),
        (1.0004, 1.0, "100.04 %"),
        (1.0 + 1e-12, 1.0, ">100.0 %"),
        (1.0 - 1e-12, 1.0, "<100.0 %"),
        (0.85 + 1e-9, 0.85, ">85.0 %"),
        (0.0, 0.0, "0.0 %"),
        (-0.0004, 0.0, "-0.04 %"),
        (-1e-9, 0.0, "<0.0 %"),
        (25.0, 1.0, "2500 %"),
        (math.inf, 1.0, "infinite"),
        (math.nan, 1.0, "not known"),
        (None, 1.0, "not known"),
    ],
)
def test_percent(value, limit, text):
    assert percent(value, limit) == text


@pytest.mark.parametrize(
    ("value", "digits", "text"),
    [
        (0.0, 4, "0"),
        (-0.0, 4, "0"),
        (1.0, 4, "1"),
        (999.96, 4, "1000"),
        (123456.7, 4, "123457"),
        (1.5e-7, 3, "1.50e-07"),
        (-2.5, 4, "-2.5"),
        (None, 4, "not known"),
    ],
)
def test_number(value, digits, text):
    assert number(value, digits) == text


def test_a_pair_that_would_round_to_the_same_text_gets_more_digits():
    assert compared(10.0004, 10.0) == ("10.0004", "10")
    assert compared(5.0, 5.0) == ("5", "5")


@pytest.mark.parametrize(
    ("value", "label", "text"),
    [
        (0.25, "N·m", "250 mN·m"),
        (2.5, "N·m", "2.5 N·m"),
        (100.0 * math.pi, "rad/s", "3000 1/min"),
        (5.0e-5, "kg·m²", "0.5 kg·cm²"),
        (0.0015, "s", "1.5 ms"),
        (155.0, "°C", "155 °C"),
        (0.00393, "1/K", "0.393 %/K"),
        (0.6, "-", "0.6"),
        (None, "A", "not known"),
        (3.0, "A", "3 A"),
    ],
)
def test_quantity(value, label, text):
    assert quantity(value, label) == text


def test_the_larger_of_two_values_decides_the_unit_of_both():
    assert display_unit("N·m", (0.01, 3.0)).label == "N·m"
    assert display_unit("N·m", (0.01, None, math.nan)).label == "mN·m"
