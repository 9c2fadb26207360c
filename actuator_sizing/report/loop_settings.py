"""Units of the settings of the loops, whose names say what `simulate --set` takes."""

from __future__ import annotations

#: In SI and in the motor's kind of ampere; for a linear motor m and N stand for rad and N·m.
SETTING_UNITS = {
    "sample_time_s": "s",
    "position_gain_per_s": "1/s",
    "speed_gain_a_s_per_rad": "A·s/rad",
    "speed_reset_time_s": "s",
    "current_gain_v_per_a": "V/A",
    "current_reset_time_s": "s",
    "speed_feedforward_ratio": "-",
    "torque_feedforward_ratio": "-",
    "back_emf_feedforward_ratio": "-",
    "setpoint_filter_s": "s",
    "notch_rad_s": "rad/s",
    "notch_width_ratio": "-",
    "current_limit_a": "A",
    "voltage_limit_v": "V",
    "reactance_ohm_s": "Ω·s/rad",
    "anti_windup": "",
    "encoder_step_rad": "rad",
    "is_delayed": "",
    "is_dq": "",
}


def setting_unit(name: str) -> str:
    """Unit of one setting, empty where it is a word or a switch.

    Parameters
    ----------
    name : str
        A field of `LoopSettings`.

    Examples
    --------
    >>> setting_unit("current_gain_v_per_a")
    'V/A'
    """
    unit = SETTING_UNITS[name]
    return "" if unit == "-" else unit
