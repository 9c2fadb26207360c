"""The curves of the leading set as the writers need them: segments by name."""

from __future__ import annotations

import dataclasses
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from actuator_sizing.sizing.results import Comparison, SetDetail


def leading_detail(comparison: Comparison) -> SetDetail | None:
    """Take the curves of the leading set, with the segments of its cycle named; None without curves.

    Parameters
    ----------
    comparison : Comparison
        The answer; its cycle counts segments from 0 or names them.
    """
    detail = comparison.sets[0].detail if comparison.sets else None
    if detail is None or detail.cycle["segment"].dtype.kind not in "iu":
        return detail
    names = [segment.name for segment in comparison.case.segments]
    named = detail.cycle.assign(segment=[names[index] for index in detail.cycle["segment"]])
    return dataclasses.replace(detail, cycle=named)
