"""Where the temperatures of a cycle start that does not repeat until they settle."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.machine import JudgedMotor
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters
from actuator_sizing.core.thermal import HeatLoss
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.pair_course import course, heat_loss

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class ThermalStart:
    """State of B pairs before a run, and the cycle that follows on it."""

    winding_degc: FloatArray  # (B,)
    housing_degc: FloatArray  # (B,) NaN: one body
    following: Demand | None  # None: it cools down

    def take(self, rows: NDArray[np.intp] | slice) -> ThermalStart:
        """Some of the pairs."""
        return replace(self, winding_degc=self.winding_degc[rows], housing_degc=self.housing_degc[rows])

    def with_following(
        self, loss: HeatLoss, motors: MotorParameters, gearheads: GearheadParameters, judged: JudgedMotor
    ) -> HeatLoss:
        """Losses of the run and of the cycle that follows on it.

        Parameters
        ----------
        loss : HeatLoss
            Of the run itself. [-]
        motors, gearheads : MotorParameters, GearheadParameters
            B pairs. [-]
        judged : JudgedMotor
            The motors at judged temperatures. [-]

        Returns
        -------
        HeatLoss
            After a run the winding can be hottest in the next cycle, which starts on a warmer housing. [-]
        """
        if self.following is None:
            return loss
        after = heat_loss(
            self.following, motors, gearheads, judged, course(self.following, motors, gearheads, judged)
        )
        return replace(
            loss,
            duration_s=np.concatenate([loss.duration_s, after.duration_s]),
            copper_loss_w=np.concatenate([loss.copper_loss_w, after.copper_loss_w], axis=1),
            speed_loss_w=np.concatenate([loss.speed_loss_w, after.speed_loss_w], axis=1),
        )
