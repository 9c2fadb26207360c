"""The summary on a terminal: one line a set, whatever the width."""

import pytest

from actuator_sizing.console import fit_columns

ROWS = [
    ["#", "motor", "gearhead", "ratio", "drive", "price", "governing check", "utilisation", "verdict"],
    ["1", "sine-100m-325s", "planet-60-3", "3", "feed-325-3rms", "774", "Drive continuous current", "98.1 %",
     "passes, low reserve"],
]  # fmt: skip


def test_what_has_room_stays():
    kept, rows = fit_columns(ROWS, 200)
    assert kept == list(range(9))
    assert rows == ROWS


@pytest.mark.parametrize("room", [132, 100, 80])
def test_a_row_takes_one_line(room):
    kept, rows = fit_columns(ROWS, room)
    assert sum(max(map(len, column)) + 2 for column in zip(*rows, strict=True)) <= room
    assert {0, 1, 6, 7, 8} <= set(kept)
    assert rows[1][kept.index(7)] == "98.1 %"


def test_a_terminal_narrower_than_anything_still_gets_rows():
    _, rows = fit_columns(ROWS, 10)
    assert rows[1][1:3] == ["sine…25s", "plan…0-3"]
