"""The declarations of tables: consistent with themselves, with the units and with the motion laws."""

from __future__ import annotations

import math

import pytest

from actuator_sizing.case.check_names import CHECK_NAMES
from actuator_sizing.case.columns import Column, find, fold, nearest
from actuator_sizing.case.tables import LAW_WORDS, TABLES, axis_quantities, mechanism_quantities
from actuator_sizing.case.words import canonical_word, canonical_words
from actuator_sizing.core.mechanisms import MECHANISMS
from actuator_sizing.core.motion_laws import LAWS
from actuator_sizing.units import KINDS, parse_unit, to_si

EVERY_COLUMN = [
    pytest.param(column, id=f"{name}-{column.key}")
    for name, columns in (
        *((table.name, table.columns) for table in TABLES.values()),
        ("axis quantity", axis_quantities()),
    )
    for column in columns
]


@pytest.mark.parametrize("column", EVERY_COLUMN)
def test_kinds_are_known_and_help_is_there(column: Column):
    kinds = [column.kind] if isinstance(column.kind, str) else column.kind
    assert all(kind in KINDS or kind in ("text", "words", "yes/no") for kind in kinds)
    assert column.help
    assert (column.kind == "words") == bool(column.words)
    assert not (column.required and column.default is not None)


@pytest.mark.parametrize("column", EVERY_COLUMN)
@pytest.mark.parametrize("coordinate", ["linear", "rotary"])
def test_example_is_allowed_in_its_own_column(column: Column, coordinate: str):
    example = column.example_for(coordinate)
    if not example:
        return
    if column.kind == "words":
        assert canonical_words(example, column.words) if column.several else example in column.words
    elif column.is_number:
        unit = parse_unit(column.unit_for(coordinate), column.kind_for(coordinate))
        value = to_si(float(example), unit)
        assert column.minimum <= value <= column.maximum
        assert value > 0.0 or not column.positive


@pytest.mark.parametrize("column", EVERY_COLUMN)
def test_default_lies_within_the_bounds(column: Column):
    if isinstance(column.default, float):
        assert column.minimum <= column.default <= column.maximum
        assert column.assumed


@pytest.mark.parametrize("table", TABLES.values(), ids=list(TABLES))
def test_names_and_aliases_of_a_table_are_unique(table):
    spellings = [fold(name) for column in table.columns for name in (column.name, *column.aliases)]
    assert len(spellings) == len(set(spellings))
    for _, group in table.one_of:
        assert all(table.find(name) for name in group)


def test_motion_laws_are_the_ones_that_can_be_planned():
    assert set(LAW_WORDS) == set(LAWS)


def test_checks_are_named_once():
    keys, titles = zip(*CHECK_NAMES, strict=True)
    assert len(set(keys)) == len(set(titles)) == len(CHECK_NAMES)


@pytest.mark.parametrize("mechanism", MECHANISMS.values(), ids=list(MECHANISMS))
def test_mechanism_parameters_become_quantities_with_the_same_bounds(mechanism):
    columns = {column.name: column for column in mechanism_quantities(mechanism)}
    for parameter in mechanism.parameters:
        column = columns[parameter.name]
        assert (column.kind, column.minimum, column.maximum) == (
            parameter.kind,
            parameter.minimum,
            parameter.maximum,
        )
        assert column.required == (parameter.default is None and not parameter.optional)


@pytest.mark.parametrize(
    "spelling",
    [
        "rotor inertia",
        "Rotor Inertia",
        "ROTOR_INERTIA",
        "rotor-inertia",
        " rotor   inertia ",
        "rotor–inertia",
    ],
)
def test_harmless_spellings_of_a_heading_are_accepted(spelling):
    assert TABLES["motors"].find(spelling).key == "rotor_inertia"


def test_near_miss_names_the_column_that_was_meant():
    assert TABLES["motors"].nearest("rotor inertai") == "rotor inertia"
    assert TABLES["motors"].nearest("colour of the box") is None
    assert nearest("x" * 100_000, ["mass"]) is None


def test_alias_means_the_same_column():
    assert find("motor time constant", TABLES["motors"].columns).key == "housing_time_constant"


@pytest.mark.parametrize(
    ("text", "words", "meant"),
    [
        ("RMS", ("DC", "rms", "peak"), "rms"),
        ("A rms", ("DC", "rms", "peak"), "rms"),
        ("Apk", ("DC", "rms", "peak"), "peak"),
        ("block", ("brushed", "six-step", "sinusoidal"), "six-step"),
        ("Six Step", ("brushed", "six-step", "sinusoidal"), "six-step"),
        ("3-4-5 Polynomial", LAW_WORDS, "3-4-5 polynomial"),
        ("true", ("yes", "no"), "yes"),
        ("stepper", ("brushed", "six-step", "sinusoidal"), None),
    ],
)
def test_words_in_spellings_that_mean_the_same(text, words, meant):
    assert canonical_word(text, words) == meant


def test_lists_of_words():
    words = ("brushed", "six-step", "sinusoidal")
    assert canonical_words("sinusoidal/brushed", words) == "brushed, sinusoidal"
    assert canonical_words("six-step, block", words) == "six-step"
    assert canonical_words("six-step, stepper", words) is None
    assert canonical_words(" , ", words) is None


def test_allowed_text_shows_bounds_with_their_unit():
    column = Column("x", "length", "", minimum=0.0, maximum=2.0)
    assert column.allowed() == "a number from 0 m to 2 m"
    assert Column("x", "count", "", minimum=1.0).allowed() == "a whole number ≥ 1"
    assert Column("x", "torque", "", positive=True, maximum=math.inf).allowed() == "a number > 0"
    assert Column("x", "yes/no", "").allowed() == "yes or no"
