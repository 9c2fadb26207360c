"""The figure of payload against cycle time: nothing of it is cut, and it speaks the user's unit."""

from __future__ import annotations

from actuator_sizing.report.figures import house_style
from actuator_sizing.report.figures.payload_map import draw_payload_map
from actuator_sizing.report.formatting import DisplayUnit
from actuator_sizing.sizing.headroom import MapRow, PayloadMap

POUND = DisplayUnit("lb", 0.45359237)


def made_map(last_passes):
    rows = [MapRow(0.0, 0.8, "voltage", None, ""), MapRow(9.0, 0.9, "speed_torque", None, "")]
    rows += [MapRow(18.0, 1.1 if last_passes else None, "gearhead_equivalent_torque", None, "")]
    return PayloadMap(tuple(rows), "kg", 9.0, 2.0, 8.0)


def test_the_key_and_the_marks_are_whole_and_the_axis_has_the_users_unit():
    with house_style():
        figure = draw_payload_map(made_map(True), POUND)
        figure.canvas.draw()
        ax = figure.axes[0]
        assert ax.get_legend().get_window_extent().x1 <= figure.bbox.x1
        assert ax.get_ylim()[1] > 18.0 / POUND.factor
        assert ax.get_ylabel() == "heaviest payload [lb]"


def test_a_flat_top_says_that_it_is_a_step_of_the_grid():
    with house_style():
        for last_passes, words in (
            (True, "heaviest that was tried, 18 kg"),
            (False, "last step that passes, 9 kg"),
        ):
            figure = draw_payload_map(made_map(last_passes))
            assert words in [text.get_text() for text in figure.axes[0].texts]
