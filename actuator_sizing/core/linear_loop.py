"""One sample of the cascade as matrices, read off the loop itself."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.cascade_kernel import (
    DIRECT_CURRENT,
    DIRECT_INTEGRATOR,
    FILTERED_SPEED,
    LAST_DIRECT_VOLTAGE,
    LAST_SEEN,
    LAST_VOLTAGE,
    LOAD_SPEED,
    NOTCH_1,
    NOTCH_2,
    RECORDED,
    RECORDED_DIRECT,
    STATES,
    TWIST,
    cascade_loop,
)
from actuator_sizing.core.control import EMF_GAIN, LoopSettings
from actuator_sizing.core.plant import Plant

FloatArray = NDArray[np.float64]

_SMOOTH = -3  # what `Plant.sampled` tells of backlash and friction stands at the end of its rows
INPUTS = 4  # commanded angle, commanded speed, current in advance, external torque on the load


@dataclass(frozen=True)
class OneSample:
    """``x' = A x + B u`` and what is recorded before it, ``y = C x + D u``.

    Attributes
    ----------
    alive : tuple of int
        Which states of the loop are in x.
    A, B : ndarray, shapes (n, n) and (n, 4)
        Step of the states.
    C, D : ndarray, shapes (7, n) and (7, 4)
        `RECORDED`, then the voltage that the current loop asks for.
    motor_torque : ndarray, shape (n,)
        What a torque on the motor over the sample adds to the states.
    """

    alive: tuple[int, ...]
    A: FloatArray
    B: FloatArray
    C: FloatArray
    D: FloatArray
    motor_torque: FloatArray


def alive_states(plant: Plant, settings: LoopSettings) -> tuple[int, ...]:
    """Which states of the loop are alive: those of filters, delay and spring only where there are any.

    Parameters
    ----------
    plant : Plant
        What is moved. [-]
    settings : LoopSettings
        The loops. [-]
    """
    idle = {LAST_SEEN, DIRECT_CURRENT, DIRECT_INTEGRATOR, LAST_DIRECT_VOLTAGE}
    if plant.is_rigid:
        idle |= {TWIST, LOAD_SPEED}
    if settings.setpoint_filter_s == 0.0:
        idle.add(FILTERED_SPEED)
    if settings.notch_rad_s == 0.0:
        idle |= {NOTCH_1, NOTCH_2}
    if not settings.is_delayed:
        idle.add(LAST_VOLTAGE)
    return tuple(k for k in range(STATES) if k not in idle)


@lru_cache(maxsize=128)
def one_sample(plant: Plant, settings: LoopSettings, *, engaged: bool = True) -> OneSample:
    """Read the linear part off the loop: one step from each unit vector.

    Parameters
    ----------
    plant : Plant
        What is moved; its friction is left out and its flanks stay where they are. [-]
    settings : LoopSettings
        The loops; limits and the steps of the encoder are left out. [-]
    engaged : bool
        False inside the backlash, where the spring carries nothing.

    Returns
    -------
    OneSample
        Its matrices, shared by all who ask. [-]
    """
    used, alive = settings.unlimited(), alive_states(plant, settings)
    rows = plant.sampled(used.sample_time_s)[0 if engaged else 1]
    rows = (*rows[:_SMOOTH], 0.0, 0.0, 0.0)  # no backlash, no friction
    gains = list(used.row())
    gains[EMF_GAIN] *= plant.torque_constant_nm_per_a
    n = len(alive)
    loop: Any = cascade_loop
    step, output = np.zeros((n, n + INPUTS)), np.zeros((len(RECORDED) + 1, n + INPUTS))
    for column in range(n + INPUTS):
        state = [0.0] * STATES
        inputs = [[0.0] for _ in range(INPUTS)]
        if column < n:
            state[alive[column]] = 1.0
        else:
            inputs[column - n][0] = 1.0
        record = [[0.0] for _ in (*RECORDED, *RECORDED_DIRECT)]
        loop(state, rows, rows, tuple(gains), *inputs, record, [0])
        asked = state[LAST_VOLTAGE] if settings.is_delayed else record[RECORDED.index("voltage")][0]
        step[:, column] = [state[k] for k in alive]
        output[:, column] = [*(row[0] for row in record[: len(RECORDED)]), asked]
    push = [rows[7 * k + 5] if k <= 4 else 0.0 for k in alive]  # the motor's column of `Plant.sampled`
    return OneSample(alive, step[:, :n], step[:, n:], output[:, :n], output[:, n:], np.array(push))
