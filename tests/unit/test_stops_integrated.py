"""Stops, falls and hot events against event-by-event integration of the equations of motion, current and heat.

The reference integrates with DOP853 at 1e-11 and stops at events (brake closes, rest, fall back); what it is held
against are closed forms and quadratures, so the tolerance is what the issue of such a stop asks: 1e-6.
"""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from actuator_sizing.core.braking import shorted_current_peak, shorted_torque, stop
from actuator_sizing.core.machine import judge
from actuator_sizing.core.overload_heat import after_current, phase_excess, standstill_phase_factor
from actuator_sizing.sizing.checks.holding import BRAKE_ENERGY
from actuator_sizing.sizing.checks.motor import current_limited_torque, peak_current
from actuator_sizing.sizing.overloads import (
    jam_temperature,
    stop_heating_time,
    stops_temperature,
)
from actuator_sizing.sizing.stops import brake_stops, coasting_stops, controlled_stops, drops, shorted_stops
from actuator_sizing.sizing.thermal_data import thermal_network
from tests.check_cases import LEVEL, LIFT, sets_of

TIGHT = {"rtol": 1e-11, "atol": 1e-12, "method": "DOP853"}
BRAKED = {"motor": {"brake_torque_nm": 2.0}, "motor_columns": {"brake_closing_time": 0.03}}
FAST = {**LIFT, "moving mass": 25.0}


def integrated(speed, inertia, load, friction, delay, braking):
    """(time, largest excursion, energy into the brake) of a stop; load positive where it opposes the motion."""

    def rhs(t, y, on):
        omega = y[1]
        rub = friction * np.sign(omega)
        return [omega, (-load - rub - (braking(abs(omega)) * np.sign(omega) if on else 0.0)) / inertia,
                braking(abs(omega)) * abs(omega) if on else 0.0]  # fmt: skip

    def rest(t, y, on):
        return y[1]

    rest.terminal = True
    t, y, most = 0.0, np.array([0.0, speed, 0.0]), 0.0
    moving = speed > 0.0
    for until, on in ((delay, False), (delay + 1e3, True)):
        while t < until:
            if not moving:
                if on or abs(load) <= friction:
                    if on:
                        return t, most, y[2]
                    t = until
                    break
                y[1] = -np.sign(load) * 1e-30  # lets go: the sense of friction is that of the fall
                if load < 0.0:
                    y[1] = 1e-30
            rest.direction = -np.sign(y[1])
            events = rest if abs(y[1]) > 1e-20 else None
            found = solve_ivp(rhs, (t, until), y, args=(on,), events=events, **TIGHT)
            t, y = float(found.t[-1]), found.y[:, -1].copy()
            most = max(most, float(np.max(np.abs(found.y[0]))), abs(y[0]))
            moving = not (events and len(found.t_events[0]))
            if on and not moving:
                return t, most, y[2]
    return t, most, y[2]


STARTS = [
    pytest.param(120.0, -0.3, id="lowering"),
    pytest.param(120.0, 0.3, id="lifting"),
    pytest.param(5.0, 0.9, id="lifting, falls back while the brake closes"),
    pytest.param(0.0, -0.4, id="dropped from rest"),
    pytest.param(90.0, 0.0, id="level"),
]


@pytest.mark.parametrize(("speed", "load"), STARTS)
@pytest.mark.parametrize("delay", [0.0, 0.02, 0.09])
def test_stop_with_constant_torque(speed, load, delay):
    inertia, friction, torque = 4e-4, 0.05, 2.2
    one = np.ones(1)
    found = stop(speed * one, inertia * one, load * one, friction * one, delay * one, torque * one)
    t, most, energy = integrated(speed, inertia, load, friction, delay, lambda omega: torque)
    # A fall from rest has no sense beforehand: its way counts from where it was held.
    assert float(found.time_s[0]) == pytest.approx(t, rel=1e-6, abs=1e-9)
    assert float(found.angle_rad[0]) == pytest.approx(most, rel=1e-6, abs=1e-9)
    assert torque * float(found.braking_angle_rad[0]) == pytest.approx(energy, rel=1e-6, abs=1e-9)


@pytest.mark.parametrize("reactance", [0.0, 0.016, 0.2])
@pytest.mark.parametrize("load", [0.3, 0.0])
def test_stop_by_a_shorted_winding_with_reactance(reactance, load):
    inertia, friction, delay, R, K = 4e-4, 0.05, 0.02, 1.8, 0.5
    one = np.ones(1)

    def torque(omega):
        return K**2 * R * omega / (R**2 + (reactance * omega) ** 2)

    found = stop(180.0 * one, inertia * one, load * one, friction * one, delay * one,
                 lambda omega: shorted_torque(omega, R, K, reactance))  # fmt: skip
    t, most, _ = integrated(180.0, inertia, load, friction, delay, torque)
    assert float(found.time_s[0]) == pytest.approx(t, rel=1e-6)
    assert float(found.angle_rad[0]) == pytest.approx(most, rel=1e-6)


def test_a_steady_shorted_current_stands_for_the_transient_where_the_stop_is_slow():
    """The transient dies out with L/R; where the stop lasts a hundred times as long, the way agrees to a per cent."""
    R, K, L, p, inertia, friction = 1.8, 0.5, 4e-3, 4.0, 0.2, 0.05

    def rhs(t, y):
        i_d, i_q, omega, _ = y
        electrical = p * omega
        return [(-R * i_d + electrical * L * i_q) / L, (-R * i_q - electrical * L * i_d - K * omega) / L,
                (K * i_q - friction) / inertia, omega]  # fmt: skip

    def rest(t, y):
        return y[2] - 1e-6

    rest.terminal = True
    run = solve_ivp(rhs, (0.0, 100.0), [0.0, 0.0, 180.0, 0.0], events=rest, rtol=1e-9, atol=1e-10)
    one = np.ones(1)
    found = stop(180.0 * one, inertia * one, 0.0 * one, friction * one, 0.0 * one,
                 lambda omega: shorted_torque(omega, R, K, p * L))  # fmt: skip
    assert float(found.angle_rad[0]) == pytest.approx(run.y[3, -1], rel=0.01)


@pytest.mark.parametrize(("speed", "reactance"), [(200.0, 0.016), (40.0, 0.016), (300.0, 0.1), (200.0, 1e-4)])
def test_first_peak_of_the_shorted_current(speed, reactance):
    R, K, p = 1.8, 0.5, 4.0
    L, electrical = reactance / p, p * speed

    def rhs(t, y):
        return [(-R * y[0] + electrical * L * y[1]) / L, (-R * y[1] - electrical * L * y[0] - K * speed) / L]

    lasts = max(2.0 * np.pi / electrical, 30.0 * L / R)
    run = solve_ivp(rhs, (0.0, lasts), [0.0, 0.0], dense_output=True, **TIGHT)
    instants = np.linspace(0.0, min(2.0 * np.pi / electrical, lasts), 200_001)
    peak = float(np.max(np.hypot(*run.sol(instants))))
    found = float(shorted_current_peak(np.array([speed]), R, K, reactance)[0])
    # The current of a winding almost without reactance creeps up to its steady value, which is the peak.
    steady = K * speed / np.hypot(R, reactance * speed)
    assert found == pytest.approx(max(peak, steady), rel=1e-6)


def test_a_dc_machine_has_no_overshoot():
    assert float(shorted_current_peak(np.array([100.0]), 2.0, 0.5, 0.0)[0]) == pytest.approx(25.0, rel=1e-12)


# -- through the chain ------------------------------------------------------------------------------
def chain(kind, sets):
    return {"controlled": controlled_stops, "shorted": shorted_stops, "brake": brake_stops,
            "coasting": coasting_stops, "drop": drops}[kind](sets)  # fmt: skip


@pytest.mark.parametrize("kind", ["controlled", "brake", "drop", "shorted", "coasting"])
def test_every_kind_of_stop_of_a_set(kind):
    """The worst of lifting and lowering, loaded and at rest, integrated one by one."""
    values = {**FAST, "inclination": 0.0} if kind in ("shorted", "coasting") else FAST
    sets = sets_of(values=values, **BRAKED, **{"brake torque factor": 0.8})
    r = 2.0 * np.pi / values["lead"]
    gravity = 25.0 * 9.80665 / r * np.sin(values["inclination"])
    inertia = 1.2e-4 + 25.0 / r**2
    friction = 10.0 / r + 0.02
    delay = 0.01 + (0.03 if kind in ("brake", "drop") else 0.0)
    judged = judge(sets.motors, sets.surroundings)
    R, K, X = (float(x[0]) for x in (judged.resistance_ohm, judged.torque_constant_nm_per_a,
                                     judged.reactance_per_speed))  # fmt: skip
    braking = {
        "controlled": lambda omega: float(current_limited_torque(sets)[0]),
        "brake": lambda omega: 1.6,
        "drop": lambda omega: 1.6,
        "shorted": lambda omega: K**2 * R * omega / (R**2 + (X * omega) ** 2),
        "coasting": lambda omega: 0.0,
    }[kind]
    speed = 0.0 if kind == "drop" else 0.2 * r
    runs = [integrated(speed, inertia, load, friction, delay, braking) for load in (gravity, -gravity)]
    found = chain(kind, sets)
    assert float(found.distance[0]) == pytest.approx(max(most for _, most, _ in runs) / r, rel=1e-6)
    assert float(found.time_s[0]) == pytest.approx(max(t for t, _, _ in runs), rel=1e-6)
    if kind in ("controlled", "brake"):
        assert float(found.braking_energy_j[0]) == pytest.approx(max(e for _, _, e in runs), rel=1e-6)


# -- heat -------------------------------------------------------------------------------------------
def two_bodies(sets, current, lasts, factor):
    """Winding after a constant current from the hottest state of the cycle, integrated."""
    m = sets.motors
    net = thermal_network(m, sets.surroundings)
    R_1, R_2, C_1, C_2 = (float(x[0]) for x in (net.winding_resistance_k_w, net.housing_resistance_k_w,
                                                net.winding_capacity_j_k, net.housing_capacity_j_k))  # fmt: skip
    alpha, reference = float(m.resistance_coefficient_per_k[0]), float(m.resistance_reference_degc[0])

    def rhs(t, y):
        copper = factor * float(m.resistance_ohm[0]) * current**2 * (1.0 + alpha * (y[0] - reference))
        between = (y[0] - y[1]) / R_1
        return [(copper - between) / C_1, (between - (y[1] - sets.surroundings.ambient_degc) / R_2) / C_2]

    start = [float(sets.pairs.winding_max_degc[0]), float(sets.pairs.housing_max_degc[0])]
    return float(solve_ivp(rhs, (0.0, lasts), start, **TIGHT).y[0, -1])


def test_jam_heats_as_the_two_bodies_say():
    sets = sets_of(**{"jam duration": 5.0})
    expected = two_bodies(sets, float(peak_current(sets)[0]), 5.0, 2.0)
    assert float(jam_temperature(sets)[0]) == pytest.approx(expected, rel=1e-9)


def test_stops_in_a_row_heat_as_the_two_bodies_say():
    sets = sets_of(values={**LEVEL, "moving mass": 200.0}, gearhead={}, **{"stops in a row": 7.0})
    lasts = float(stop_heating_time(sets)[0])
    braking = float(controlled_stops(sets).time_s[0]) - 0.01
    assert lasts == pytest.approx(13.0 * braking, rel=1e-12)
    expected = two_bodies(sets, float(peak_current(sets)[0]), lasts, 1.0)
    assert float(stops_temperature(sets)[0]) == pytest.approx(expected, rel=1e-9)


def test_one_body_and_unknown_bodies():
    one = sets_of(motor={"thermal_resistance_winding_k_w": 1.7, "thermal_resistance_housing_k_w": np.nan,
                         "winding_time_constant_s": np.nan, "mass_kg": np.nan})  # fmt: skip
    net = thermal_network(one.motors, one.surroundings)
    start = (np.array([50.0]), np.array([np.nan]))
    found = after_current(net, one.motors, 35.0, start, np.array([10.0]), np.array([20.0]))
    R, C = float(net.winding_resistance_k_w[0]), float(net.winding_capacity_j_k[0])
    alpha, loss = 1.0 / 260.0, 1.2 * 100.0
    run = solve_ivp(
        lambda t, y: (loss * (1.0 + alpha * (y - 25.0)) - (y - 35.0) / R) / C, (0.0, 20.0), [50.0], **TIGHT
    )
    assert float(found[0]) == pytest.approx(run.y[0, -1], rel=1e-9)
    nothing = dict.fromkeys(("thermal_resistance_winding_k_w", "thermal_resistance_housing_k_w"), np.nan)
    assert np.isnan(jam_temperature(sets_of(motor=nothing, **{"jam duration": 1.0}))[0])


def test_one_loaded_phase_over_the_mean_of_three():
    """Three phases of a third each, the same angle every cycle, integrated until it repeats."""
    R_1, tau, hold, cycle, P = 0.6, 12.0, 4.0, 20.0, 30.0
    C = tau / R_1

    def rhs(t, y):
        on = (t % cycle) < hold
        heat = P * np.array([0.5 * 4.0 / 3.0, 0.5 / 3.0, 0.5 / 3.0]) if on else np.zeros(3)
        return (heat - y / (3.0 * R_1)) / (C / 3.0)

    y = np.zeros(3)
    for k in range(20):
        for begin, end in ((0.0, hold), (hold, cycle)):
            run = solve_ivp(rhs, (k * cycle + begin + 1e-12, k * cycle + end - 1e-12), y, **TIGHT)
            y = run.y[:, -1]
            if begin == 0.0:
                hottest = y.copy()
    found = phase_excess(np.array([P]), standstill_phase_factor(np.array([2], dtype=np.int8)), np.array([R_1]),
                         np.array([tau]), hold, cycle)  # fmt: skip
    assert float(found[0]) == pytest.approx(hottest[0] - hottest.mean(), rel=1e-6)


def test_brake_coil_heats_the_housing_while_released():
    plain, heated = sets_of(), sets_of(motor={"brake_coil_w": 10.0})
    # 10 W through the 1.1 K/W of the housing, and a little more copper loss from a hotter winding.
    rise = float(heated.pairs.housing_mean_degc[0] - plain.pairs.housing_mean_degc[0])
    assert 11.0 < rise < 11.5


def test_energy_of_the_holding_brake_counts_on_a_level_axis_too():
    columns = {"brake_closing_time": 0.03, "brake_energy_per_stop": 0.01}
    glides = {**LEVEL, "guide friction force": 10.0}
    sets = sets_of(values=glides, motor={"brake_torque_nm": 2.0}, motor_columns=columns)
    assert BRAKE_ENERGY.applies(sets).all()
    assert float(BRAKE_ENERGY.measure(sets).ratio()[0]) > 0.0
    blank = sets_of(values=LEVEL, motor={"brake_torque_nm": 2.0}, motor_columns={"brake_closing_time": 0.03})
    assert not BRAKE_ENERGY.applies(blank).any()
