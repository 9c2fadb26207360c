"""The matrix of candidate sets and checks, coloured and labelled by utilisation."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from actuator_sizing.report.figures import style
from actuator_sizing.report.formatting import percent
from actuator_sizing.sizing.results import FAILS, LOW_RESERVE, NOT_CHECKED

if TYPE_CHECKING:
    from collections.abc import Sequence

    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from actuator_sizing.sizing.results import CheckResult, SetResult

#: Rows that one page carries.
MOST_ROWS = 25
#: Checks that its width carries; those with the least reserve are drawn.
MOST_COLUMNS = 16
_LABEL_LETTERS = 38  # of the three names together

# From nothing used to all of it used, in steps that stay ordered in grey; above the limit one dark colour.
_STEPS = (
    (0.25, "#f4f8fb"),
    (0.50, "#d6e7f3"),
    (0.75, "#aacde6"),
    (0.90, "#7db3d8"),
    (1.00, "#d28a1e"),
)
_FAILS_COLOR = "#8c2d04"


def draw_utilisation(sets: Sequence[SetResult]) -> Figure | None:
    """Draw utilisation by set and check; None without sets.

    Parameters
    ----------
    sets : sequence of SetResult
        Best first; those that do not fit the page are left out.
    """
    rows = list(sets[:MOST_ROWS])
    if not rows:
        return None
    keys, left_out = _columns(rows)
    cell_in = 0.235
    figure, (ax,) = style.new_axes(
        2.2 + cell_in * len(rows), left_in=2.85, right_in=0.15, bottom_in=0.5, top_in=1.7
    )
    cells = _Cells()
    for y, item in enumerate(rows):
        by_key = {c.check: c for c in item.checks}
        for x, (key, _) in enumerate(keys):
            cells.add(ax, x, y, by_key.get(key), key == item.governing_check)
    cells.draw(ax)
    ax.set_xlim(-0.5, len(keys) - 0.5)
    ax.set_ylim(len(rows) - 0.5, -0.5)
    _draw_labels(ax, [title for _, title in keys], [_row_label(item) for item in rows])
    _draw_key(ax, left_out)
    return figure


def _columns(rows: list[SetResult]) -> tuple[list[tuple[str, str]], int]:
    """Key and title of the checks that are drawn, and how many are not."""
    titles: dict[str, str] = {}
    weight: dict[str, tuple[bool, float]] = {}
    for item in rows:
        for check in item.checks:
            key = check.check
            titles.setdefault(key, check.title + (" (advice)" if check.is_advice else ""))
            known = check.utilisation is not None and check.allowed > 0.0
            share = check.utilisation / check.allowed if known else 1.0  # type: ignore[operator]
            # What governs or binds comes before advice.
            mine = (not check.is_advice, np.inf if key == item.governing_check else share)
            weight[key] = max(weight.get(key, mine), mine)
    kept = set(sorted(titles, key=lambda key: weight[key], reverse=True)[:MOST_COLUMNS])
    return [(key, title) for key, title in titles.items() if key in kept], len(titles) - len(kept)


def _draw_labels(ax: Axes, titles: Sequence[str], names: Sequence[str]) -> None:
    """Name columns and rows by plain text, for an axis makes five artists for every tick."""
    ax.set_axis_off()
    aside: dict[str, Any] = {"textcoords": "offset points", "fontsize": 6.8, "annotation_clip": False}
    for x, title in enumerate(titles):
        above: dict[str, Any] = {
            "xycoords": ("data", "axes fraction"),
            "xytext": (0.0, 3.5),
            "ha": "center",
            "va": "bottom",
        }
        ax.annotate(style.shorten(title, 30), (x, 1.0), rotation=90, **above, **aside)
    for y, name in enumerate(names):
        before: dict[str, Any] = {
            "xycoords": ("axes fraction", "data"),
            "xytext": (-3.5, 0.0),
            "ha": "right",
            "va": "center",
        }
        ax.annotate(name, (0.0, y), **before, **aside)


def _row_label(item: SetResult) -> str:
    names = [style.shorten(name, 60) for name in (item.motor, item.gearhead or "direct", item.drive)]
    room = [len(name) for name in names]
    while sum(room) > _LABEL_LETTERS:
        room[room.index(max(room))] -= 1
    parts = [_middle_out(name, letters) for name, letters in zip(names, room, strict=True)]
    return f"{item.rank}. {' + '.join(parts)}"


def _middle_out(name: str, letters: int) -> str:
    """Cut a name in its middle, for names of one family differ at their ends."""
    if len(name) <= letters:
        return name
    tail = (letters - 1) // 2
    return f"{name[: letters - 1 - tail]}…{name[len(name) - tail :]}"


class _Cells:
    """Collects the rectangles of the matrix, for a few collections draw faster than hundreds of patches."""

    def __init__(self) -> None:
        self.filled: list[tuple[float, float, str]] = []
        self.hatched: list[tuple[float, float, str]] = []
        self.framed: list[tuple[float, float, str]] = []

    def add(self, ax: Axes, x: float, y: float, check: CheckResult | None, governs: bool) -> None:
        """Note one cell and print its utilisation; the governing check of a row has a frame."""
        if governs:
            self.framed.append((x, y, "none"))
        if check is None:
            ax.text(x, y, "–", ha="center", va="center", fontsize=6.4, color=style.QUIET)
            return
        if check.verdict == NOT_CHECKED or check.utilisation is None:
            self.hatched.append((x, y, "white"))
            box = {"facecolor": "white", "edgecolor": "none", "pad": 0.8}
            ax.text(x, y, "?", ha="center", va="center", fontsize=6.4, bbox=box)
            return
        color = _color(check)
        self.filled.append((x, y, color))
        ink = "white" if color == _FAILS_COLOR else style.INK
        weight = "bold" if check.verdict in (FAILS, LOW_RESERVE) else "normal"
        text = _short_percent(check)
        size = 6.4 if len(text) < 5 else 5.6  # as wide as the cell at most
        ax.text(x, y, text, ha="center", va="center", fontsize=size, color=ink, fontweight=weight)

    def draw(self, ax: Axes) -> None:
        """Draw what was collected, the frames on top."""
        from matplotlib.collections import PolyCollection

        layers: tuple[tuple[list[tuple[float, float, str]], dict[str, Any]], ...] = (
            (self.filled, {"edgecolors": "#c4c4c4", "linewidths": 0.4}),
            (self.hatched, {"edgecolors": "#c4c4c4", "linewidths": 0.4, "hatch": "////"}),
            (self.framed, {"edgecolors": style.INK, "linewidths": 1.6}),
        )
        for cells, options in layers:
            if cells:
                corners = [
                    [(x - 0.47, y - 0.45), (x + 0.47, y - 0.45), (x + 0.47, y + 0.45), (x - 0.47, y + 0.45)]
                    for x, y, _ in cells
                ]
                ax.add_collection(
                    PolyCollection(corners, facecolors=[color for *_, color in cells], **options),
                    autolim=False,
                )


def _color(check: CheckResult) -> str:
    if check.verdict == FAILS and not check.is_advice:
        return _FAILS_COLOR
    assert check.utilisation is not None
    share = check.utilisation / check.allowed if check.allowed > 0.0 else 1.0
    for upper, color in _STEPS:
        if share <= upper:
            return color
    return _STEPS[-1][1]


def _short_percent(check: CheckResult) -> str:
    text = percent(check.utilisation, check.allowed).removesuffix(" %")
    assert check.utilisation is not None
    return ">999" if check.utilisation > 9.99 and check.utilisation > check.allowed else text


def _draw_key(ax: Axes, left_out: int) -> None:
    """Explain the colours under the matrix."""
    from matplotlib.patches import Patch

    lower = 0.0
    patches = []
    for upper, color in _STEPS:
        name = f"{100 * lower:.0f}–{100 * upper:.0f} %"
        patches.append(Patch(facecolor=color, edgecolor="#c4c4c4", label=name))
        lower = upper
    patches += [
        Patch(facecolor=_FAILS_COLOR, label="fails"),
        Patch(facecolor="white", hatch="////", edgecolor="#c4c4c4", label="? not checked"),
        Patch(facecolor="white", edgecolor=style.INK, linewidth=1.6, label="governs"),
    ]
    ax.figure.legend(
        handles=patches,
        loc="lower center",
        bbox_to_anchor=(0.5, 0.0),
        ncols=len(patches),
        title="utilisation of what is allowed; cells show demand over capacity in %"
        + (f"; {left_out} checks with more reserve are in the tables" if left_out else ""),
        title_fontsize=7.2,
        fontsize=7.0,
        handlelength=1.4,
        columnspacing=1.1,
    )
