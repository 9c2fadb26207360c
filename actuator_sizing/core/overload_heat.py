"""Heat of events that do not repeat: a constant current for a while from the warm state, and a loaded phase."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.core.parameters import BRUSHED, SINUSOIDAL, MotorParameters
from actuator_sizing.core.thermal_cycle import moved
from actuator_sizing.core.thermal_kernel import ARRAYS, coefficients, linearise
from actuator_sizing.core.thermal_network import HeatLoss, ThermalNetwork

FloatArray = NDArray[np.float64]

#: Heat of the hottest phase while the machine stands at the worst angle, over its mean while turning.
SINUSOIDAL_PHASE_FACTOR, SIX_STEP_PHASE_FACTOR = 2.0, 1.5


def standstill_phase_factor(commutation: NDArray[np.int8]) -> FloatArray:
    """Heat of the hottest phase at standstill over its mean while turning.

    Parameters
    ----------
    commutation : ndarray of int
        Index into `COMMUTATIONS`. [-]

    Returns
    -------
    ndarray
        2 for a sinusoidal machine, ``î² R`` against ``î² R/2``; 1.5 for six-step, ``I² R`` against ``⅔ I² R``; 1 for
        a brushed one. [-]

    Notes
    -----
    Worst electrical angle; with it a hold is allowed ``1/√2`` of the continuous current of a sinusoidal machine.
    """
    factor = np.where(commutation == SINUSOIDAL, SINUSOIDAL_PHASE_FACTOR, SIX_STEP_PHASE_FACTOR)
    return np.asarray(np.where(commutation == BRUSHED, 1.0, factor))


def after_current(
    network: ThermalNetwork,
    motors: MotorParameters,
    ambient_degc: float,
    start: tuple[FloatArray, FloatArray],
    current_a: FloatArray,
    duration_s: FloatArray,
    phase_factor: FloatArray | float = 1.0,
) -> FloatArray:
    """Winding temperature after a constant current, from any state.

    Parameters
    ----------
    network : ThermalNetwork
        Thermal data, fields of shape (B,). [-]
    motors : MotorParameters
        B motors. [-]
    ambient_degc : float
        Temperature of the surroundings. [°C]
    start : tuple of ndarray, shape (B,)
        Winding and housing at the start; the housing is NaN with one body. [°C]
    current_a : ndarray, shape (B,)
        Current in the basis of the motor. [A]
    duration_s : ndarray, shape (B,)
        How long it flows. [s]
    phase_factor : ndarray or float
        Heat of the hottest phase over the mean of all; that phase then stands for the winding, which is exact for an
        event short against the winding's time constant and on the safe side for a longer one. [-]

    Returns
    -------
    ndarray, shape (B,)
        Winding at the end; it rises all the way where the current is an overload. NaN where data is missing. [°C]

    Notes
    -----
    With the current given and a resistance linear in temperature the two-body equations are linear: one exact step.
    """
    nothing = np.zeros((len(motors), 1))
    loss = HeatLoss(
        np.ones(1),
        (motors.resistance_ohm * current_a**2 * phase_factor)[:, None],
        nothing,
        motors.resistance_coefficient_per_k,
        motors.resistance_reference_degc,
        np.zeros(len(motors)),
        np.zeros(len(motors)),
    )
    winding, housing = start[0], np.where(np.isnan(start[1]), ambient_degc, start[1])
    with np.errstate(all="ignore"):
        k = coefficients(network, loss, ambient_degc)
        at = linearise(k, ARRAYS, winding, housing, loss.copper_loss_w[:, 0], nothing[:, 0], nothing[:, 0])
        end = winding + moved(at, ARRAYS, duration_s)[0]
    return np.where(np.isfinite(network.winding_capacity_j_k), end, np.nan)


def phase_excess(
    loss_w: FloatArray,
    phase_factor: FloatArray,
    resistance_k_w: FloatArray,
    time_constant_s: FloatArray,
    hold_s: float,
    cycle_s: float,
) -> FloatArray:
    """Temperature of the hottest phase over the mean of the winding at the end of a hold that returns every cycle.

    Parameters
    ----------
    loss_w : ndarray, shape (B,)
        Copper loss of all phases while holding. [W]
    phase_factor : ndarray, shape (B,)
        Heat of the hottest phase over the mean. [-]
    resistance_k_w : ndarray, shape (B,)
        Winding to housing. [K/W]
    time_constant_s : ndarray, shape (B,)
        Of the winding against the housing. [s]
    hold_s, cycle_s : float
        Duration of the hold and of the cycle, at the same angle each time. [s]

    Returns
    -------
    ndarray, shape (B,)
        ``(f − 1) P R_1 (1 − e^{−t/τ})/(1 − e^{−T/τ})``. [K]

    Notes
    -----
    Each phase has a third of the heat capacity and three times the resistance to the housing, and gives no heat to
    its neighbours; the excess obeys ``τ θ' = (f − 1) P R_1 − θ`` while holding and decays while turning. First
    principles, on the safe side.
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        filled = np.expm1(-hold_s / time_constant_s) / np.expm1(-cycle_s / time_constant_s)
    return np.asarray((phase_factor - 1.0) * loss_w * resistance_k_w * filled)


def insulation_life_factor(winding_degc: float, limit_degc: float) -> float:
    """Life of the insulation over its life at the limit: doubled for every 10 K below, halved for every 10 K above.

    Parameters
    ----------
    winding_degc : float
        Winding temperature that lasts. [°C]
    limit_degc : float
        Temperature that the reference life belongs to. [°C]

    Returns
    -------
    float
        ``2^((ϑ_limit − ϑ)/10 K)``. [-]

    Notes
    -----
    Rule of thumb after Montsinger (1930), no guarantee.

    Examples
    --------
    >>> insulation_life_factor(145.0, 155.0)
    2.0
    """
    return float(2.0 ** ((limit_degc - winding_degc) / 10.0))
