"""One look for every figure: colours, dashes, labels beside the data, and vector output."""

from __future__ import annotations

import io
import re
import threading
import warnings
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

# Colours of Okabe and Ito (Color Universal Design, 2008): told apart with every common colour vision. Each
# meaning also has its own dash pattern or marker, so that a grey print tells the same.
DEMAND = "#0072B2"  # what the axis asks for
PEAK_LIMIT = "#D55E00"  # what must never be passed
CONTINUOUS = "#009E73"  # what may last
SECOND = "#56B4E9"  # the second body, the second quantity
THIRD = "#E69F00"
FOURTH = "#CC79A7"
INK = "#1a1a1a"
QUIET = "#6b6b6b"
GRID = "#d9d9d9"

#: Dashes of what may last and of limits; demand is always drawn solid.
LIMIT_DASH, CONTINUOUS_DASH, QUIET_DASH = (0, (6, 2)), (0, (3, 1.5)), (0, (1, 1.5))

WIDTH_IN = 7.2
_TWO_LINES_IN = 0.33  # what a label of two lines takes beside its axis
FONT_STACK = ["DejaVu Sans", "Verdana", "Arial", "sans-serif"]

_STYLE: dict[str, Any] = {
    "font.family": FONT_STACK[:1],
    "font.size": 8.5,
    "axes.titlesize": 9.0,
    "axes.labelsize": 8.5,
    "axes.edgecolor": QUIET,
    "axes.labelcolor": INK,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.grid": True,
    "axes.axisbelow": True,
    "axes.formatter.useoffset": False,
    "axes.formatter.limits": (-4, 6),
    "axes.xmargin": 0.0,
    "axes.ymargin": 0.08,
    "grid.color": GRID,
    "grid.linewidth": 0.6,
    "xtick.color": QUIET,
    "ytick.color": QUIET,
    "xtick.labelcolor": INK,
    "ytick.labelcolor": INK,
    "xtick.labelsize": 8.0,
    "ytick.labelsize": 8.0,
    "text.color": INK,
    "text.parse_math": False,  # names of parts may hold dollar signs
    "legend.fontsize": 8.0,
    "legend.frameon": False,
    "legend.handlelength": 2.8,
    "lines.linewidth": 1.6,
    "lines.solid_joinstyle": "round",
    "hatch.linewidth": 0.5,
    "svg.fonttype": "none",  # text stays text: it can be searched and read out
    "path.simplify": True,
}
_LOCK = threading.RLock()  # matplotlib's settings are global
_is_applied = False


@contextmanager
def house_style() -> Iterator[None]:
    """Apply the look while a figure is drawn or written; leaves the user's settings as they were."""
    global _is_applied
    import matplotlib

    with _LOCK:
        if _is_applied:  # by the same thread: setting all again for every figure costs as much as drawing it
            yield
            return
        settings: dict[Any, Any] = {**matplotlib.rcParamsDefault}
        with matplotlib.rc_context(settings | _STYLE | {"backend": "agg"}):
            _is_applied = True
            try:
                yield
            finally:
                _is_applied = False


def new_axes(
    height_in: float,
    rows: int = 1,
    *,
    left_in: float = 0.75,
    right_in: float = 1.55,
    bottom_in: float = 0.5,
    top_in: float = 0.3,
    gap_in: float = 0.16,
    share_x: bool = True,
    columns: Sequence[float] = (1.0,),
    column_gap_in: float = 0.25,
) -> tuple[Figure, list[Axes]]:
    """Make a figure of the page's width with margins in inches, so that nothing moves or is clipped.

    Parameters
    ----------
    height_in : float
        Height of the figure. [in]
    rows : int
        Number of panels above one another. [-]
    left_in, right_in, bottom_in, top_in, gap_in, column_gap_in : float
        Margins and the gaps between panels. [in]
    share_x : bool
        Panels of one column share their x axis and only the lowest has tick labels.
    columns : sequence of float
        Relative widths of the columns; panels come back row by row.
    """
    figure = _figure_class()(figsize=(WIDTH_IN, height_in))
    panel_width = (WIDTH_IN - left_in - right_in - column_gap_in * (len(columns) - 1)) / len(columns)
    panel_height = (height_in - bottom_in - top_in - gap_in * (rows - 1)) / rows
    grid = figure.add_gridspec(
        rows,
        len(columns),
        left=left_in / WIDTH_IN,
        right=1.0 - right_in / WIDTH_IN,
        bottom=bottom_in / height_in,
        top=1.0 - top_in / height_in,
        hspace=gap_in / panel_height,
        wspace=column_gap_in / panel_width,
        width_ratios=columns,
    )
    axes: list[Axes] = []
    for row in range(rows):
        for column in range(len(columns)):
            shared = axes[column] if share_x and row > 0 else None
            ax = figure.add_subplot(grid[row, column], sharex=shared)
            if share_x and row < rows - 1:
                ax.tick_params(labelbottom=False)
            axes.append(ax)
    return figure, axes


def align_labels(axes: Sequence[Axes]) -> None:
    """Put y labels of two lines at the edge of the figure, without measuring every label of a tick."""
    for ax in axes:
        place = ax.get_position()
        ax.yaxis.set_label_coords((_TWO_LINES_IN / WIDTH_IN - place.x0) / place.width, 0.5)


@lru_cache(maxsize=1)
def _figure_class() -> type[Figure]:
    from matplotlib.figure import Figure

    class ShownFigure(Figure):
        """A figure that shows itself in a notebook, whatever backend is set there."""

        def _repr_svg_(self) -> str:
            return to_svg(self, f"figure{id(self):x}").decode("utf-8")  # two on one page keep their ids apart

    return ShownFigure


@dataclass(frozen=True)
class Level:
    """A horizontal line with its name beside the panel."""

    value: float
    text: str
    color: str
    dash: Any = LIMIT_DASH


def draw_levels(ax: Axes, levels: Sequence[Level], reach: float = 2.2) -> None:
    """Draw labelled limit lines; one far above or below the data is named at the edge with an arrow.

    Parameters
    ----------
    ax : Axes
        Panel with its data already drawn.
    levels : sequence of Level
        Lines, in the unit of the y axis; NaN is left out.
    reach : float
        How far, in spans of the data, the axis is stretched to hold a line. [-]
    """
    low, high = ax.get_ylim()
    span = high - low
    known = [level for level in levels if level.value == level.value]
    inside = [level for level in known if low - reach * span <= level.value <= high + reach * span]
    if inside:
        low = min(low, min(level.value for level in inside) - 0.06 * span)
        high = max(high, max(level.value for level in inside) + 0.06 * span)
    ax.set_ylim(low, high)
    for level in inside:
        ax.axhline(level.value, color=level.color, linestyle=level.dash, linewidth=1.2, zorder=1.5)
    places = [_label_place(level, low, high) for level in known]
    height_pt = panel_size_pt(ax)[1]
    size = 7.6
    spread = _spread([place for place, _ in places], 1.25 * size / height_pt)
    for level, (_, arrow), y in zip(known, places, spread, strict=True):
        ax.annotate(
            f"{arrow}{level.text}",
            (1.0, y),
            xycoords="axes fraction",
            xytext=(5, 0),
            textcoords="offset points",
            ha="left",
            va="center",
            fontsize=size,
            color=INK,
            annotation_clip=False,
        )


def panel_size_pt(ax: Axes) -> tuple[float, float]:
    """Width and height of a panel on paper. [pt]"""
    width, height = ax.get_position().size
    figure_width, figure_height = ax.figure.get_size_inches()  # type: ignore[union-attr]
    return 72.0 * float(width * figure_width), 72.0 * float(height * figure_height)


def _label_place(level: Level, low: float, high: float) -> tuple[float, str]:
    if level.value > high:
        return 1.0, "↑ "
    if level.value < low:
        return 0.0, "↓ "
    return (level.value - low) / (high - low), ""


def _spread(wanted: Sequence[float], gap: float) -> list[float]:
    """Move labels apart until no two are closer than `gap`, keeping their order and their mean place."""
    order = sorted(range(len(wanted)), key=lambda i: wanted[i])
    groups: list[list[float]] = []  # [centre, count]
    for index in order:
        groups.append([wanted[index], 1.0])
        while len(groups) > 1 and _overlap(groups[-2], groups[-1], gap):
            centre_b, count_b = groups.pop()
            centre_a, count_a = groups.pop()
            count = count_a + count_b
            groups.append([(centre_a * count_a + centre_b * count_b) / count, count])
    placed = [0.0] * len(wanted)
    position = 0
    for centre, count in groups:
        for k in range(int(count)):
            placed[order[position]] = centre + (k - (count - 1.0) / 2.0) * gap
            position += 1
    return placed


def _overlap(lower: Sequence[float], upper: Sequence[float], gap: float) -> bool:
    distance = upper[0] - lower[0]
    return distance < gap * (lower[1] + upper[1]) / 2.0 - 1e-12


def legend_above(ax: Axes, columns: int = 4, **options: Any) -> None:
    """Put the legend over the panel, outside the data."""
    place: dict[str, Any] = {
        "loc": "lower left",
        "bbox_to_anchor": (0.0, 1.0),
        "borderaxespad": 0.2,
    } | options
    ax.legend(ncols=columns, columnspacing=1.4, handletextpad=0.6, **place)


def shorten(text: str, length: int) -> str:
    r"""Cut text to one line of printable letters, with an ellipsis after `length` of them.

    Examples
    --------
    >>> shorten("two\nlines", 20), shorten("abcdefgh", 5)
    ('two lines', 'abcd…')
    """
    line = " ".join("".join(c if c.isprintable() else " " for c in text).split())
    return line if len(line) <= length else line[: length - 1] + "…"


def to_svg(figure: Figure, key: str) -> bytes:
    """Write a figure as SVG that is the same, byte for byte, every time; ids begin with `key`."""
    import matplotlib

    stream = io.BytesIO()
    with house_style(), warnings.catch_warnings():
        # Text stays text in the file, so that a letter which the measuring font lacks is no loss.
        warnings.filterwarnings("ignore", message="Glyph .* missing from", category=UserWarning)
        matplotlib.rcParams["svg.hashsalt"] = key
        metadata = {"Date": None, "Creator": None, "Format": None, "Type": None}
        figure.savefig(stream, format="svg", metadata=metadata)
    return _own_ids(stream.getvalue().decode("utf-8"), key).encode("utf-8")


def _own_ids(svg: str, key: str) -> str:
    """Prefix every id and every reference to one, and keep the style rule inside this figure."""
    svg = re.sub(r'\bid="([^"]+)"', rf'id="{key}-\1"', svg)
    svg = re.sub(r"url\(#([^)]+)\)", rf"url(#{key}-\1)", svg)
    svg = re.sub(r'xlink:href="#([^"]+)"', rf'xlink:href="#{key}-\1"', svg)
    svg = svg.replace('<style type="text/css">*{', f'<style type="text/css">#{key}-figure_1 *{{')
    fallback = ", ".join(name if name == "sans-serif" else f"'{name}'" for name in FONT_STACK)
    return svg.replace("'DejaVu Sans'", fallback)
