"""Numbers as people type them."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from actuator_sizing.case.cells import CellError, evidence, is_missing, parse_number
from actuator_sizing.case.text_columns import BLOCK_ROWS, RowRules, TextColumn


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("18", 18.0),
        (" 18.50 ", 18.5),
        ("+.5", 0.5),
        ("1.", 1.0),
        ("1e-3", 1e-3),
        ("1,5", 1.5),
        ("1,5e-3", 1.5e-3),
        ("0,500", 0.5),
        (",25", 0.25),
        ("\u22122.5", -2.5),  # minus sign
        ("\u20132.5", -2.5),  # en dash
        ("- 2.5", -2.5),
        ("3 000", 3000.0),
        ("3\u00a0000", 3000.0),  # no-break space
        ("3\u2009000,5", 3000.5),  # thin space
        ("12\u202f345\u202f678", 12345678.0),  # narrow no-break space
        ("1'234.5", 1234.5),
        ("1\u2019234", 1234.0),
        ("1,234.5", 1234.5),
        ("1.234,5", 1234.5),
        ("1,234,567", 1234567.0),
        ("1.234.567", 1234567.0),
        ("1.234", 1.234),
        ("\ufeff7", 7.0),
    ],
)
def test_spellings_that_can_be_read_in_one_way(text, value):
    assert parse_number(text) == (pytest.approx(value, rel=1e-15), False)


@pytest.mark.parametrize(
    ("text", "decimal", "value", "grouped"),
    [
        ("1,234", ",", 1.234, False),
        ("1,234", ".", 1234.0, True),
        ("1.234", ",", 1234.0, True),
        ("1.234", ".", 1.234, False),
        ("12.50", ",", 12.5, False),
    ],
)
def test_the_table_decides_what_a_lone_separator_means(text, decimal, value, grouped):
    assert parse_number(text, decimal) == (pytest.approx(value, rel=1e-15), grouped)


def test_a_lone_comma_before_three_digits_is_never_guessed():
    with pytest.raises(CellError) as caught:
        parse_number("1,234")
    assert caught.value.allowed == "a number that can be read in one way only"
    assert "1.234 or 1234" in caught.value.remedy


@pytest.mark.parametrize(("text", "value"), [("91/6", 91 / 6), ("91 : 6", 91 / 6), ("5", 5.0), ("3.5", 3.5)])
def test_exact_fractions_of_a_ratio(text, value):
    assert parse_number(text, fraction=True)[0] == value


def test_fraction_elsewhere_and_division_by_zero_are_refused():
    for text, fraction in (("91/6", False), ("91/0", True)):
        with pytest.raises(CellError):
            parse_number(text, fraction=fraction)


@pytest.mark.parametrize(
    ("text", "remedy"),
    [
        ("10...30", "safe side"),
        ("10…30", "safe side"),
        ("10 to 30", "safe side"),
        ("10-30", "safe side"),
        ("10 – 30", "safe side"),
        ("≥ 5", "the one number"),
        (">5", "the one number"),
        ("~5", "the one number"),
        ("±5", "the one number"),
        ("max. 5", "the one number"),
        ("5 Nm", "'Nm' belongs in the heading"),
        ("5Nm", "'Nm' belongs in the heading"),
        ("95 %", "Leave the % sign out"),
        ("inf", "Leave the cell empty"),
        ("-Infinity", "Leave the cell empty"),
        ("NaN", "Leave the cell empty"),
        ("#DIV/0!", "formula failed"),
        ("#VALUE!", "formula failed"),
        ("=1+1", "type the number"),
        ("<script>", "the one number"),
        ("../x", "Write a number"),
        ("1e999", "finite"),
        ("1_000", "Write a number"),
        ("1..5", ""),
        ("1,2,3", ""),
        ("0x10", ""),
        ("abc", "Write a number"),
        ("1,23,456", ""),
        ("9" * 10_000 + "x", ""),
    ],
)
def test_cells_that_are_no_number_say_what_to_do(text, remedy):
    with pytest.raises(CellError) as caught:
        parse_number(text)
    assert remedy in caught.value.remedy
    assert caught.value.allowed


@pytest.mark.parametrize("text", ["", "-", "–", "n/a", "N/A", "n.a.", "?", "tbd", "none"])
def test_words_for_not_known(text):
    assert is_missing(text)


@pytest.mark.parametrize("text", ["0", "-1", "#N/A", "n", "x"])
def test_what_is_not_missing(text):
    assert not is_missing(text)


@pytest.mark.parametrize(
    ("text", "mark"), [("1,5", ","), ("0,500", ","), ("1.25", "."), ("1,500", ""), ("5", ""), ("a,5", "")]
)
def test_what_a_cell_proves_about_the_decimal_mark(text, mark):
    assert evidence(text) == mark


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_every_float_is_read_back_exactly(value):
    # repr is the shortest text that gives the same float; no tolerance.
    assert parse_number(repr(value), ".")[0] == value


@given(st.floats(min_value=-1e12, max_value=1e12))
def test_point_and_comma_give_the_same_number(value):
    text = f"{value:.2f}"
    assert parse_number(text)[0] == parse_number(text.replace(".", ","))[0]


@given(st.text(max_size=40))
def test_any_text_is_a_finite_number_or_a_cell_error(text):
    try:
        outcome = parse_number(text)[0]
    except CellError:
        outcome = 0.0
    assert math.isfinite(outcome)


@given(st.lists(st.text(), max_size=30))
def test_packed_text_reads_like_a_list(cells):
    column = TextColumn(cells)
    assert len(column) == len(cells)
    assert list(column) == [cell.replace("\x1f", " ") for cell in cells]
    assert column[:] == list(column)


def test_packed_text_across_blocks_and_out_of_range():
    cells = [str(i) for i in range(2 * BLOCK_ROWS + 3)]
    column = TextColumn(cells)
    assert [column[i] for i in (0, BLOCK_ROWS - 1, BLOCK_ROWS, -1)] == [
        "0",
        str(BLOCK_ROWS - 1),
        str(BLOCK_ROWS),
        cells[-1],
    ]
    with pytest.raises(IndexError):
        column[len(cells)]


def test_rules_are_a_mapping_from_rows_to_words():
    import numpy as np

    rules = RowRules(4)
    rules.set(np.array([True, False, True, False]), "a")
    rules.set(np.array([False, False, True, True]), "b")
    assert dict(rules) == {0: "a", 2: "b", 3: "b"}
    assert rules.get(1) is None
    assert len(rules) == 3
