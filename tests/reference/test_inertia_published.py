"""Moments of inertia and what it takes to move them, against printed and defined values.

Codes: S printed number seen in the source; M quoted from memory and recomputed; D follows from the definition.
"""

import math

import numpy as np
import pytest

from actuator_sizing.core.mechanisms import MECHANISMS
from actuator_sizing.core.mechanisms.screw import solid_cylinder_inertia
from actuator_sizing.core.screws import STEEL_DENSITY_KG_M3
from tests.bare_axis import RPM, axis, ramp

ALUMINIUM_DENSITY_KG_M3 = 2700.0


def disc(mass_kg, radius_m):
    """A disc of any thickness: here one metre, of the density that gives the mass."""
    return solid_cylinder_inertia(2.0 * radius_m, 1.0, mass_kg / (math.pi * radius_m**2))


@pytest.mark.published("A10.1")
def test_disc_with_two_masses_at_the_rim():
    """Physics textbook problem with printed solution, wizedu.com [S]: 1750, 2062.5 kg·m², 294.5 N·m."""
    table = disc(560.0, 2.5)
    assert table == pytest.approx(1750.0, rel=1e-12)
    riders = 2.0 * 25.0 * 2.5**2
    made = axis(
        "rotary load", {"load inertia": table}, ramp(0.0, 15.0 * RPM, duration_s=11.0, payload=riders)
    )
    assert made.demand.load_inertia == pytest.approx(2062.5, rel=1e-12)
    assert made.shaft_torque_nm == pytest.approx(294.5, abs=0.05)
    assert made.shaft_torque_nm == pytest.approx(294.524, abs=5e-4)


@pytest.mark.published("A10.2")
@pytest.mark.parametrize(
    ("child_kg", "inertia", "digits", "acceleration"),
    [(0.0, 56.25, 1e-9, 6.67), (18.0, 84.38, 5.01e-3, 4.44)],
)
def test_disc_pushed_at_the_rim(child_kg, inertia, digits, acceleration):
    """OpenStax College Physics, Example 10.7 [M]: 250 N at 1.50 m; 84.375 kg·m² is printed rounded up."""
    given = {"payload": child_kg * 1.25**2, "duration_s": 1.0}
    made = axis("rotary load", {"load inertia": disc(50.0, 1.5)}, ramp(0.0, acceleration, **given))
    assert made.demand.load_inertia == pytest.approx(inertia, abs=digits)
    # The acceleration has three printed digits, so the torque of 250 N at 1.5 m comes out to half the last.
    assert made.shaft_torque_nm == pytest.approx(250.0 * 1.5, rel=0.005 / acceleration)


@pytest.mark.published("A10.3")
def test_solid_and_hollow_steel_cylinders():
    """Definition m d²/8 [D]; tolerance: the digits given."""
    assert solid_cylinder_inertia(25e-3, 1.0, STEEL_DENSITY_KG_M3) == pytest.approx(0.000301044, abs=5e-10)
    outer, inner = (solid_cylinder_inertia(d, 60e-3, STEEL_DENSITY_KG_M3) for d in (80e-3, 50e-3))
    assert outer - inner == pytest.approx(0.00160500, abs=5e-9)
    mass = 8.0 * solid_cylinder_inertia(25e-3, 1.0, STEEL_DENSITY_KG_M3) / 25e-3**2
    assert mass == pytest.approx(3.85336, abs=5e-6)


@pytest.mark.published("A10.5")
@pytest.mark.parametrize(
    ("mechanism", "size", "mass", "inertia", "digits"),
    [
        ("ball screw", {"lead": 10e-3}, 120.0, 0.000303964, 5e-10),
        ("belt", {"pulley diameter": 60e-3}, 12.0, 0.0108, 1e-14),
        ("rack and pinion", {"pinion diameter": 60e-3}, 12.0, 0.0108, 1e-14),
    ],
)
def test_mass_seen_at_the_shaft(mechanism, size, mass, inertia, digits):
    """Definitions m (l/2π)² and m r² [D], with the mass as carriage and as payload; the digits given."""
    carriage = MECHANISMS[mechanism].from_values({**size, "moving mass": mass})
    empty = MECHANISMS[mechanism].from_values({**size, "moving mass": 0.0})
    assert float(carriage.inertia_at_shaft(np.array(0.0))) == pytest.approx(inertia, abs=digits)
    assert float(empty.inertia_at_shaft(np.array(mass))) == pytest.approx(inertia, abs=digits)


@pytest.mark.published("A10.6")
def test_steel_screw_and_aluminium_hub():
    """Definition [D]: screw 32 mm by 1.4 m; hub 70/32 mm by 66 mm; tolerance: the digits given."""
    size = {"lead": 10e-3, "screw diameter": 32e-3, "screw length": 1.4, "moving mass": 0.0}
    outer, bore = (solid_cylinder_inertia(d, 66e-3, ALUMINIUM_DENSITY_KG_M3) for d in (70e-3, 32e-3))
    assert outer - bore == pytest.approx(0.000401704, abs=5e-10)
    screw = MECHANISMS["ball screw"].from_values(size)
    coupled = MECHANISMS["ball screw"].from_values({**size, "driven shaft inertia": outer - bore})
    assert float(screw.inertia_at_shaft(np.array(0.0))) == pytest.approx(0.00113135, abs=5e-9)
    both = float(coupled.inertia_at_shaft(np.array(0.0)))
    assert both == pytest.approx(0.00113135 + 0.000401704, abs=5e-9)
