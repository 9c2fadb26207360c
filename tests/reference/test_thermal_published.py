"""Thermal figures printed by others.

The letter after each source says how the figure was confirmed: S seen in the source or in an openly published
solution of that textbook, I inputs seen and output computed from the stated definition, M quoted from memory,
D derived from the definition. Textbook rows on intermittent duty with a separate time constant for cooling
(Pillay's and Gupta's self-ventilated machines) are left out: this network has the same resistances running and
at rest.
"""

import math

import numpy as np
import pytest

from actuator_sizing.core.materials import (
    ALUMINIUM_CONSTANT_K,
    THERMAL_CLASSES,
    insulation_life_factor,
    magnet_factor,
    resistance_factor,
    temperature_from_resistance,
)
from actuator_sizing.core.thermal import (
    HeatLoss,
    ThermalNetwork,
    altitude_factor,
    periodic_state,
    steady_state,
    temperatures_after,
    warm_up,
)
from actuator_sizing.core.thermal_kernel import FLOATS, as_floats, coefficients, linearise, sub_steps

NONE = np.full(1, math.nan)
MINUTE = 60.0


def one_body(resistance_k_w, time_constant_s):
    R = np.full(1, float(resistance_k_w))
    return ThermalNetwork(R, NONE, time_constant_s / R, NONE)


def constant_resistance(duration_s, copper_w, speed_w=0.0):
    copper = np.atleast_2d(np.asarray(copper_w, dtype=float))
    speed = np.full_like(copper, speed_w)
    return HeatLoss(np.asarray(duration_s, dtype=float), copper, speed, *[np.zeros(1)] * 4)


def rise_after(net, loss, time_s):
    return temperatures_after(net, loss, 0.0, [time_s]).winding_degc[0]


@pytest.mark.published("A5.1")
def test_two_readings_of_a_heating_curve():
    """Gupta & Singhal, Electric drives, Ex. 4.1 p. 49 [S]: 30 K at 40 min, 45 K at 80 min -> 57.71 min, 60 K."""
    net, loss = one_body(1.0, 57.71 * MINUTE), constant_resistance([MINUTE], [60.0])
    # printed to 0.01 min: 45 K moves by 45 * 0.01/57.71 at most
    assert rise_after(net, loss, 40 * MINUTE) == pytest.approx(30.0, abs=0.01)
    assert rise_after(net, loss, 80 * MINUTE) == pytest.approx(45.0, abs=0.01)


@pytest.mark.published("A5.17")
def test_two_slopes_of_a_heating_curve():
    """Gupta & Singhal, Ex. 4.5 p. 52 [S]: 0.08 K/min at 20 K, 0.06 K/min at 28 K -> final rise 52 K, 400 min."""
    net, loss = one_body(1.0, 400.0 * MINUTE), constant_resistance([MINUTE], [52.0])
    for rise, slope in ((20.0, 0.08), (28.0, 0.06)):
        time = warm_up(net, loss, 0.0, rise).time_to_limit_s
        around = temperatures_after(net, loss, 0.0, [time - MINUTE / 2, time + MINUTE / 2]).winding_degc
        assert np.diff(around)[0] == pytest.approx(slope, rel=1e-6)  # chord over 1 min of a 400 min curve


@pytest.mark.published("A5.2")
def test_machine_as_a_cylinder():
    """J. B. Gupta, Elements of Electric Drives, Ex. 45 p. 144 [S]: final rise 40 K, time constant 11427 s."""
    surface = math.pi * 0.65 * 1.0  # the curved side alone, as the printed time constant confirms
    loss_w = 12.0 * 735.5 * (1.0 / 0.9 - 1.0)  # metric horsepower
    net = ThermalNetwork(np.full(1, 1.0 / (12.0 * surface)), NONE, np.full(1, 400.0 * 700.0), NONE)
    loss = constant_resistance([MINUTE], [loss_w])
    final = steady_state(net, loss, 0.0).winding_degc[0]
    assert final == pytest.approx(40.0, abs=0.5)  # half of the last printed digit
    assert final == pytest.approx(40.0200, abs=5e-5)
    # after one time constant, printed to the second: 63.2 % of the rise
    assert rise_after(net, loss, 11427.0) == pytest.approx(
        final * (1 - math.exp(-1)), abs=final * 1.0 / 11427.0
    )


@pytest.mark.published("A5.3")
def test_half_hour_rating_with_constant_loss():
    """Pillai, A First Course on Electrical Drives, Ex. 7.3 p. 155; Gupta Ex. 48 p. 146 [S]: 60.22 kW for 25 kW."""
    overload = 60.2219 / 25.0
    net = one_body(1.0, 1.5 * 3600.0)
    # constant loss 0.9, copper loss 1 at 25 kW; the speed loss heats the only body
    short = constant_resistance([MINUTE], [overload**2], speed_w=0.9)
    # recomputed figure has six digits: its square times (1 - exp(-1/3)) is good to 1e-5
    assert rise_after(net, short, 1800.0) == pytest.approx(1.9, abs=2e-5)


@pytest.mark.published("A5.6", "A5.18")
@pytest.mark.parametrize(
    ("rated", "short_time", "tau_min", "time_min", "accuracy", "source"),
    [
        (
            20.0,
            51.0446,
            60.0,
            10.0,
            0.5,
            "Dubey, Fundamentals of Electrical Drives, Ex. 4.4 p. 55, prints 51 kW [S]",
        ),
        (100.0, 187.822, 90.0, 30.0, 0.1, "Wadhwa, Ch. 4 Ex. 11 p. 219, prints 187.8 hp [S]"),
    ],
)
def test_short_time_rating_with_copper_loss_only(rated, short_time, tau_min, time_min, accuracy, source):
    net = one_body(1.0, tau_min * MINUTE)
    loss = constant_resistance([MINUTE], [(short_time / rated) ** 2])
    assert rise_after(net, loss, time_min * MINUTE) == pytest.approx(1.0, abs=1e-5), source
    rounded = constant_resistance([MINUTE], [(round(short_time, 0 if accuracy == 0.5 else 1) / rated) ** 2])
    # the printed digits themselves, within their last half
    assert rise_after(net, rounded, time_min * MINUTE) == pytest.approx(1.0, abs=2.0 * accuracy / short_time)


@pytest.mark.published("A5.13")
@pytest.mark.parametrize(
    ("ratio", "factor"), [(0.1, 10.5083), (0.5, 2.54149), (1.0, 1.58198), (2.0, 1.15652)]
)
def test_short_time_loss_factor(ratio, factor):
    """First-order heating, standard drives textbooks [D]: ``1/(1 − exp(−t/τ))``, six digits."""
    net, loss = one_body(1.0, 100.0), constant_resistance([1.0], [factor])
    assert rise_after(net, loss, 100.0 * ratio) == pytest.approx(1.0, abs=1e-5)


@pytest.mark.published("A5.5")
def test_periodic_state_between_two_load_levels():
    """Dubey, Ex. 4.1 p. 47 [S]: 10 s on, 20 s off, 60 s both; 15 K unloaded, minimum 40 K -> 49.9 and 104.4 K."""
    loss = constant_resistance([10.0, 20.0], [104.424, 15.0])
    state = periodic_state(one_body(1.0, 60.0), loss, 0.0)
    assert state.winding_max_degc[0] == pytest.approx(49.9, abs=0.05)  # half of the last printed digit
    assert state.winding_min_degc[0] == pytest.approx(40.0, abs=5e-4)  # 104.424 has six digits
    assert state.winding_max_degc[0] == pytest.approx(49.8903, abs=5e-4)


def two_node_armature():
    """Armature and core of a DC machine; 20 °C coolant inlet rises by 10 K, so that its mean is 25 °C."""
    to_core = to_coolant = np.full(1, 1.0 / (2.0 * 500.0 / 55.0))
    return ThermalNetwork(to_core, to_coolant, np.full(1, 20.0), np.full(1, 50.0))


@pytest.mark.published("A5.11")
def test_two_node_rises_at_nominal_loss():
    """Modelica Standard Library (BSD-3), DCMachines.DCPM_Cooling, documentation [S]: 27.5 K, 55 K, 80 °C."""
    state = periodic_state(two_node_armature(), constant_resistance([10.0], [500.0]), 25.0)
    assert state.housing_mean_degc[0] - 25.0 == pytest.approx(27.5, abs=1e-9)
    assert state.winding_mean_degc[0] == pytest.approx(80.0, abs=1e-9)


@pytest.mark.published("A5.12")
def test_two_node_time_constants():
    """Same machine [I]: eigenvalues of its matrix, 0.714141 s and 4.23586 s, six digits."""
    net, loss = two_node_armature(), constant_resistance([1.0], [500.0])
    k, _ = as_floats(coefficients(net, loss, 25.0), sub_steps(net, loss))
    at = linearise(k, FLOATS, 25.0, 25.0, 500.0, 0.0, 0.0)
    assert -1.0 / at.fast == pytest.approx(0.714141, abs=1e-6)
    assert -1.0 / at.slow == pytest.approx(4.23586, abs=1e-5)


@pytest.mark.published("A5.7")
@pytest.mark.parametrize(
    ("temperature", "factor", "accuracy"),
    [(75, 1.193, 5e-4), (100, 1.289, 5e-4), (125, 1.385, 5e-4), (130, 1.404, 1e-3)],
)
def test_copper_correction_table(temperature, factor, accuracy):
    """Published copper-wire correction table relative to 25 °C, constant 234.5 K as in IEC 60228 [S].

    The last row is printed 1.404 where the constant gives 1.4046: truncated, hence a whole last digit.
    """
    assert resistance_factor(temperature, 25.0, 234.5) == pytest.approx(factor, abs=accuracy)


@pytest.mark.published("A5.8")
def test_temperature_by_resistance():
    """IEC 60034-1 resistance method [constants M, figures D]: 1.200 Ω at 22 °C, 1.560 Ω hot."""
    assert temperature_from_resistance(1.56 / 1.2, 22.0) == pytest.approx(99.1, abs=1e-9)
    assert temperature_from_resistance(1.56 / 1.2, 22.0, ALUMINIUM_CONSTANT_K) == pytest.approx(
        96.1, abs=1e-9
    )
    assert temperature_from_resistance(1.56 / 1.2, 22.0, 234.5) == pytest.approx(98.95, abs=1e-9)


@pytest.mark.published("A5.9")
def test_thermal_classes():
    """IEC 60085 / IEC 62114 class table, as shown at tnlab.org [S]."""
    assert THERMAL_CLASSES == {"A": 105, "E": 120, "B": 130, "F": 155, "H": 180, "N": 200, "R": 220}


@pytest.mark.published("A5.14")
@pytest.mark.parametrize(("excess", "hours"), [(-10.0, 40000.0), (10.0, 10000.0), (25.0, 3535.53)])
def test_life_halving(excess, hours):
    """Montsinger (1930) [M, D]: 20 000 h at class temperature."""
    assert 20000.0 * insulation_life_factor(155.0 + excess, 155.0) == pytest.approx(hours, abs=0.005)


@pytest.mark.published("A5.15")
def test_magnet_drop():
    """Ranges of NdFeB and SmCo5 as published, LIGO laboratory wiki and Modelica materials [I]."""
    assert magnet_factor(120.0, 20.0, -0.0011) == pytest.approx(0.89, abs=1e-12)
    assert 1.0 / magnet_factor(120.0, 20.0, -0.0011) == pytest.approx(1.12360, abs=5e-6)
    assert magnet_factor(150.0, 20.0, -0.00043) == pytest.approx(0.9441, abs=1e-12)


@pytest.mark.published("A5.20")
def test_altitude_lowers_the_permitted_rise():
    """IEC 60034-1 practice as recalled [M, D]: class F rise 105 K at 2500 m becomes 89.25 K."""
    assert 105.0 * altitude_factor(2500.0) == pytest.approx(89.25, abs=1e-9)
    assert math.sqrt(altitude_factor(2500.0)) == pytest.approx(0.921954, abs=1e-6)
