"""Short-time and intermittent load: closed forms of one body, limits, missing data."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from actuator_sizing.core.permissible_load import (
    LoadedMachine,
    intermittent_current,
    short_time_current,
)
from actuator_sizing.core.thermal import ThermalNetwork

NAN = np.array([np.nan])


def one_body(tau, *, resistance=1.0, alpha=0.0, speed_loss=0.0, limit=120.0, ambient=20.0):
    network = ThermalNetwork(np.array([1.0]), NAN, np.array([tau]), NAN)
    return LoadedMachine(network, resistance, alpha, 20.0, speed_loss, ambient, limit)


def two_bodies(alpha=0.0039):
    network = ThermalNetwork(*(np.array([v]) for v in (0.8, 1.2, 50.0, 900.0)))
    return LoadedMachine(network, 1.5, alpha, 25.0, 4.0, 40.0, 155.0)


@given(st.floats(0.01, 5.0), st.floats(0.01, 20.0))
def test_intermittent_of_one_body(on, off):
    """Peak ``q (1 − e^{−on/τ})/(1 − e^{−(on+off)/τ})`` of one body; from first principles."""
    current = intermittent_current(one_body(1.0), on, off)
    expected = math.sqrt(100.0 * math.expm1(-(on + off)) / math.expm1(-on))
    assert current == pytest.approx(
        expected, rel=1e-8
    )  # Newton of the periodic state stops at 1e-11 of the rise


def test_between_continuous_and_short_time():
    machine = two_bodies()
    on = 60.0
    short = short_time_current(machine, on)
    currents = [intermittent_current(machine, on, off) for off in (1e-3, 60.0, 600.0, 1e5)]
    assert currents == sorted(currents)
    assert currents[-1] == pytest.approx(short, rel=1e-6)  # after so long a rest it is cold
    continuous = intermittent_current(machine, on, 0.0)
    assert currents[0] == pytest.approx(continuous, rel=1e-4)


def test_no_room_for_any_load():
    hot = one_body(1.0, speed_loss=200.0)
    assert intermittent_current(hot, 1.0, 0.0) == 0.0
    assert short_time_current(hot, 100.0) == 0.0
    assert short_time_current(hot, 0.1) > 0.0


def test_missing_thermal_data():
    network = ThermalNetwork(NAN, NAN, NAN, NAN)
    machine = LoadedMachine(network, 1.0, 0.0, 20.0, 0.0, 20.0, 120.0)
    assert math.isnan(short_time_current(machine, 10.0))
    assert math.isnan(intermittent_current(machine, 10.0, 10.0))
