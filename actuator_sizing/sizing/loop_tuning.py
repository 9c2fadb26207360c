"""Settings of the loops for one set: the default ones for every payload, with what the user replaces."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import fields, replace

from actuator_sizing.core.control import LoopSettings
from actuator_sizing.core.plant import Plant
from actuator_sizing.core.tuning import LinearCascade, Tuning, default_tuning
from actuator_sizing.sizing.axis_plant import AxisPlant, option_number
from actuator_sizing.sizing.simulation_request import wrong

_GAINS = {
    "position_gain_per_s", "speed_gain_a_s_per_rad", "speed_reset_time_s", "current_gain_v_per_a",
    "current_reset_time_s",
}  # fmt: skip


_SWITCHES = {"is_delayed", "is_dq"}


def tuned(axis: AxisPlant, given: Mapping[str, float | str | bool]) -> Tuning:
    """Settings of the loops: the default ones, with what the user replaces.

    Parameters
    ----------
    axis : AxisPlant
        The set. [-]
    given : mapping
        Settings by the names of `LoopSettings`. [-]

    Returns
    -------
    Tuning
        Stable settings. [-]

    Raises
    ------
    InputError
        If a name or value is wrong, or the loops are unstable.
    """
    names = {f.name: f for f in fields(LoopSettings)}
    for name in given:
        if name not in names or name == "sample_time_s":
            raise wrong(name, "an unknown setting", ", ".join(n for n in names if n != "sample_time_s"),
                         "Use one of these names; the sampling rate has its own argument.")  # fmt: skip
        if (name in _SWITCHES) != isinstance(given[name], bool):
            allowed = "yes or no" if name in _SWITCHES else "a number"
            raise wrong(name, repr(given[name]), allowed, "Write for example is_delayed=no.")
    plant = axis.plant()
    turn = option_number(axis.case, "encoder counts per turn")
    base = LoopSettings(
        sample_time_s=1.0 / axis.rate_hz,
        position_gain_per_s=0.0,
        speed_gain_a_s_per_rad=0.0,
        speed_reset_time_s=math.inf,
        current_gain_v_per_a=0.0,
        current_reset_time_s=math.inf,
        current_limit_a=axis.current_limit_a,
        voltage_limit_v=axis.voltage_limit_v,
        reactance_ohm_s=plant.reactance_ohm_s,
        encoder_step_rad=0.0 if math.isnan(turn) else 2.0 * math.pi / turn,
    )
    changed = {name: value for name, value in given.items()}
    try:
        base = replace(base, **{k: v for k, v in changed.items() if k not in _GAINS})  # type: ignore[arg-type]
        tuning = _for_every_payload(axis, base)
        used = replace(tuning.settings, **changed)  # type: ignore[arg-type]
    except (ValueError, TypeError) as error:
        raise wrong("settings", str(error), "settings that mean something", "Change the settings.") from None
    if not changed:
        return tuning
    for one in _payloads(axis):
        radius = LinearCascade(one, used).spectral_radius
        if not radius < 1.0:
            raise wrong(
                "settings",
                f"loops that are unstable (largest pole {radius:.4g} per sample)",
                "poles inside the unit circle",
                "Lower the gains, or sample faster.",
            )
    speed = used.speed_gain_a_s_per_rad * plant.torque_constant_nm_per_a / plant.total_inertia_kg_m2
    current = used.current_gain_v_per_a / plant.inductance_h
    limited = tuning.limited_by if not set(changed) & _GAINS else "stated settings"
    return Tuning(used, current, speed, limited)


def _payloads(axis: AxisPlant) -> list[Plant]:
    """The plants of the cycle, the heaviest first."""
    plants = {axis.plant(segment) for segment in axis.case.segments}
    return sorted(plants, key=lambda plant: -plant.load_inertia_kg_m2)


def _for_every_payload(axis: AxisPlant, base: LoopSettings) -> Tuning:
    """Settings for the heaviest payload with which the lighter ones are stable too."""
    plants = _payloads(axis)
    rise = axis.case.surroundings.current_loop_rise_s
    for plant in plants:
        tuning = default_tuning(plant, base, current_rise_s=rise)
        if all(LinearCascade(other, tuning.settings).spectral_radius < 1.0 for other in plants):
            return tuning
    raise ValueError("no settings of the loops are stable with every payload of the cycle")
