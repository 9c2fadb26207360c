"""What holds for every spelling, known or not."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from actuator_sizing.unit_kinds import GLUED, SYMBOLS
from actuator_sizing.units import KINDS, UnitError, from_si, parse_unit, to_si

ACCEPTED = [(kind.name, example) for kind in KINDS.values() for example in kind.examples]
PIECES = st.sampled_from(
    [
        *SYMBOLS,
        *GLUED,
        *"·*/^()²⁻¹-+.,√ 0123456789'\"%°",
        "rms",
        "peak",
        "l-l",
        "GD²",
        "WK2",
        "10^",
        "e9",
        "sqrt(",
    ]
)
values = st.floats(min_value=-1e12, max_value=1e12, allow_subnormal=False)


@given(st.sampled_from(ACCEPTED), values)
def test_there_and_back(accepted, value):
    kind, spelling = accepted
    unit = parse_unit(spelling, kind)
    back = from_si(to_si(value, unit), unit)
    # two roundings, relative to the larger of value and offset in that unit
    assert back == pytest.approx(value, rel=1e-14, abs=1e-13 * (abs(unit.offset / unit.factor) + 1e-300))


@given(st.text(max_size=80), st.sampled_from(sorted(KINDS)))
def test_any_text_is_read_or_refused(text, kind):
    _read_or_refuse(text, kind)


@given(st.lists(PIECES, max_size=10).map("".join), st.sampled_from(sorted(KINDS)))
def test_any_mixture_of_unit_pieces_is_read_or_refused(text, kind):
    _read_or_refuse(text, kind)


def _read_or_refuse(text, kind):
    try:
        unit = parse_unit(text, kind)
    except UnitError:
        return
    assert math.isfinite(unit.factor)
    assert unit.factor > 0.0
    assert unit.kind == kind


@given(st.sampled_from(KINDS["torque"].examples), st.sampled_from(["rad/s", "rpm", "krpm"]))
def test_factor_of_a_quotient_is_the_quotient_of_factors(torque, speed):
    per_speed = parse_unit(f"({torque})/({speed})", "rotary damping")
    expected = parse_unit(torque, "torque").factor / parse_unit(speed, "angular speed").factor
    assert per_speed.factor == pytest.approx(expected, rel=1e-14)  # a handful of products of doubles


@given(st.sampled_from(ACCEPTED), st.sampled_from(sorted(KINDS)))
def test_a_spelling_never_has_two_different_sizes(accepted, other):
    """The same text in two kinds has one size, except where the kind decides what the word means."""
    kind, spelling = accepted
    try:
        unit, read = parse_unit(spelling, kind), parse_unit(spelling, other)
    except UnitError:
        return
    decided_by_kind = any(word in spelling for word in ("lb", "oz", "g", "°F", "K")) or "price" in (
        kind,
        other,
    )
    if not decided_by_kind:
        assert read.factor == unit.factor
