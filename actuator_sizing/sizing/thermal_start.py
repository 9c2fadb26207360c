"""Where the temperatures of a cycle start that does not repeat until they settle."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.machine import JudgedMotor
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters
from actuator_sizing.core.thermal import HeatLoss
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.pair_course import course, heat_loss

FloatArray = NDArray[np.float64]

_MOST_PIECES_DRAWN = 2000  # of the cycles that follow on a run


@dataclass(frozen=True)
class ThermalStart:
    """State of B pairs before a run, and the cycles one of which repeats after it."""

    winding_degc: FloatArray  # (B,)
    housing_degc: FloatArray  # (B,) NaN: one body
    following: tuple[Demand, ...]  # none: it cools down

    def take(self, rows: NDArray[np.intp] | slice) -> ThermalStart:
        """Some of the pairs."""
        return replace(self, winding_degc=self.winding_degc[rows], housing_degc=self.housing_degc[rows])

    def losses_after(
        self, motors: MotorParameters, gearheads: GearheadParameters, judged: JudgedMotor
    ) -> tuple[HeatLoss, ...]:
        """Losses of the cycles that may follow on the run.

        Parameters
        ----------
        motors, gearheads : MotorParameters, GearheadParameters
            B pairs. [-]
        judged : JudgedMotor
            The motors at judged temperatures. [-]

        Returns
        -------
        tuple of HeatLoss
            After a run the winding can be hottest in what follows, which starts on a warmer housing. [-]
        """
        return tuple(
            heat_loss(each, motors, gearheads, judged, course(each, motors, gearheads, judged))
            for each in self.following
        )


def with_following(loss: HeatLoss, after: HeatLoss, until_s: float) -> HeatLoss:
    """Losses of a run and of the cycle that repeats after it, to be drawn.

    Parameters
    ----------
    loss, after : HeatLoss
        Of the run and of one cycle. [-]
    until_s : float
        Time from the start of the run that is to be seen. [s]

    Returns
    -------
    HeatLoss
        With whole cycles, at least one; most of a great many are drawn by their mean. [-]
    """
    span = float(np.sum(after.duration_s))
    count = max(math.ceil((until_s - float(np.sum(loss.duration_s))) / span), 1)
    whole = count if count * len(after.duration_s) <= _MOST_PIECES_DRAWN else min(count, 2)
    share = after.duration_s / span

    def joined(run: FloatArray, cycle: FloatArray) -> FloatArray:
        between = [] if whole == count else [(cycle @ share)[:, None]]
        return np.concatenate([run, cycle, *between, *[cycle] * (whole - 1)], axis=1)

    jumped = [] if whole == count else [np.array([(count - whole) * span])]
    return replace(
        loss,
        duration_s=np.concatenate(
            [loss.duration_s, after.duration_s, *jumped, *[after.duration_s] * (whole - 1)]
        ),
        copper_loss_w=joined(loss.copper_loss_w, after.copper_loss_w),
        speed_loss_w=joined(loss.speed_loss_w, after.speed_loss_w),
    )
