"""What the cycles of a case come to together, weighed by their shares of the operating time.

Nothing here decides a verdict: each cycle must pass by itself. The means say what energy, wear and heat follow where
the cycles take turns.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from actuator_sizing.core.duty_types import relative_life
from actuator_sizing.core.quadrature import integrate
from actuator_sizing.core.thermal import HeatLoss, steady_state
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.checks.gearhead import equivalent_exponent
from actuator_sizing.sizing.checks.traction import application_factor
from actuator_sizing.sizing.set_model import SetModel

_MEANS = ("copper_loss_mean_w", "friction_loss_mean_w", "speed_mean_abs_rad_s")
_ROOTS = ("torque_rms_nm", "current_rms_a", "speed_rms_rad_s")
_ENERGIES = ("energy_terminals_motoring_j", "energy_terminals_regenerated_j")


def is_weighed(several: tuple[Sets, ...]) -> bool:
    """Whether the cycles of evaluated sets have shares of time."""
    return len(several) > 1 and any(sets.case.cycle.share > 0.0 for sets in several)


def mix_quantities(several: tuple[Sets, ...], models: tuple[SetModel, ...], index: int) -> dict[str, Any]:
    """Weighed quantities of one set; None where not known.

    Parameters
    ----------
    several : tuple of Sets
        Evaluated sets, once for each cycle; at least one has a share. [-]
    models : tuple of SetModel
        The set in each cycle. [-]
    index : int
        Which of the sets it is. [-]

    Returns
    -------
    dict
        Names carry their unit. [-]

    Notes
    -----
    Means are weighed with the share of time of each cycle, RMS values with its root mean square; what is left of the
    whole time is rest without current. The mean current heats like the mix only where the cycles take turns within
    a time that is short against the time constant of the body in question: ``winding_mix_degc`` and
    ``housing_mix_degc`` are the steady state under the mean loss and hold for the housing where the turns are short
    against ``housing_time_constant_s``. A cycle that goes on for longer heats as if it were alone.
    """
    share = np.nan_to_num(np.array([sets.case.cycle.share for sets in several]))
    span = np.array([sets.case.cycle.duration_s for sets in several])

    def each(name: str) -> Any:
        return np.array([float(getattr(sets.pairs, name)[index]) for sets in several])

    answer: dict[str, Any] = {"rest_share_ratio": float(max(0.0, 1.0 - share.sum()))}
    answer |= {name: float(share @ each(name)) for name in _MEANS}
    answer |= {name: float(np.sqrt(share @ each(name) ** 2)) for name in _ROOTS}
    for name in _ENERGIES:
        answer[name.replace("_j", "_per_hour_j")] = float(3600.0 * (share / span) @ each(name))
    if not several[0].gearheads.is_direct[index]:
        answer["gearhead_equivalent_torque_nm"] = _equivalent(several, share / span, index)
    answer |= _temperatures(models, share)
    answer["relative_thermal_life_ratio"] = _life(several, index, share)
    return answer


def _equivalent(several: tuple[Sets, ...], runs_per_s: Any, index: int) -> float:
    """Equivalent torque at the gearhead's output over all cycles, with the application factor. [N·m]"""
    exponent = float(equivalent_exponent(several[0])[index])
    worked = turned = 0.0
    for sets, often in zip(several, runs_per_s, strict=True):
        d = sets.demand
        speed = np.abs(d.shaft_speed)
        worked += often * float(integrate(d.duration_s, speed * np.abs(d.shaft_torque) ** exponent))
        turned += often * float(integrate(d.duration_s, speed))
    mean = (worked / turned) ** (1.0 / exponent) if turned > 0.0 else 0.0
    return application_factor(several[0]) * mean


def _temperatures(models: tuple[SetModel, ...], share: Any) -> dict[str, float | None]:
    """Steady state under the mean loss of the mix, and how slow the housing is."""
    losses = [model.loss for model in models]
    mean = [
        (loss.copper_loss_w @ loss.duration_s / loss.duration_s.sum(),
         loss.speed_loss_w @ loss.duration_s / loss.duration_s.sum())
        for loss in losses
    ]  # fmt: skip
    whole = np.append(share, max(0.0, 1.0 - share.sum()))
    copper = np.array([[*(float(part[0][0]) for part in mean), 0.0]])
    by_speed = np.array([[*(float(part[1][0]) for part in mean), 0.0]])
    first, network = losses[0], models[0].network
    loss = HeatLoss(
        whole, copper, by_speed,
        first.resistance_coefficient_per_k, first.resistance_reference_degc,
        first.magnet_coefficient_per_k, first.magnet_reference_degc,
    )  # fmt: skip
    state = steady_state(network, loss, models[0].case.surroundings.ambient_degc)
    slow = network.housing_resistance_k_w * network.housing_capacity_j_k
    slow = np.where(network.has_housing, slow, network.winding_resistance_k_w * network.winding_capacity_j_k)
    found = {
        "winding_mix_degc": float(state.winding_degc[0]),
        "housing_mix_degc": float(state.housing_degc[0]),
        "housing_time_constant_s": float(slow[0]),
    }
    return {name: value if np.isfinite(value) else None for name, value in found.items()}


def _life(several: tuple[Sets, ...], index: int, share: Any) -> float | None:
    """Life of the insulation over its life at the winding limit, each cycle in its own equilibrium."""
    limit = float(several[0].motors.winding_limit_degc[index])
    hottest = np.array([float(sets.pairs.winding_max_degc[index]) for sets in several])
    ambient = several[0].surroundings.ambient_degc
    excess = np.append(hottest, ambient) - limit
    whole = np.append(share, max(0.0, 1.0 - share.sum()))
    if not np.isfinite(excess[whole > 0.0]).all():
        return None
    return relative_life(whole[whole > 0.0], excess[whole > 0.0])
