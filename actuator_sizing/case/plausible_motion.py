"""Planned motions that no axis can have: usually a unit or a decimal mark gone wrong."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from actuator_sizing.case.model import Segment
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.core.mechanisms import LINEAR
from actuator_sizing.errors import WARNING

#: Acceleration and jerk beyond any drive train: ten thousand g, and as much within a tenth of a millisecond.
ABSURD = {
    True: (1e5, 1e9),
    False: (1e7, 1e11),
}  # of a linear motion [m/s², m/s³]; of a rotary one [rad/s², rad/s³]
_INSTANTS = 9  # of a phase at which it is looked at


def check_plausible(
    coordinate: str, segments: Iterable[Segment], problems: ProblemList, table: str = "duty_cycle"
) -> None:
    """Warn of segments whose acceleration or jerk is absurd.

    Parameters
    ----------
    coordinate : str
        ``"linear"`` or ``"rotary"``: kind of the stated motion.
    segments : iterable of Segment
        As planned.
    problems : ProblemList
        Takes one warning a segment at most.
    table : str
        Table that states them.
    """
    linear = coordinate == LINEAR
    units = ("m/s²", "m/s³") if linear else ("rad/s²", "rad/s³")
    for segment in segments:
        peaks = np.zeros(2)
        for phase in segment.phases:
            _, _, a, j = phase.kinematics(np.linspace(0.0, phase.duration_s, _INSTANTS))
            peaks = np.maximum(peaks, [np.max(np.abs(a)), np.max(np.abs(j))])
        for word, peak, most, unit in zip(
            ("an acceleration", "a jerk"), peaks, ABSURD[linear], units, strict=True
        ):
            if peak > most:
                problems.report(table, segment.row, "displacement", got=f"{word} of {peak:.3g} {unit}",
                                allowed=f"what an axis can have, below {most:.0e} {unit}".replace("e+0", "e"),
                                remedy="Check the units of displacement, duration and limits.",
                                severity=WARNING)  # fmt: skip
                break
