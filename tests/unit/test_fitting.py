"""Which parts can work together at all, and why the others cannot."""

import actuator_sizing as act
from actuator_sizing.sizing.fitting import misfits
from tests.unit.report_demo import DEMO_CASES, FOLDER, demo_comparison


def test_reasons_add_up_to_the_sets_that_cannot_be_built():
    for name in DEMO_CASES:
        counts = demo_comparison(name).rejections
        assert sum(counts.misfits.values()) == counts.incompatible == counts.sets_total - counts.screened


def test_each_reason_is_counted_by_brute_force():
    case = act.read_case(FOLDER / "tray_lift")
    motors, drives = case.motor_parameters, case.drive_parameters
    serves = {0: drives.serves_brushed, 1: drives.serves_six_step, 2: drives.serves_sinusoidal}
    allowed, bus = case.number("largest bus over nominal voltage"), case.surroundings.bus_nominal_v
    counted = dict.fromkeys(misfits(case), 0)
    linear, overfed, unserved = (
        "a linear motor does not drive this mechanism",
        "the bus is too high for the nominal voltage of the winding",
        "the drive does not commutate the motor",
    )
    for m in range(len(motors)):
        for d in range(len(drives)):
            if motors.is_linear[m]:
                reason = linear
            elif bus > allowed * motors.nominal_voltage_v[m]:
                reason = overfed
            elif not serves[int(motors.commutation[m])][d]:
                reason = unserved
            else:
                continue
            counted[reason] = counted.get(reason, 0) + len(case.gearhead_parameters)
    assert counted == misfits(case)
    assert overfed in counted
    assert unserved in counted
