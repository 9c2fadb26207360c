"""When not one motor, gearhead and drive fit together, the message says which part is missing."""

import pytest

from actuator_sizing.errors import InputError
from actuator_sizing.sizing.comparison import compare
from tests.made_cases import DRIVE, MOTOR, case, cycle

SEGMENTS = cycle({"law": "trapezoid", "displacement": 0.3, "duration_s": 0.5})
VALUES = {"lead": 0.02, "moving mass": 5.0}


def problem_of(**parts):
    with pytest.raises(InputError) as caught:
        compare(case("ball screw", VALUES, SEGMENTS, **parts))
    (problem,) = caught.value.problems
    return problem


def test_motors_of_the_other_kind():
    problem = problem_of(motors=(dict(MOTOR, is_linear=True),))
    assert (problem.table, problem.got) == ("motors", "linear motors only")
    assert problem.allowed == "at least one rotary motor, which the mechanism 'ball screw' needs"


def test_no_drive_for_the_commutation():
    # The linear motor has a drive, but is of no use to the screw.
    motors = (dict(MOTOR, commutation=0), dict(MOTOR, is_linear=True))
    problem = problem_of(motors=motors, drives=(dict(DRIVE, serves_sinusoidal=True),))
    assert (problem.table, problem.column, problem.got) == (
        "drives",
        "commutation",
        "no drive that serves a motor",
    )


def test_no_winding_for_the_bus():
    problem = problem_of(motors=(dict(MOTOR, nominal_voltage_v=48.0),))
    assert (problem.table, problem.column) == ("motors", "nominal voltage")
    assert "325 V" in problem.got
    assert "largest bus over nominal voltage" in problem.remedy
