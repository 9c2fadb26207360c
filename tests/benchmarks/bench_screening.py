"""Screening motor × gearhead pairs with every bound and twenty drives, against a loop over pairs at 1 kHz.

The reference holds each pair against a ready 1 kHz profile with numpy, RMS, peak, voltage and energies included, and
picks the drives that carry its current. Both run in one process; memory is the peak of the process.

Run: ``python tests/benchmarks/bench_screening.py [million pairs]``. Goal: at least 1000 times faster, 2e7 pairs/s.
"""

import resource
import statistics
import sys
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[2]))

from actuator_sizing.sizing.demand import build_demand  # noqa: E402
from actuator_sizing.sizing.judging import active_checks, is_binding  # noqa: E402
from actuator_sizing.sizing.screening import screen  # noqa: E402
from tests.benchmarks.bench_candidate import made_case  # noqa: E402
from tests.benchmarks.sampled import sample_profile, sampled_set  # noqa: E402
from tests.made_cases import DRIVE, GEARHEAD, MOTOR, case  # noqa: E402


def scattered(rng, base, count, fixed):
    """`count` parts like `base`, every number scattered by up to a factor of three either way."""
    made = []
    for _ in range(count):
        part = dict(base)
        for key, value in base.items():
            if isinstance(value, float) and np.isfinite(value) and key not in fixed:
                part[key] = value * float(np.exp(rng.uniform(-1.1, 1.1)))
        made.append(part)
    return made


def big_case(motors, gearheads, drives):
    """Catalogs of any size around the axis of the candidate benchmark."""
    rng = np.random.default_rng(1)
    small = made_case()
    fixed_motor = {"resistance_reference_degc", "magnet_reference_degc", "winding_limit_degc", "pole_pairs",
                   "resistance_coefficient_per_k", "magnet_coefficient_per_k", "continuous_ambient_degc",
                   "nominal_voltage_v"}  # fmt: skip
    gears = scattered(rng, GEARHEAD, gearheads, {"efficiency", "efficiency_back"})
    values = {p.name: getattr(small.mechanism, p.field) for p in small.mechanism.parameters}
    values = {name: value for name, value in values.items() if value == value}
    return case(
        small.mechanism.name, values, small.segments,
        motors=scattered(rng, MOTOR, motors, fixed_motor), gearheads=gears,
        drives=scattered(rng, DRIVE, drives, {"efficiency", "bus_voltage_min_v", "bus_voltage_max_v"}),
    )  # fmt: skip


def main(millions):
    """Time both and print one line."""
    gearheads = 1000
    made = big_case(int(millions * 1e6) // gearheads, gearheads, 20)
    demand = build_demand(made)
    checks, limits = active_checks(made.limits)
    binding = tuple(c for c, limit in zip(checks, limits, strict=True) if is_binding(c, limit))
    allowed = {c.key: made.limits[c.key].allowed_utilisation for c in binding}
    times = []
    for _ in range(3):
        start = time.perf_counter()
        answer = screen(made, demand, binding, allowed, "price", keep=20_000, losers=40)
        times.append(time.perf_counter() - start)
    pairs = len(made.motor_parameters) * gearheads
    rate = pairs / statistics.median(times)

    profile = sample_profile(made, 1000)
    m, g, d = made.motor_parameters, made.gearhead_parameters, made.drive_parameters
    rng = np.random.default_rng(2)
    chosen = list(zip(rng.integers(0, len(m), 300), rng.integers(0, gearheads, 300), strict=True))
    start = time.perf_counter()
    for i, j in chosen:
        rms, peak, _, _, voltage = sampled_set(
            profile, 1000, g.ratio[j], g.efficiency[j], g.efficiency_back[j], m.rotor_inertia_kg_m2[i],
            g.inertia_kg_m2[j], m.friction_torque_nm[i], g.no_load_torque_nm[j], m.viscous_friction_nm_s[i],
            m.torque_constant_nm_per_a[i], m.resistance_ohm[i],
        )  # fmt: skip
        K = m.torque_constant_nm_per_a[i]
        _ = (peak / K <= d.peak_current_a) & (rms / K <= d.continuous_current_a) & (voltage < 300.0)
    loop = len(chosen) / (time.perf_counter() - start)
    print(
        f"screening: {rate:.2g} pairs/s ({pairs:.0e} pairs x 20 drives in {statistics.median(times):.2f} s, "
        f"{answer.survivor_count} sets may pass), {rate / loop:,.0f} times the 1 kHz loop ({loop:.2g} pairs/s); "
        f"peak memory {resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024:.0f} MiB"
    )


if __name__ == "__main__":
    main(float(sys.argv[1]) if len(sys.argv) > 1 else 1.0)
