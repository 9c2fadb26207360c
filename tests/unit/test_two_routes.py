"""Exact evaluation against adaptive quadrature of an independent point model."""

import numpy as np
import pytest

from actuator_sizing.core.machine import judge
from actuator_sizing.core.moments import (
    gearhead_products,
    gearhead_rows,
    mean_products,
    motor_columns,
    motor_products,
)
from actuator_sizing.sizing.demand import build_demand
from actuator_sizing.sizing.evaluation import evaluate_pairs
from tests.independent import PointModel
from tests.made_cases import GEARHEAD, MOTOR, case, cycle

# Both routes resolve smooth pieces to rounding; the package interpolates half sine periods on 16 nodes to
# 1e-10, so 1e-9 of the value is what the package promises for integrals.
PROMISED = 1e-9

SCREW = {
    "lead": 0.012, "moving mass": 18.0, "inclination": np.pi / 2, "efficiency": 0.88,
    "guide friction force": 25.0, "guide friction coefficient": 0.02, "viscous friction": 40.0,
    "driven shaft inertia": 1.4e-4, "driven shaft friction torque": 0.03,
}  # fmt: skip

LAWS = (
    "trapezoid", "triangular", "jerk-limited", "3-4-5 polynomial", "4-5-6-7 polynomial", "cycloidal",
    "modified sine", "modified trapezoid", "simple harmonic",
)  # fmt: skip


@pytest.mark.parametrize("law", LAWS)
def test_rms_peak_and_energies_agree_with_adaptive_quadrature(law):
    made = case(
        "ball screw",
        SCREW,
        cycle(
            {"law": law, "displacement": 0.6, "duration_s": 0.9, "payload": 30.0, "process_effort": 60.0},
            {"law": "dwell", "duration_s": 0.4, "payload": 30.0},
            {"law": law, "displacement": -0.6, "duration_s": 0.5, "payload": 4.0},
            {"law": "dwell", "duration_s": 0.7, "brake_closed": True},
        ),
        motors=[{**MOTOR, "peak_torque_nm": np.nan}],
        gearheads=[{**GEARHEAD, "ratio": 3.0}],
    )
    demand = build_demand(made)
    result = evaluate_pairs(demand, made.motor_parameters, made.gearhead_parameters, made.surroundings)
    judged = judge(made.motor_parameters, made.surroundings)
    point = PointModel(made, 0, 0, float(judged.resistance_ohm[0]), float(judged.torque_constant_nm_per_a[0]))
    T = demand.cycle_s
    assert result.torque_rms_nm[0] == pytest.approx(
        np.sqrt(point.integrate(lambda p: p["torque"] ** 2) / T), rel=PROMISED
    )
    assert result.torque_peak_nm[0] == pytest.approx(point.peak("torque"), rel=PROMISED)
    assert result.copper_loss_mean_w[0] == pytest.approx(
        point.integrate(lambda p: p["copper"]) / T, rel=PROMISED
    )
    for boundary in ("shaft", "airgap", "terminals"):
        for sense, sign in (("motoring", 1.0), ("regenerated", -1.0)):
            expected = point.integrate(lambda p, b=boundary, s=sign: np.maximum(s * p[b], 0.0))
            actual = getattr(result, f"energy_{boundary}_{sense}_j")[0]
            # Relative to the energy that flows, since the smaller part is a difference.
            scale = point.integrate(lambda p, b=boundary: np.abs(p[b]))
            assert actual == pytest.approx(expected, abs=PROMISED * scale), (boundary, sense)


@pytest.mark.parametrize("law", ["trapezoid", "cycloidal", "modified sine"])
def test_moments_give_the_same_rms_as_the_nodes(law):
    made = case(
        "ball screw",
        SCREW,
        cycle(
            {"law": law, "displacement": 0.6, "duration_s": 0.9, "payload": 30.0},
            {"law": law, "displacement": -0.6, "duration_s": 0.7},
            {"law": "dwell", "duration_s": 0.4},
        ),
        motors=[MOTOR, {**MOTOR, "rotor_inertia_kg_m2": 5e-4, "friction_torque_nm": 0.0}],
        gearheads=[GEARHEAD, {**GEARHEAD, "ratio": 2.5, "efficiency_back": -0.2}],
    )
    demand = build_demand(made)
    products = mean_products(demand.duration_s, demand.functions)
    m, g = made.motor_parameters, made.gearhead_parameters
    U = motor_products(motor_columns(m.rotor_inertia_kg_m2, m.friction_torque_nm, m.viscous_friction_nm_s))
    V = gearhead_products(products, gearhead_rows(g))
    rows, columns = np.divmod(np.arange(4), 2)
    exact = evaluate_pairs(demand, m.take(rows), g.take(columns), made.surroundings)
    # Same quadrature, other order of summation: rounding of sums of some hundred terms.
    np.testing.assert_allclose(np.sqrt(U @ V).ravel(), exact.torque_rms_nm, rtol=1e-12)
