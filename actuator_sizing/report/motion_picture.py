"""The motion before anything is sized: what `audit` draws."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case

_MOST_POINTS = 20_000  # of a curve; a drawing shows no more


def write_motion(case: Case, folder: str | Path) -> tuple[Path, ...]:
    """Draw position, speed, acceleration and effort at the load over one cycle as ``motion.svg``.

    Of several cycles each gets a drawing of its own: ``motion_1.svg`` and so on, in the order of the case.

    Parameters
    ----------
    case : Case
        The axis as understood.
    folder : str or Path
        Where the drawing goes; made if it does not exist.

    Returns
    -------
    tuple of Path
        The files written.

    Raises
    ------
    OutputError
        If it cannot be written.
    """
    from actuator_sizing.files import write_atomically

    several = case.by_cycle()
    names = ["motion.svg"] if len(several) == 1 else [f"motion_{n}.svg" for n in range(1, len(several) + 1)]
    paths = tuple(Path(folder) / name for name in names)
    for path, each in zip(paths, several, strict=True):
        write_atomically(path, render_motion(each))
    return paths


def render_motion(case: Case) -> bytes:
    """Draw the motion of a case as SVG, see `write_motion`.

    Parameters
    ----------
    case : Case
        The axis as understood.
    """
    import numpy as np
    import pandas as pd

    from actuator_sizing.report.figures import house_style, to_svg
    from actuator_sizing.report.figures.over_time import draw_motion
    from actuator_sizing.report.figures.units import AxisUnits
    from actuator_sizing.sizing.demand import build_demand

    demand = build_demand(case)
    demand = demand.drawn or demand
    points, nodes = demand.position.shape
    step = max(1, points * nodes // _MOST_POINTS)
    names = np.array([segment.name for segment in case.segments], dtype=object)
    cycle = pd.DataFrame(
        {
            "time_s": demand.time_s.ravel()[::step],
            "segment": np.repeat(names[demand.segment], nodes)[::step],
            "position": demand.position.ravel()[::step],
            "speed": demand.speed.ravel()[::step],
            "acceleration": demand.acceleration.ravel()[::step],
            "effort": demand.effort.ravel()[::step],
        }
    )
    with house_style():
        return to_svg(draw_motion(cycle, AxisUnits.of(case), case.cycle.name), "motion")
