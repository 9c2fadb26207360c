"""Load that a machine may carry for a short time, or again and again with rests between.

Of a short-time load the winding starts at ambient and just reaches its limit at the end; of an intermittent
one it is the peak of the periodic steady state that just reaches the limit.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from actuator_sizing.core.thermal import HeatLoss, ThermalNetwork, periodic_state
from actuator_sizing.core.warm_up import temperatures_after

_STEPS = 50  # halvings of the bracket: twelve digits


@dataclass(frozen=True)
class LoadedMachine:
    """One machine that runs at a constant speed under a load, or stands without one.

    Attributes
    ----------
    network : ThermalNetwork
        One candidate. [-]
    resistance_ohm : float
        Loss per square of the RMS-equivalent current, at the reference temperature. [Ω]
    resistance_coefficient_per_k : float
        α of the winding. [1/K]
    resistance_reference_degc : float
        Temperature of `resistance_ohm`. [°C]
    speed_loss_w : float
        Friction and iron loss while it runs; none while it stands. [W]
    ambient_degc, limit_degc : float
        Surroundings and permitted winding temperature. [°C]
    """

    network: ThermalNetwork
    resistance_ohm: float
    resistance_coefficient_per_k: float
    resistance_reference_degc: float
    speed_loss_w: float
    ambient_degc: float
    limit_degc: float

    def heat(self, current_a: float, on_s: float, off_s: float) -> HeatLoss:
        """Losses of one cycle: loaded, then at rest; the current is what is given.

        Parameters
        ----------
        current_a : float
            While loaded. [A]
        on_s, off_s : float
            Loaded and resting time; zero rest leaves the second piece out. [s]

        Returns
        -------
        HeatLoss
            One candidate. [-]
        """
        copper = self.resistance_ohm * current_a**2
        pieces = 2 if off_s > 0.0 else 1
        return HeatLoss(
            duration_s=np.array([on_s, off_s][:pieces]),
            copper_loss_w=np.array([[copper, 0.0][:pieces]]),
            speed_loss_w=np.array([[self.speed_loss_w, 0.0][:pieces]]),
            resistance_coefficient_per_k=np.array([self.resistance_coefficient_per_k]),
            resistance_reference_degc=np.array([self.resistance_reference_degc]),
            magnet_coefficient_per_k=np.zeros(1),
            magnet_reference_degc=np.zeros(1),
        )


def short_time_current(machine: LoadedMachine, on_s: float) -> float:
    """Constant current that brings the winding from ambient just to its limit.

    Parameters
    ----------
    machine : LoadedMachine
        The machine. [-]
    on_s : float
        Loaded time. [s]

    Returns
    -------
    float
        Current; 0 where the speed loss alone is too much, NaN where thermal data are missing. [A]

    Notes
    -----
    Short-time duty: the rest after it lasts until the machine is cold again.
    """

    def too_hot(current: float) -> bool | None:
        course = temperatures_after(
            machine.network, machine.heat(current, on_s, 0.0), machine.ambient_degc, on_s
        )
        if course is None:
            return None
        return not float(course.winding_degc[0]) <= machine.limit_degc

    return _largest(too_hot)


def intermittent_current(machine: LoadedMachine, on_s: float, off_s: float) -> float:
    """Current while loaded with which the peak of the periodic steady state is just the limit.

    Parameters
    ----------
    machine : LoadedMachine
        The machine. [-]
    on_s, off_s : float
        Loaded and resting time of one cycle. [s]

    Returns
    -------
    float
        Current; 0 where the speed loss alone is too much, NaN where thermal data are missing. [A]
    """

    def too_hot(current: float) -> bool | None:
        loss = machine.heat(current, on_s, off_s)
        state = periodic_state(machine.network, loss, machine.ambient_degc)
        hottest = float(state.winding_max_degc[0])
        if current == 0.0 and math.isnan(hottest):
            return None
        return not (bool(state.has_equilibrium[0]) and hottest <= machine.limit_degc)

    return _largest(too_hot)


def rest_time(on_s: float, duration_factor: float) -> float:
    """Rest of a cycle from its loaded time and the cyclic duration factor.

    Parameters
    ----------
    on_s : float
        Loaded time. [s]
    duration_factor : float
        Loaded time over the time of the cycle, above 0 and at most 1. [-]

    Returns
    -------
    float
        Resting time. [s]

    Examples
    --------
    >>> rest_time(600.0, 0.25)
    1800.0
    """
    return on_s * (1.0 / duration_factor - 1.0)


def _largest(too_hot: Callable[[float], bool | None]) -> float:
    """Largest current that is not too hot, by doubling and halving."""
    at_rest = too_hot(0.0)
    if at_rest is None:
        return math.nan
    if at_rest:
        return 0.0
    low, high = 0.0, 1.0
    while not too_hot(high):
        low, high = high, 2.0 * high
        if high > 1e9:
            return math.inf
    for _ in range(_STEPS):
        middle = 0.5 * (low + high)
        if too_hot(middle):
            high = middle
        else:
            low = middle
    return low
