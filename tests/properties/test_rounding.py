"""A rounded number lies on the same side of its limit as the true one, whatever the numbers are."""

import math

from hypothesis import given
from hypothesis import strategies as st

from actuator_sizing.report.formatting import compared, number, percent

ratios = st.floats(min_value=-1e3, max_value=1e3, allow_nan=False)
limits = st.sampled_from([0.0, 0.5, 0.8, 0.85, 0.9, 1.0, 1.2, 2.0])
near = st.floats(min_value=-1e-3, max_value=1e-3)
numbers = st.floats(min_value=-1e9, max_value=1e9, allow_nan=False)
positive = st.floats(min_value=1e-9, max_value=1e9, allow_nan=False)


def side_of(text: str, limit: float) -> int:
    """-1, 0 or 1: where a reader would say that the printed text lies against the limit."""
    if text[0] in "<>":
        return 1 if text[0] == ">" else -1
    shown = float(text.removesuffix(" %"))
    return (shown > limit) - (shown < limit)


def true_side(value: float, limit: float) -> int:
    return (value > limit) - (value < limit)


@given(value=ratios, limit=limits)
def test_percent_keeps_its_side(value, limit):
    if value != limit and 100.0 * value != 100.0 * limit:
        assert side_of(percent(value, limit), 100.0 * limit) == true_side(value, limit)


@given(offset=near, limit=limits)
def test_percent_keeps_its_side_next_to_the_limit(offset, limit):
    value = limit + offset
    if 100.0 * value != 100.0 * limit:
        assert side_of(percent(value, limit), 100.0 * limit) == true_side(value, limit)


@given(value=numbers, limit=numbers, digits=st.integers(min_value=2, max_value=6))
def test_number_keeps_its_side(value, limit, digits):
    if value != limit:
        text = number(value, digits, limit=limit)
        shown_limit = float(number(limit, digits))
        assert side_of(text, limit) == true_side(value, limit)
        assert text[0] in "<>" or side_of(text, shown_limit) in (0, true_side(value, limit))


@given(demand=positive, relative=st.floats(min_value=-1e-3, max_value=1e-3))
def test_demand_and_capacity_are_ordered_as_they_are(demand, relative):
    capacity = demand * (1.0 + relative)
    shown_demand, shown_capacity = compared(demand, capacity)
    expected = true_side(demand, capacity)
    if shown_demand[0] in "<>":
        assert (1 if shown_demand[0] == ">" else -1) == expected
    else:
        assert true_side(float(shown_demand), float(shown_capacity)) == expected


@given(value=ratios)
def test_percent_is_close_to_the_value(value):
    text = percent(value)
    if text[0] not in "<>":
        # half of the first decimal that is printed
        assert math.isclose(float(text.removesuffix(" %")), 100.0 * value, abs_tol=0.5000001)
