"""Figures: complete, deterministic, readable by machine, with what they must say at a glance."""

import dataclasses
import functools
import xml.etree.ElementTree as ElementTree

import numpy as np
import pytest
from report_demo import DEMO_CASES, demo_comparison
from report_fixture import build_comparison, build_hostile

from actuator_sizing.report.figures import FIGURES, _figures_of, draw, draw_figures, house_style
from actuator_sizing.report.figures.over_time import _CAUSES, _corners, draw_causes, draw_current
from actuator_sizing.report.figures.speed_torque import governing_row
from actuator_sizing.report.figures.style import _spread
from actuator_sizing.report.figures.temperature import draw_temperature
from actuator_sizing.report.figures.units import AxisUnits
from actuator_sizing.report.figures.utilisation import _FAILS_COLOR, _STEPS, draw_utilisation

KEYS = set(FIGURES) - {"cycles"}  # of a case with one cycle


@pytest.fixture(scope="module")
def comparison():
    return build_comparison()


@pytest.fixture(scope="module")
def drawn(comparison):
    return draw_figures(comparison)


def texts(svg: bytes) -> list[str]:
    root = ElementTree.fromstring(svg)
    return ["".join(node.itertext()).strip() for node in root.iter("{http://www.w3.org/2000/svg}text")]


def test_every_figure_is_drawn_and_is_xml(drawn):
    assert set(drawn) == KEYS
    for figure in drawn.values():
        assert ElementTree.fromstring(figure.svg).tag.endswith("svg")


def test_drawing_twice_gives_the_same_bytes(comparison, drawn):
    again = draw_figures(comparison)
    assert {key: figure.svg for key, figure in again.items()} == {key: f.svg for key, f in drawn.items()}


def test_ids_of_different_figures_never_meet(drawn):
    seen: set[str] = set()
    for figure in drawn.values():
        ids = {node.get("id") for node in ElementTree.fromstring(figure.svg).iter() if node.get("id")}
        assert not ids & seen
        seen |= ids


@pytest.mark.parametrize(
    ("key", "words"),
    [
        ("speed_torque", ["motor speed [1/min], positive with +x", "air-gap torque [N·m], positive drives +x",
                          "peak at minimum bus", "continuous region", "duty cycle", "motor speed limit"]),
        ("current", ["current [A rms]", "drive continuous 3 A", "motor peak 6.4 A", "lift"]),
        ("temperature", ["temperature [°C]", "winding limit 130 °C", "winding", "housing"]),
        ("torque_by_cause", ["load inertia", "rotor inertia", "gravity", "sum (air gap)"]),
        ("utilisation", ["inertia ratio (advice)", "? not checked", "governs", "fails"]),
    ],
)  # fmt: skip
def test_figures_say_what_they_show(drawn, key, words):
    said = texts(drawn[key].svg)
    assert [word for word in words if word not in said] == []


def test_causes_that_are_zero_are_left_out(drawn):
    assert "friction" not in texts(drawn["torque_by_cause"].svg)


def test_the_matrix_shows_the_fixture_s_utilisation(comparison, drawn):
    use = comparison.best.check("voltage").utilisation
    assert f"{100.0 * use:.1f}" in texts(drawn["utilisation"].svg)


def test_the_matrix_gets_darker_with_utilisation_also_in_grey():
    colors = [*(color for _, color in _STEPS), _FAILS_COLOR]
    grey = [
        np.dot([0.299, 0.587, 0.114], [int(c[i : i + 2], 16) for i in (1, 3, 5)]) for c in colors
    ]  # ITU-R BT.601
    assert np.all(np.diff(grey) < -10.0)  # told apart on paper: 4 % of the range between neighbours


def test_the_matrix_holds_what_a_page_can_carry(comparison):
    many = comparison.sets * 10
    with house_style():
        figure = draw_utilisation(many)
    assert figure.get_figheight() < 11.0  # A4 is 11.7 in high
    with house_style():
        assert draw_utilisation(()) is None


def test_the_governing_point_is_the_worst_value_at_that_instant(comparison):
    best = comparison.best
    time, segment, speed, torque = governing_row(best, best.detail)
    check = best.check("speed_torque")
    assert time == pytest.approx(check.at_time_s)
    assert abs(torque) == pytest.approx(check.demand)
    assert segment == check.segment


def test_a_limit_far_above_the_data_is_named_at_the_edge_and_does_not_flatten_the_curve(comparison):
    best = comparison.best
    levels = {**best.detail.levels, "drive_peak_current_a": 1.0e4}
    detail = dataclasses.replace(best.detail, levels=levels)
    with house_style():
        figure = draw_current(best, detail)
        axes = figure.axes[0]
        assert axes.get_ylim()[1] < 100.0
        assert any(text.get_text() == "↑ drive peak 10000 A" for text in axes.texts)


def test_no_equilibrium_is_said_and_missing_data_draws_nothing(comparison):
    detail = comparison.best.detail
    with house_style():
        runaway = draw_temperature(dataclasses.replace(detail, periodic_temperature=None))
        assert "no equilibrium" in runaway.axes[0].get_xlabel()
        assert draw_temperature(dataclasses.replace(detail, warm_up=None)) is None


def unseen_tick_labels(figure):
    """Labels of ticks beyond the range of their axis: matplotlib keeps them and does not draw them."""
    axes = [*figure.axes, *(child for ax in figure.axes for child in ax.child_axes)]
    for axis in (axis for ax in axes for axis in (ax.xaxis, ax.yaxis)):
        low, high = sorted(axis.get_view_interval())
        slack = 1e-9 * (high - low)
        for tick in axis.get_major_ticks() + axis.get_minor_ticks():
            if not low - slack <= tick.get_loc() <= high + slack:
                yield from (tick.label1, tick.label2)


def boxes(figure):
    """What every text of a figure covers, in pixels."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.text import Text

    canvas = FigureCanvasAgg(figure)
    canvas.draw()
    unseen = set(unseen_tick_labels(figure))
    found = [t for t in figure.findobj(Text) if t.get_text().strip() and t.get_visible() and t not in unseen]
    # findobj meets an artist once for each way to it
    return [(t.get_text(), t.get_window_extent(canvas.get_renderer())) for t in dict.fromkeys(found)]


@functools.cache
def drawn_figures(name):
    """Figures of a demo case or of the fixture with their texts, drawn once: key, figure, boxes."""
    comparison = build_comparison() if name == "fixture" else demo_comparison(name)
    with house_style():
        figures = [(key, draw()) for key, draw in _figures_of(comparison).items()]
        return [(key, figure, boxes(figure)) for key, figure in figures]


def clipped(figure, texts):
    inside = figure.bbox.padded(1.0)  # a pixel for rounding
    return [
        text
        for text, box in texts
        if not (inside.contains(box.x0, box.y0) and inside.contains(box.x1, box.y1))
    ]


def overlapping(texts):
    pairs = []
    for number, (text, box) in enumerate(texts):
        small = box.padded(-0.5)  # half a pixel for rounding
        pairs += [
            (text, other) for other, beside in texts[number + 1 :] if small.overlaps(beside.padded(-0.5))
        ]
    return pairs


@pytest.mark.parametrize("name", ["fixture", *DEMO_CASES])
def test_no_text_is_clipped_or_overlaps_another(name):
    for key, figure, texts in drawn_figures(name):
        assert len(texts) > 5, key
        assert (key, clipped(figure, texts)) == (key, [])
        assert (key, overlapping(texts)) == (key, [])


@pytest.mark.parametrize("name", DEMO_CASES)
def test_no_legend_lies_over_data(name):
    for key, figure, _ in drawn_figures(name):
        legends = [*figure.legends, *(ax.get_legend() for ax in figure.axes if ax.get_legend())]
        for legend in legends:
            box = legend.get_window_extent()
            assert not [ax for ax in figure.axes if box.overlaps(ax.get_window_extent().padded(-0.5))], key


def test_the_check_for_overlap_sees_one():
    """Guards the two tests above: two labels in one place, and one beyond the edge, are found."""
    from matplotlib.figure import Figure

    figure = Figure()
    figure.text(0.5, 0.5, "one")
    figure.text(0.5, 0.5, "two")
    figure.text(0.99, 0.2, "beyond the edge")
    texts = boxes(figure)
    assert overlapping(texts) == [("one", "two")]
    assert clipped(figure, texts) == ["beyond the edge"]


@pytest.mark.parametrize("name", DEMO_CASES)
def test_the_governing_point_is_that_of_the_check(name):
    best = demo_comparison(name).best
    check = best.check("speed_torque")
    time, segment, speed, torque = governing_row(best, best.detail)
    assert (time, segment, abs(torque)) == (check.at_time_s, check.segment, check.demand)
    cycle = best.detail.cycle
    assert speed == pytest.approx(np.interp(time, cycle["time_s"], cycle["motor_speed_rad_s"]), abs=1e-9)


@pytest.mark.parametrize("name", DEMO_CASES)
def test_causes_are_stacked_to_their_sum(name):
    """The filled areas reach from zero up to the sum of what asks, down to the sum of what helps."""
    from matplotlib.collections import PolyCollection

    comparison = demo_comparison(name)
    detail = comparison.best.detail
    with house_style():
        figure = draw_causes(detail, AxisUnits.of(comparison.case))
    (ax,) = figure.axes
    areas = [area for area in ax.collections if isinstance(area, PolyCollection)]
    assert len({area.get_hatch() for area in areas}) == len(
        {tuple(area.get_facecolor()[0]) for area in areas}
    )
    corners = np.concatenate([area.get_paths()[0].vertices for area in areas])
    names = [cause[0] for cause in _CAUSES]
    parts = detail.cycle[names].to_numpy()
    unit = 1e-3 if "[mN·m]" in ax.get_ylabel() else 1.0
    # exact but for rounding: both are sums of the same doubles
    assert unit * corners[:, 1].max() == pytest.approx(np.maximum(parts, 0.0).sum(axis=1).max())
    assert unit * corners[:, 1].min() == pytest.approx(np.minimum(parts, 0.0).sum(axis=1).min(), abs=1e-12)
    total = next(line for line in ax.lines if line.get_label() == "sum (air gap)")
    assert unit * total.get_ydata() == pytest.approx(parts.sum(axis=1), abs=1e-9)


def test_labels_are_spread_without_overlap_and_in_order():
    placed = _spread([0.5, 0.51, 0.52, 0.9], 0.1)
    assert np.all(np.diff(placed) >= 0.1 - 1e-12)
    assert np.mean(placed[:3]) == pytest.approx(0.51)


def test_a_figure_shows_itself_in_a_notebook(comparison, drawn):
    figure = draw(comparison, "speed_torque")
    assert texts(figure._repr_svg_().encode()) == texts(drawn["speed_torque"].svg)
    assert draw(dataclasses.replace(comparison, sets=()), "motion") is None
    with pytest.raises(ValueError, match="speed_torque"):
        draw(comparison, "speed")


def test_straight_stretches_lose_only_points_that_add_nothing():
    time = np.array([0.0, 1.0, 2.0, 3.0, 3.0, 4.0, 5.0, 6.0])
    straight_jump = np.array([0.0, 1.0, 2.0, 3.0, 0.0, 0.0, 0.0, 0.0])
    bent = np.array([0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 1.0, 1.0])
    assert _corners(time, np.array([straight_jump, bent])).tolist() == [0, 3, 4, 5, 6, 7]


def test_hostile_names_draw():
    assert set(draw_figures(build_hostile())) == KEYS


def test_the_user_s_matplotlib_settings_stay(comparison):
    import matplotlib

    with matplotlib.rc_context({"font.size": 23.0}):
        draw_figures(dataclasses.replace(comparison, sets=comparison.sets[:1]))
        assert matplotlib.rcParams["font.size"] == 23.0


@pytest.mark.parametrize(("angle", "label", "shown"), [(6.0, "°", 343.77), (200.0, "turns", 31.831)])
def test_an_angle_of_many_turns_is_drawn_in_turns(angle, label, shown):
    unit = AxisUnits(linear_load=False, linear_motor=False).position([0.0, -angle])
    assert unit.label == label
    assert unit.convert(angle) == pytest.approx(shown, rel=1e-4)
