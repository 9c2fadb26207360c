"""The cascade along commands that are polynomials: whole stretches at once, the loop itself where modes switch."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.cascade_kernel import LOAD_SPEED, MOTOR_SPEED, RECORDED
from actuator_sizing.core.control import Cascade, LoopSettings
from actuator_sizing.core.plant import Plant
from actuator_sizing.core.stretches import LAG, Mode, Room, Stretch, Stretches, polynomials

FloatArray = NDArray[np.float64]

#: Samples of a polynomial below which preparing a stretch costs more than the loop.
WORTH_A_STRETCH = 256
_FIRST_WINDOW, _MOST_WINDOW = 1024, 16_384  # samples looked at before a mode has lasted, and at most
_SHORT = 128  # a mode that ends before was not worth it
_FIRST_LOOP, _MOST_LOOP = 32, 2048  # samples left to the loop after a short mode, and at most


def has_lasting_modes(settings: LoopSettings) -> bool:
    """Whether stretches exist at all.

    An encoder with steps changes the mode with every count, and cross coupling of two axes is no linear system.

    Parameters
    ----------
    settings : LoopSettings
        The loops. [-]
    """
    return settings.encoder_step_rad == 0.0 and not settings.is_dq


class Follower:
    """A cascade that takes its commands as polynomials."""

    def __init__(self, cascade: Cascade) -> None:
        """Take over a cascade; its states stay there.

        Parameters
        ----------
        cascade : Cascade
            With an ideal encoder. [-]
        """
        self.cascade = cascade
        self.in_loop = 0  # samples that went through the loop
        self._stretches: dict[Plant, Stretches] = {}
        self._found, self._outputs = Room(), Room()

    def follow(self, series: FloatArray, start: float, step: float, count: int) -> Mapping[str, FloatArray]:
        """Run over samples and record what happened at each of them.

        Parameters
        ----------
        series : ndarray, shape (4, K)
            Commanded angle, commanded speed, current in advance and external torque on the load as Legendre
            series in ξ.
        start, step : float
            ξ at the first sample and from one to the next. [-]
        count : int
            How many samples. [-]

        Returns
        -------
        dict of str to ndarray, shape (count,)
            As `Cascade.advance`, and ``lag``: commanded angle minus that of the load, in rad; good until the
            next call. [-]
        """
        cascade = self.cascade
        if cascade.plant not in self._stretches:
            self._stretches[cascade.plant] = Stretches(cascade.plant, cascade.settings)
        stretches = self._stretches[cascade.plant]
        prepared: dict[Mode, Stretch] = {}
        found, saturated = self._found.take((LAG + 1, count)), np.zeros(count, dtype=np.int64)
        n, done, window, patience = len(stretches.alive), 0, _FIRST_WINDOW, _FIRST_LOOP
        if not stretches.can_switch:
            window = _MOST_WINDOW if count > _MOST_WINDOW else count
        joint = self._joint(stretches, start, series.shape[1])
        while done < count:
            mode = stretches.mode_at(joint[:n], series @ joint[n:])
            if mode not in prepared:
                prepared[mode] = stretches.stretch(mode, series, step, count)
            wanted = min(window, count - done)
            y, starts = prepared[mode].run(joint, start + step * done, wanted, self._outputs)
            good = stretches.holds(mode, y)
            kept = wanted if good.all() else int(good.argmin())
            if kept == count:
                found = y
                joint = prepared[mode].at(starts, kept)
                break
            if kept:
                found[:, done : done + kept] = y[: LAG + 1, :kept]
                joint = prepared[mode].at(starts, kept)
                done += kept
            if kept == wanted:
                window = min(2 * window, _MOST_WINDOW)
                continue
            window = _FIRST_WINDOW
            if kept >= _SHORT:
                patience = _FIRST_LOOP
                continue
            self._leave(stretches, joint)
            here = slice(done, min(done + patience, count))
            found[:, here], saturated[here] = self._loop(series, start, step, here)
            done, patience = here.stop, min(2 * patience, _MOST_LOOP)
            joint = self._joint(stretches, start + step * done, series.shape[1])
        self._leave(stretches, joint)
        return dict(zip(RECORDED, found, strict=False)) | {"lag": found[LAG], "saturated": saturated}

    def _joint(self, stretches: Stretches, at: float, terms: int) -> FloatArray:
        """States of the loop and the polynomials at ξ."""
        states = [self.cascade.state[k] for k in stretches.alive]
        return np.concatenate([states, polynomials(np.array([at]), terms)[0]])

    def _leave(self, stretches: Stretches, joint: FloatArray) -> None:
        """Put the states back into the loop."""
        state = self.cascade.state
        for place, value in zip(stretches.alive, joint.tolist(), strict=False):
            state[place] = value
        if self.cascade.plant.is_rigid:
            state[LOAD_SPEED] = state[MOTOR_SPEED]

    def _loop(
        self, series: FloatArray, start: float, step: float, here: slice
    ) -> tuple[FloatArray, NDArray[np.int64]]:
        """The same samples through the loop."""
        at = start + step * np.arange(here.start, here.stop)
        inputs = series @ polynomials(at, series.shape[1]).T
        seen = self.cascade.advance(*inputs)
        self.in_loop += here.stop - here.start
        rows = [seen[name] for name in RECORDED]
        unlimited = np.full(len(at), np.nan)  # the voltage asked for is not recorded by the loop
        return np.array([*rows, unlimited, lag_of(inputs[0], seen)]), seen["saturated"]


def lag_of(angle_rad: FloatArray, seen: Mapping[str, FloatArray]) -> FloatArray:
    """Commanded angle minus that of the load.

    Parameters
    ----------
    angle_rad : ndarray, shape (n,)
        Commanded angle. [rad]
    seen : mapping
        From `Cascade.advance`. [-]

    Returns
    -------
    ndarray, shape (n,)
        At the motor shaft. [rad]
    """
    return np.asarray(angle_rad - (seen["motor_angle"] - seen["twist"]))
