"""The figure of the ratio windows: no best ratio is left out."""

from __future__ import annotations

from types import SimpleNamespace

from actuator_sizing.report.figures import house_style
from actuator_sizing.report.figures.ratio_windows import draw_ratio_windows
from actuator_sizing.sizing.ratio_results import MotorWindow


def row(index, best, intervals=()):
    return MotorWindow(f"M-{index}", index, intervals, best, 1.0, 1.0, 1.0, (), ())


def test_the_axis_reaches_every_best_ratio():
    window = SimpleNamespace(low=2.0, high=8.0, low_check="rms_current", high_check="motor_speed")
    rows = (row(0, 40.0, (window,)), row(1, 0.1), row(2, float("inf")), row(3, float("nan")))
    with house_style():
        figure = draw_ratio_windows(SimpleNamespace(motors=rows, catalog_ratios=(3.0,)))
    ax = figure.axes[0]
    low, high = ax.get_xlim()
    assert low < 0.1
    assert high > 40.0
    assert len([line for line in ax.lines if line.get_marker() == "D"]) == 2
