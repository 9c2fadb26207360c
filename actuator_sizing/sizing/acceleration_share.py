"""How much of a move is spent speeding up and slowing down, and the same move with other shares."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from actuator_sizing.case.model import Case, Segment
from actuator_sizing.core.motion_laws import plan_segment
from actuator_sizing.core.phases import Phase
from actuator_sizing.sizing.case_changes import every_segment, restarted

#: Laws whose shares are free; the others have theirs from their shape.
_LAWS = ("trapezoid", "triangular", "jerk-limited")
_SAME = 1e-9  # of the displacement: a move that is planned again must be the same move
_MOST = 1.0 - 1e-9  # of a move: no cruise is left


@dataclass(frozen=True)
class _Shares:
    acceleration: float
    deceleration: float
    jerk: float | None  # None: acceleration jumps
    displacement: float

    @property
    def together(self) -> float:
        return self.acceleration + self.deceleration

    def plan(self, duration_s: float, factor: float = 1.0) -> tuple[Phase, ...]:
        factor = min(factor, _MOST / self.together)
        return plan_segment(
            "trapezoid" if self.jerk is None else "jerk-limited",
            start_speed=0.0,
            displacement=self.displacement,
            duration_s=duration_s,
            acceleration_share=self.acceleration * factor,
            deceleration_share=self.deceleration * factor,
            jerk_share=self.jerk,
        )


def acceleration_share(case: Case) -> float | None:
    """Largest part of a move that is spent speeding up; None where no move has a share that is free. [-]"""
    found = [shares.acceleration for shares in map(_shares, every_segment(case)) if shares is not None]
    return max(found) if found and case.recording is None else None


def largest_share(case: Case) -> float:
    """The share at which the cruise of the move with the longest ramps is used up. [-]"""
    present = acceleration_share(case)
    together = max(shares.together for shares in map(_shares, every_segment(case)) if shares is not None)
    return (present or 0.0) / together


def with_acceleration_share(case: Case, share: float) -> Case:
    """Every trapezoid and jerk-limited move with longer or shorter ramps, over the same way in the same time.

    Parameters
    ----------
    case : Case
        A planned cycle. [-]
    share : float
        Largest part of a move that is spent speeding up; the other ramps follow in proportion, until nothing of
        the cruise is left. [-]

    Returns
    -------
    Case
        Changed. [-]
    """
    factor = share / (acceleration_share(case) or share)

    def planned(segment: Segment) -> Segment:
        shares = _shares(segment)
        if shares is None:
            return segment
        return replace(segment, phases=shares.plan(segment.duration_s, factor))

    return case.with_segments(lambda segments: restarted(tuple(planned(s) for s in segments)))


def _shares(segment: Segment) -> _Shares | None:
    """Shares of a move from rest to rest, read off its phases; None where they do not describe it."""
    if segment.law not in _LAWS or not segment.phases:
        return None
    phases = segment.phases
    total = segment.duration_s
    bends = [phase.kinematics(0.5 * phase.duration_s)[2] for phase in phases]
    peak = max(abs(float(bend)) for bend in bends)
    sense = np.sign(phases[-1].end()[0])
    if peak == 0.0 or sense == 0.0:
        return None
    along = [float(bend) * sense / peak for bend in bends]
    up = [p.duration_s for p, bend in zip(phases, along, strict=True) if bend > 1e-9]
    down = [p.duration_s for p, bend in zip(phases, along, strict=True) if bend < -1e-9]
    if not up or not down:
        return None
    jerk = None if segment.law != "jerk-limited" else up[0] / sum(up)
    shares = _Shares(sum(up) / total, sum(down) / total, jerk, phases[-1].end()[0])
    if jerk is not None and jerk > 0.5 + 1e-9:
        return None
    again = shares.plan(total)
    return shares if _is_same(phases, again) else None


def _is_same(first: tuple[Phase, ...], second: tuple[Phase, ...]) -> bool:
    """Whether two plans are the same motion, at instants of both."""
    total = sum(phase.duration_s for phase in first)
    time = np.linspace(0.0, total, 41)
    one, other = (np.array([_at(phases, t) for t in time]) for phases in (first, second))
    return bool(np.max(np.abs(one - other)) <= _SAME * np.max(np.abs(one)))


def _at(phases: tuple[Phase, ...], time_s: float) -> float:
    for phase in phases:
        if time_s <= phase.duration_s:
            return float(phase.kinematics(time_s)[0])
        time_s -= phase.duration_s
    return phases[-1].end()[0]
