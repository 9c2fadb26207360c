"""Short-time and intermittent load against published figures.

Sources
-------
[P] S. K. Pillai, A First Course on Electrical Drives, Ex. 7.3, p. 155; also J. B. Gupta, Elements of Electric
    Drives, Ex. 48, p. 146: 25 kW continuous, time constant 1.5 h, half an hour of run, constant losses 0.9
    of the copper losses: 60.2 kW.
[C] The cyclic duration factor is run over run and rest; a worked example with 25 % and 10 min of run is on
    industrialmonitordirect.com.
"""

import numpy as np
import pytest

from actuator_sizing.core.permissible_load import LoadedMachine, rest_time, short_time_current
from actuator_sizing.core.thermal import ThermalNetwork

NAN = np.array([np.nan])


def one_body(tau, *, speed_loss, limit):
    network = ThermalNetwork(np.array([1.0]), NAN, np.array([tau]), NAN)
    return LoadedMachine(network, 1.0, 0.0, 20.0, speed_loss, 20.0, limit)


@pytest.mark.published("A5.3")
def test_short_time_overload_with_constant_losses():
    """[P]: one decimal printed; 60.2219 recomputed."""
    continuous = 1.0  # copper loss at rated load; constant losses 0.9 of it; the rise is their sum
    machine = one_body(5400.0, speed_loss=0.9 * continuous, limit=20.0 + 1.9 * continuous)
    current = short_time_current(machine, 1800.0)
    assert 25.0 * current == pytest.approx(60.2, abs=0.05)
    assert 25.0 * current == pytest.approx(60.2219, abs=5e-5)


@pytest.mark.published("A5.10")
def test_cyclic_duration_factor():
    """[C]: 25 % with 10 min of run leaves 30 min of rest; 40 % of a cycle of 10 min runs 4 min."""
    assert rest_time(600.0, 0.25) == 1800.0
    assert rest_time(240.0, 0.4) == pytest.approx(360.0, rel=1e-12)
    assert rest_time(600.0, 1.0) == 0.0
