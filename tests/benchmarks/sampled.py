"""The references a competent user would write: vectorised sampling of one motor on one gearhead."""

import numpy as np


def sample_profile(case, rate_hz):
    """Driven-shaft speed, acceleration and torque of a case at a fixed rate, dwell included."""
    speed, acceleration, torque, held = [], [], [], []
    mechanism = case.mechanism
    for segment in case.segments:
        for phase in segment.phases:
            tau = np.arange(0.0, phase.duration_s, 1.0 / rate_hz)
            x, v, a, _ = phase.kinematics(tau)
            s = np.sign(v)
            F = mechanism.efforts(x, v, a, s, segment.payload, segment.process_effort).total
            r = mechanism.ratio_at(x)[0]
            k = np.where(F * s > 0, 1 / mechanism.efficiency_forward, mechanism.efficiency_back)
            k = np.where(s == 0, 1.0, k)
            speed.append(r * v)
            acceleration.append(r * a)
            torque.append(F / r * k + mechanism.shaft_inertia_kg_m2 * r * a + mechanism.shaft_friction_nm * s)
            held.append(np.full(len(tau), 0.0 if segment.brake_closed else 1.0))
    return tuple(np.concatenate(part) for part in (speed, acceleration, torque, held))


def sampled_set(profile, rate_hz, n, eta, eta_b, J, J_g, T_c, T_0, b, K, R):
    """RMS and peak torque, motoring and regenerated air-gap energy, peak voltage of one pair."""
    speed, acceleration, torque, held = profile
    s = np.sign(speed)
    k = np.where(torque * s > 0, 1.0 / eta, eta_b)
    k = np.where(s == 0, held, k)
    T = (J + J_g) * n * acceleration + k * torque / n + (T_c + T_0) * s + b * n * speed
    P = T * (n * speed)
    rms = np.sqrt(np.mean(T * T))
    peak = np.max(np.abs(T))
    motoring = np.sum(np.maximum(P, 0.0)) / rate_hz
    regenerated = np.sum(np.maximum(-P, 0.0)) / rate_hz
    voltage = np.max(np.abs(R / K * T + K * n * speed))
    return rms, peak, motoring, regenerated, voltage
