"""The DC bus against an independent event-by-event simulation and against closed forms."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from actuator_sizing.core.bus import (
    bus_course,
    bus_cycle,
    clamp_room,
    stored_at_nodes,
    stored_voltage,
)
from actuator_sizing.core.power_runs import bus_pieces, power_runs
from actuator_sizing.core.quadrature import lobatto
from actuator_sizing.core.sign_changes import sign_changes
from actuator_sizing.core.supply import sagged_voltage

SUPPLY_V, ETA = 340.0, 0.93


def cycle_of(seed):
    """Pieces of polynomials and sines with jumps between them, as a drive sees them."""
    rng = np.random.default_rng(seed)
    duration = rng.uniform(0.05, 0.4, 7)
    coefficients = rng.uniform(-900.0, 900.0, (7, 3))
    coefficients[3] = 0.0  # a dwell
    return duration, coefficients


def power_at(coefficients, x):
    a, b, c = coefficients
    return a + b * x + c * np.sin(2.0 * x)


def nodes(duration, coefficients):
    x = lobatto()[0]
    return np.array([[power_at(row, x) for row in coefficients]])


def simulated(duration, coefficients, capacitance, threshold_v, cycles=4, steady_w=0.0):
    """dU/dt = −p/(C U) from event to event: supply conducts at the bottom, chopper clamps at the top."""
    voltage, dumped, supplied, peak, clamp_peak = SUPPLY_V, 0.0, 0.0, SUPPLY_V, 0.0
    trace = []
    for _ in range(cycles):
        dumped = supplied = clamp_peak = 0.0
        peak = voltage
        trace.append(voltage)
        for length, row in zip(duration, coefficients, strict=True):

            def power(t, row=row, length=length):
                p = power_at(row, 2.0 * t / length - 1.0)
                return steady_w + (p / ETA if p > 0.0 else p * ETA)

            t = 0.0 if row.any() or steady_w else length  # nothing happens in a dwell
            while t < length * (1.0 - 1e-12):
                p = power(t + 1e-9 * length)
                if p >= 0.0 and voltage <= SUPPLY_V * (1 + 1e-12):
                    mode = "supply"
                elif p < 0.0 and voltage >= threshold_v * (1 - 1e-12):
                    mode = "chopper"
                else:
                    mode = "float"
                if mode == "float":

                    def rate(t, y, power=power):
                        return [-power(t) / (capacitance * y[0])]

                    def low(t, y):
                        return y[0] - SUPPLY_V

                    def high(t, y):
                        return y[0] - threshold_v

                    low.terminal, low.direction, high.terminal, high.direction = True, -1, True, 1
                    run = solve_ivp(rate, (t, length), [voltage], events=(low, high), rtol=1e-11, atol=1e-9,
                                    max_step=length / 40)  # fmt: skip
                    peak = max(peak, run.y[0].max(), float(voltage))
                    t, voltage = run.t[-1] + 1e-10 * length, run.y[0, -1]
                    if run.t_events[0].size:
                        voltage = SUPPLY_V
                    if run.t_events[1].size:
                        voltage = threshold_v
                else:
                    sense = 1.0 if mode == "supply" else -1.0

                    def ends(t, y, power=power):
                        return power(t)

                    ends.terminal, ends.direction = True, -sense
                    run = solve_ivp(lambda t, y, s=sense: [s * power(t)], (t, length), [0.0], events=ends,
                                    rtol=1e-11, atol=1e-10, max_step=length / 40)  # fmt: skip
                    if mode == "supply":
                        supplied += run.y[0, -1]
                    else:
                        dumped += run.y[0, -1]
                        # The largest power in between, refined: the simulation's own steps are too coarse.
                        fine = np.linspace(t, run.t[-1], 4001)
                        clamp_peak = max(clamp_peak, max(-power(s) for s in fine))
                    t = run.t[-1] + 1e-10 * length
        peak = max(peak, voltage)
    return {"start": trace[-1], "peak": peak, "dumped": dumped, "supplied": supplied, "clamp": clamp_peak}


@pytest.mark.parametrize("seed", range(3))
@pytest.mark.parametrize(("capacitance", "threshold_v"), [(8e-4, 390.0), (4e-3, 400.0), (1.2e-4, 380.0)])
def test_periodic_state_agrees_with_a_simulation(seed, capacitance, threshold_v):
    duration, coefficients = cycle_of(seed)
    expected = simulated(duration, coefficients, capacitance, threshold_v)
    runs = power_runs(duration, nodes(duration, coefficients))
    room = clamp_room(np.array([capacitance]), SUPPLY_V, np.array([threshold_v]))
    state = bus_cycle(runs, np.array([ETA]), room)
    scale = np.abs(runs.energy_j).sum()
    # 1e-6 of the energy that passes: the simulation's tolerance of events, far above rounding.
    voltage = stored_voltage(SUPPLY_V, np.array([capacitance]), state.peak_energy_j)
    assert float(voltage[0]) == pytest.approx(expected["peak"], rel=1e-6)
    start = stored_voltage(SUPPLY_V, np.array([capacitance]), state.start_energy_j)
    assert float(start[0]) == pytest.approx(expected["start"], rel=1e-6)
    assert float(state.dumped_energy_j[0]) == pytest.approx(expected["dumped"], abs=1e-6 * scale)
    assert float(state.supply_energy_j[0]) == pytest.approx(expected["supplied"], abs=1e-6 * scale)
    assert float(state.dumped_power_peak_w[0]) == pytest.approx(expected["clamp"], rel=1e-6)


@pytest.mark.parametrize("seed", range(3))
@pytest.mark.parametrize(
    ("capacitance", "threshold_v", "steady_w"), [(8e-4, 390.0, 40.0), (3e-3, 400.0, 150.0)]
)
def test_what_is_drawn_all_the_time_counts_at_every_instant(seed, capacitance, threshold_v, steady_w):
    duration, coefficients = cycle_of(seed)
    expected = simulated(duration, coefficients, capacitance, threshold_v, cycles=6, steady_w=steady_w)
    terminals = power_runs(duration, nodes(duration, coefficients))
    runs = power_runs(*bus_pieces(terminals, np.array([ETA]), np.array([steady_w])))
    room = clamp_room(np.array([capacitance]), SUPPLY_V, np.array([threshold_v]))
    state = bus_cycle(runs, np.ones(1), room)
    scale = np.abs(runs.energy_j).sum()
    voltage = stored_voltage(SUPPLY_V, np.array([capacitance]), state.peak_energy_j)
    assert float(voltage[0]) == pytest.approx(expected["peak"], rel=1e-6)
    assert float(state.dumped_energy_j[0]) == pytest.approx(expected["dumped"], abs=1e-6 * scale)
    assert float(state.supply_energy_j[0]) == pytest.approx(expected["supplied"], abs=1e-6 * scale)
    assert float(state.dumped_power_peak_w[0]) == pytest.approx(expected["clamp"], rel=1e-6)
    # The pieces at the bus are those of the terminals: same time, same account.
    assert float(runs.run_duration_s().sum()) == pytest.approx(float(duration.sum()), rel=1e-12)
    taken = np.where(terminals.energy_j > 0.0, terminals.energy_j / ETA, terminals.energy_j * ETA).sum()
    assert float(runs.energy_j.sum()) == pytest.approx(taken + steady_w * duration.sum(), rel=1e-12)


@pytest.mark.parametrize("seed", range(4))
def test_stored_energy_at_the_nodes(seed):
    duration, coefficients = cycle_of(seed)
    runs = power_runs(duration, nodes(duration, coefficients) + 400.0)
    state = bus_cycle(runs, np.ones(1), np.array([np.inf]))
    stored = stored_at_nodes(runs, state)[0]
    assert stored[:, 0] == pytest.approx(state.energy_at_run_j[0], abs=1e-12)
    assert stored.max() == pytest.approx(float(state.peak_energy_j[0]), rel=1e-12)
    # Each run ends where the next starts.
    assert stored[:-1, -1] == pytest.approx(state.energy_at_run_j[0, 1:], abs=1e-9)


def test_the_simulated_cycles_reach_both_ends():
    # Without a clamped and a floating phase the comparison above would prove nothing.
    dumped, kept = 0, 0
    for seed in range(6):
        duration, coefficients = cycle_of(seed)
        runs = power_runs(duration, nodes(duration, coefficients))
        state = bus_cycle(runs, np.array([ETA]), clamp_room(np.array([8e-4]), SUPPLY_V, np.array([390.0])))
        dumped += float(state.dumped_energy_j[0]) > 0.0
        kept += float(state.peak_energy_j[0]) > 0.0
    assert dumped >= 3
    assert kept >= 5


@pytest.mark.parametrize("seed", range(20))
def test_energy_account_closes(seed):
    duration, coefficients = cycle_of(seed)
    runs = power_runs(duration, nodes(duration, coefficients))
    state = bus_cycle(runs, np.array([ETA]), clamp_room(np.array([8e-4]), SUPPLY_V, np.array([390.0])))
    taken = np.where(runs.energy_j > 0.0, runs.energy_j / ETA, runs.energy_j * ETA).sum()
    # Rounding of sums over some twenty runs.
    balance = float((state.supply_energy_j - state.dumped_energy_j)[0])
    assert balance == pytest.approx(float(taken), abs=1e-12 * np.abs(runs.energy_j).sum() * 20)


def test_runs_have_one_sign_and_keep_the_energy():
    duration, coefficients = cycle_of(3)
    power = nodes(duration, coefficients)
    runs = power_runs(duration, power)
    total = float(np.sum(duration[:, None] * 0.5 * lobatto()[1] * power[0]))
    assert float(runs.energy_j.sum()) == pytest.approx(total, rel=1e-12)
    for n, piece in enumerate(runs.piece):
        x = np.linspace(runs.begin[0, n], runs.end[0, n], 41)[1:-1]
        values = power_at(coefficients[piece], x)
        assert np.all(values >= -1e-9) or np.all(values <= 1e-9)


def test_without_chopper_net_regeneration_pumps_up_without_end():
    power = np.full((1, 2, 16), -10.0)
    power[0, 1] = 5.0
    state = bus_cycle(power_runs(np.array([1.0, 1.0]), power), np.ones(1), np.array([np.inf]))
    assert np.isinf(state.peak_energy_j[0])
    assert np.isinf(state.start_energy_j[0])


def test_the_start_is_what_the_last_dwell_left():
    # 30 J come back at the end of the cycle and are spent at its start; the dwell between keeps them.
    power = np.stack([np.full(16, 60.0), np.full(16, -30.0), np.zeros(16)])[None]
    state = bus_cycle(power_runs(np.ones(3), power), np.ones(1), np.array([np.inf]))
    assert float(state.start_energy_j[0]) == pytest.approx(30.0, rel=1e-12)
    assert float(state.peak_energy_j[0]) == pytest.approx(30.0, rel=1e-12)
    assert float(state.supply_energy_j[0]) == pytest.approx(30.0, rel=1e-12)


def test_a_pulse_goes_on_over_the_end_of_the_cycle():
    power = np.stack([np.full(16, -20.0), np.full(16, 100.0), np.full(16, -40.0)])[None]
    state = bus_cycle(power_runs(np.ones(3), power), np.ones(1), np.zeros(1))
    assert float(state.dumped_pulse_j[0]) == pytest.approx(60.0, rel=1e-12)
    assert float(state.dumped_power_peak_w[0]) == pytest.approx(40.0, rel=1e-12)


def test_course_passes_through_the_peak_and_returns_to_its_start():
    duration, coefficients = cycle_of(1)
    runs = power_runs(duration, nodes(duration, coefficients))
    room = clamp_room(np.array([8e-4]), SUPPLY_V, np.array([390.0]))
    state = bus_cycle(runs, np.array([ETA]), room)
    time, stored, power = bus_course(runs, np.array([ETA]), room, state)
    assert stored.max() == pytest.approx(float(state.peak_energy_j[0]), rel=1e-12)
    assert stored[-1] == pytest.approx(stored[0], abs=1e-9)
    assert time[-1] == pytest.approx(duration.sum(), rel=1e-12)
    assert np.all(np.diff(time) >= -1e-12)
    assert power.shape == time.shape


def test_candidates_do_not_mix():
    batch = [cycle_of(seed)[1] for seed in (1, 2, 4)]
    duration = cycle_of(1)[0]
    eta, room = np.array([0.9, 0.95, 1.0]), np.array([3.0, np.inf, 0.0])
    together = bus_cycle(power_runs(duration, np.concatenate([nodes(duration, c) for c in batch])), eta, room)
    for k, c in enumerate(batch):
        alone = bus_cycle(power_runs(duration, nodes(duration, c)), eta[k : k + 1], room[k : k + 1])
        for name in ("peak_energy_j", "dumped_energy_j", "dumped_pulse_j", "dumped_power_peak_w"):
            assert getattr(together, name)[k] == pytest.approx(getattr(alone, name)[0], rel=1e-12), name


def test_sag():
    voltage = sagged_voltage(48.0, 0.1, np.array([-500.0, 0.0, 1000.0, 5760.0, 5761.0]))
    assert voltage[:2].tolist() == [48.0, 48.0]
    assert voltage[2] * (48.0 - voltage[2]) / 0.1 == pytest.approx(1000.0, rel=1e-12)
    assert voltage[3] == pytest.approx(24.0, rel=1e-12)  # matched load: half the voltage
    assert voltage[4] == 0.0


def test_sign_changes_in_order():
    from numpy.polynomial import legendre

    polynomial = np.polynomial.Polynomial.fromroots([-0.9, 0.1, 0.15]).convert().coef
    series = np.zeros((2, 2, 5))
    series[1, 0, :4] = legendre.poly2leg(polynomial)
    series[0, 1, 1] = 1.0
    row, piece, position = sign_changes(series)
    assert row.tolist() == [0, 1, 1, 1]
    assert piece.tolist() == [1, 0, 0, 0]
    assert position == pytest.approx([0.0, -0.9, 0.1, 0.15], abs=1e-12)
