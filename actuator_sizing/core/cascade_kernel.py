"""The sampled cascade as one plain-float loop: run as it stands, or compiled from the same source.

Scalars and unrolled rows on purpose: for five states this is an order of magnitude faster in plain Python than
products of small arrays, and the optional compiler takes the function unchanged.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import cache
from typing import Any

#: Places in the vector of states that is carried from call to call.
(
    CURRENT, MOTOR_SPEED, TWIST, LOAD_SPEED, MOTOR_ANGLE, SPEED_INTEGRATOR, CURRENT_INTEGRATOR,
    LAST_VOLTAGE, FILTERED_SPEED, LAST_SEEN, NOTCH_1, NOTCH_2, DIRECT_CURRENT, DIRECT_INTEGRATOR,
    LAST_DIRECT_VOLTAGE,
) = range(15)  # fmt: skip
STATES = 15

#: What is recorded at every sample, before the step.
RECORDED = ("current", "motor_speed", "twist", "motor_angle", "current_reference", "voltage")
#: The same, of the direct axis of a sinusoidal machine; recorded only where it is simulated.
RECORDED_DIRECT = ("direct_current", "direct_voltage")


def cascade_loop(
    state: Any,
    plant: Any,
    free: Any,
    gains: Any,
    angle: Any,
    speed: Any,
    feedforward: Any,
    load: Any,
    record: Any,
    saturated: Any,
) -> None:
    """Advance the cascade over all samples given.

    Parameters
    ----------
    state : sequence of float, shape (15,)
        States at the start; those at the end afterwards.
    plant, free : tuple of float
        Exact zero-order hold with the two masses coupled, and inside the backlash (`plant.sampled`).
    gains : tuple of float
        Settings of the loops (`control.LoopSettings.row`).
    angle, speed, feedforward, load : sequence of float, shape (n,)
        Commanded angle [rad] and speed [rad/s], current added in advance [A], external torque on the load that
        speeds it up where positive [N·m].
    record : sequence of eight sequences, shape (8, n)
        Takes `RECORDED` and, of a machine in dq states, `RECORDED_DIRECT`.
    saturated : sequence of int, shape (n,)
        Takes 1 where the current was limited, 2 where the voltage was, 3 for both.

    Notes
    -----
    Coulomb friction is implicit in the step: speeds are predicted without it, and the torque that would stop
    them within the step is limited to the Coulomb level. What sticks is exactly at rest, and nothing chatters.

    A machine in dq states (``turn`` > 0) has equal inductances and a current of the direct axis that is commanded to
    zero. Its cross coupling ``i_d' = p ω i_q``, ``i_q' = −p ω i_d`` turns the current by ``p ω h``: half of it before
    and half after the linear step (G. Strang's splitting, SIAM J. Numer. Anal. 5, 1968), exact but for the product
    of both parts, which is of third order in the step. The voltage is held in the frame of the rotor; outside the
    circle ``u_d² + u_q² ≤ u_max²`` it is shortened and keeps its direction.
    """
    # Indexed, not unpacked: the compiler knows the length of a tuple but not that of an array.
    i, w, s, wl, th, iv = state[0], state[1], state[2], state[3], state[4], state[5]
    ii, last_u, wf, last, n1, n2 = state[6], state[7], state[8], state[9], state[10], state[11]
    i_d, iid, last_d = state[12], state[13], state[14]
    (
        ai, aw, as_, al, au, am, ad,
        bi, bw, bs, bl, bu, bm, bd,
        ci, cw, cs, cl, cu, cm, cd,
        di, dw, ds, dl, du, dm, dd,
        ei, ew, es, el, eu, em, ed,
        rigid, gap, coulomb_motor, coulomb_load,
    ) = plant  # fmt: skip
    # Inside the backlash the motor turns without the load and the load without the motor.
    fai, faw, fau, fam = free[0], free[1], free[4], free[5]
    fbi, fbw, fbu, fbm = free[7], free[8], free[11], free[12]
    fci, fcw, fcl, fcu, fcm, fcd = free[14], free[15], free[17], free[18], free[19], free[20]
    fdl, fdd = free[24], free[27]
    fei, few, feu, fem = free[28], free[29], free[32], free[33]
    (
        k_angle, k_speed_forward, k_speed, k_speed_integral, k_speed_back, conditional,
        k_current, k_current_integral, k_current_back, k_emf, current_max, voltage_max,
        reactance, filter_share, delayed, count, period,
        notch, nb0, nb1, nb2, na1, na2,
        turn, keep_d, gain_d, decouple,
    ) = gains  # fmt: skip
    current_out, speed_out, twist_out = record[0], record[1], record[2]
    angle_out, reference_out, voltage_out = record[3], record[4], record[5]
    direct_out, direct_voltage_out = record[6], record[7]
    voltage_max2 = voltage_max * voltage_max
    cosine, sine = math.cos(turn * w), math.sin(turn * w)
    for k in range(len(angle)):
        # what the drive sees
        seen = th
        w_seen = w
        if count > 0.0:
            seen = math.floor(th / count + 0.5) * count
            w_seen = (seen - last) / period
            last = seen
        # position and speed
        w_ref = k_speed_forward * speed[k] + k_angle * (angle[k] - seen)
        if filter_share < 1.0:
            wf = wf + filter_share * (w_ref - wf)
            w_ref = wf
        error = w_ref - w_seen
        wanted = k_speed * error + iv
        if notch > 0.0:
            passed = nb0 * wanted + n1
            n1 = nb1 * wanted - na1 * passed + n2
            n2 = nb2 * wanted - na2 * passed
            wanted = passed
        wanted = wanted + feedforward[k]
        i_ref = wanted
        flag = 0
        if wanted > current_max or wanted < -current_max:
            i_ref = current_max if wanted > 0.0 else -current_max
            flag = 1
            if conditional > 0.0:
                if error * wanted < 0.0:
                    iv = iv + k_speed_integral * error
            else:
                iv = iv + k_speed_integral * error + k_speed_back * (i_ref - wanted)
        else:
            iv = iv + k_speed_integral * error
        # current
        error = i_ref - i
        u = k_current * error + ii + k_emf * w_seen
        limited = u
        u_d = 0.0
        if turn > 0.0:
            u = u + decouple * w_seen * i_d
            asked = iid - k_current * i_d - decouple * w_seen * i
            limited = u
            u_d = asked
            size = u * u + u_d * u_d
            if size > voltage_max2:
                size = voltage_max / math.sqrt(size)
                limited = size * u
                u_d = size * u_d
                flag = flag + 2
            iid = iid - k_current_integral * i_d + k_current_back * (u_d - asked)
        else:
            cross = reactance * w * i
            if u * u + cross * cross > voltage_max2:
                left = voltage_max2 - cross * cross
                limited = math.sqrt(left) if left > 0.0 else 0.0
                if u < 0.0:
                    limited = -limited
                flag = flag + 2
        ii = ii + k_current_integral * error + k_current_back * (limited - u)
        u = limited
        if delayed > 0.0:
            applied = last_u
            last_u = u
            u = applied
            applied = last_d
            last_d = u_d
            u_d = applied
        current_out[k] = i
        speed_out[k] = w
        twist_out[k] = s
        angle_out[k] = th
        reference_out[k] = i_ref
        voltage_out[k] = u
        saturated[k] = flag
        if turn > 0.0:
            direct_out[k] = i_d
            direct_voltage_out[k] = u_d
            turned = cosine * i_d + sine * i
            i = cosine * i - sine * i_d
            i_d = keep_d * turned + gain_d * u_d
        # the plant over one sample
        torque = load[k]
        if rigid > 0.0:
            w_new = bi * i + bw * w + bu * u + bd * torque
            if coulomb_motor > 0.0:
                friction = -w_new / bd
                if friction > coulomb_motor:
                    friction = coulomb_motor
                elif friction < -coulomb_motor:
                    friction = -coulomb_motor
                torque = torque + friction
                w_new = w_new + bd * friction
            th = th + ei * i + ew * w + eu * u + ed * torque
            i = ai * i + aw * w + au * u + ad * torque
            w = w_new
            wl = w_new
        elif -gap < s < gap:
            w_new = fbi * i + fbw * w + fbu * u
            l_new = fdl * wl + fdd * torque
            push = 0.0
            if coulomb_motor > 0.0:
                push = -w_new / fbm
                if push > coulomb_motor:
                    push = coulomb_motor
                elif push < -coulomb_motor:
                    push = -coulomb_motor
            if coulomb_load > 0.0:
                friction = -l_new / fdd
                if friction > coulomb_load:
                    friction = coulomb_load
                elif friction < -coulomb_load:
                    friction = -coulomb_load
                torque = torque + friction
            i_new = fai * i + faw * w + fau * u + fam * push
            s = s + fci * i + fcw * w + fcl * wl + fcu * u + fcm * push + fcd * torque
            th = th + fei * i + few * w + feu * u + fem * push
            w = w_new + fbm * push
            wl = fdl * wl + fdd * torque
            i = i_new
        else:
            shift = 0.0
            if gap > 0.0:
                shift = gap if s > 0.0 else -gap
                s = s - shift
            if coulomb_load > 0.0:
                friction = -(di * i + dw * w + ds * s + dl * wl + du * u + dd * torque) / dd
                if friction > coulomb_load:
                    friction = coulomb_load
                elif friction < -coulomb_load:
                    friction = -coulomb_load
                torque = torque + friction
            push = 0.0
            if coulomb_motor > 0.0:
                push = -(bi * i + bw * w + bs * s + bl * wl + bu * u + bd * torque) / bm
                if push > coulomb_motor:
                    push = coulomb_motor
                elif push < -coulomb_motor:
                    push = -coulomb_motor
            th = th + ei * i + ew * w + es * s + el * wl + eu * u + em * push + ed * torque
            i_new = ai * i + aw * w + as_ * s + al * wl + au * u + am * push + ad * torque
            w_new = bi * i + bw * w + bs * s + bl * wl + bu * u + bm * push + bd * torque
            s_new = ci * i + cw * w + cs * s + cl * wl + cu * u + cm * push + cd * torque + shift
            wl = di * i + dw * w + ds * s + dl * wl + du * u + dm * push + dd * torque
            i = i_new
            w = w_new
            s = s_new
        if turn > 0.0:
            cosine, sine = math.cos(turn * w), math.sin(turn * w)
            turned = cosine * i_d + sine * i
            i = cosine * i - sine * i_d
            i_d = turned
    state[0] = i
    state[1] = w
    state[2] = s
    state[3] = wl
    state[4] = th
    state[5] = iv
    state[6] = ii
    state[7] = last_u
    state[8] = wf
    state[9] = last
    state[10] = n1
    state[11] = n2
    state[12] = i_d
    state[13] = iid
    state[14] = last_d


@cache
def compiled_loop() -> Callable[..., None] | None:
    """`cascade_loop` as machine code, or None where the optional compiler is not installed."""
    from importlib.util import find_spec

    if find_spec("numba") is None:
        return None
    from importlib import import_module

    compiled: Callable[..., None] = import_module("numba").njit(cascade_loop)
    return compiled
