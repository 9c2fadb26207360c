"""The matrix of candidate sets and checks, coloured and labelled by utilisation."""

from __future__ import annotations

from typing import TYPE_CHECKING

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
_LABEL_LETTERS = 40

# From nothing used to all of it used, in steps that stay ordered in grey; above the limit one dark colour.
_STEPS = (
    (0.25, "#f4f8fb"),
    (0.50, "#d6e7f3"),
    (0.75, "#aacde6"),
    (0.90, "#7db3d8"),
    (1.00, "#f3c66b"),
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
    titles = {c.check: c.title + (" (advice)" if c.is_advice else "") for item in rows for c in item.checks}
    keys = list(titles.items())
    cell_in = 0.235
    figure, (ax,) = style.new_axes(
        2.2 + cell_in * len(rows), left_in=2.35, right_in=0.15, bottom_in=0.5, top_in=1.7
    )
    for y, item in enumerate(rows):
        by_key = {c.check: c for c in item.checks}
        for x, (key, _) in enumerate(keys):
            _draw_cell(ax, x, y, by_key.get(key), key == item.governing_check)
    ax.set_xlim(-0.5, len(keys) - 0.5)
    ax.set_ylim(len(rows) - 0.5, -0.5)
    ax.grid(False)
    ax.tick_params(length=0)
    ax.xaxis.tick_top()
    ax.set_xticks(range(len(keys)), [style.shorten(title, 30) for _, title in keys], rotation=90)
    ax.set_yticks(range(len(rows)), [_row_label(item) for item in rows])
    ax.tick_params(axis="both", labelsize=6.8)
    for side in ax.spines.values():
        side.set_visible(False)
    _draw_key(ax)
    return figure


def _row_label(item: SetResult) -> str:
    parts = [style.shorten(part, 40) for part in (item.motor, item.gearhead or "direct", item.drive)]
    while sum(map(len, parts)) > _LABEL_LETTERS - 6:  # two " + "
        longest = max(range(len(parts)), key=lambda i: len(parts[i]))
        parts[longest] = style.shorten(parts[longest], len(parts[longest]) - 1)
    return f"{item.rank}. {' + '.join(parts)}"


def _draw_cell(ax: Axes, x: float, y: float, check: CheckResult | None, governs: bool) -> None:
    """Fill one cell and print its utilisation; the governing check of a row has a frame."""
    from matplotlib.patches import Rectangle

    color, hatch, ink, weight, text = "white", None, style.INK, "normal", "–"
    if check is not None:
        if check.verdict == NOT_CHECKED or check.utilisation is None:
            hatch, text = "////", "?"
        else:
            color = _color(check)
            text = _short_percent(check)
            ink = "white" if color == _FAILS_COLOR else style.INK
            weight = "bold" if check.verdict in (FAILS, LOW_RESERVE) else "normal"
    ax.add_patch(
        Rectangle(
            (x - 0.47, y - 0.45), 0.94, 0.9, facecolor=color, hatch=hatch, edgecolor="#c4c4c4", linewidth=0.4
        )
    )
    if governs:
        ax.add_patch(
            Rectangle((x - 0.47, y - 0.45), 0.94, 0.9, fill=False, edgecolor=style.INK, linewidth=1.6)
        )
    box = {"facecolor": "white", "edgecolor": "none", "pad": 0.8} if hatch else None
    ax.text(x, y, text, ha="center", va="center", fontsize=6.4, color=ink, fontweight=weight, bbox=box)


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


def _draw_key(ax: Axes) -> None:
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
        title="utilisation of what is allowed; cells show demand over capacity in %",
        title_fontsize=7.2,
        fontsize=7.0,
        handlelength=1.4,
        columnspacing=1.1,
    )
