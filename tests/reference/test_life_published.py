"""Rating lives as published; codes S: printed number seen in the source or in an open solution of that textbook."""

import math

import numpy as np
import pytest

from actuator_sizing.core.life import BALL_EXPONENT, rating_life, stated_life
from tests.bare_axis import POUND_FORCE_N, RPM


@pytest.mark.published("A9.1")
def test_rating_life_of_a_ball_bearing():
    """Wentzell, Machine Design, Ex. 20.1 p. 431 [S]: C = 5050 lb, P = 2400 lb, 1750 rpm, 88.73 h."""
    turns = float(
        rating_life(np.float64(5050.0 * POUND_FORCE_N), np.float64(2400.0 * POUND_FORCE_N), BALL_EXPONENT)
    )
    hours = turns * math.tau / (1750.0 * RPM) / 3600.0
    assert hours == pytest.approx(88.73, abs=5e-3)
    assert hours == pytest.approx(88.7260, abs=5e-5)


@pytest.mark.published("A9.2")
def test_required_rating_of_a_bearing():
    """Budynas & Nisbett, Shigley's, Problem 11-1 [S]: 2.5 kN · 1.2 for 25 000 h at 350 rpm is 525 million turns.

    The catalog rating that just reaches it is 24.3 kN with the Weibull constants of the book, whose 90 % point is
    0.02 + 4.439 (ln 1/0.9)^(1/1.483) = 0.9933 of the rating life rather than 1; without it C = P x^(1/3).
    """
    x = 25e3 * 60.0 * 350.0 / 1e6
    assert x == pytest.approx(525.0, rel=1e-12)
    rating_kn = 3.0 * x ** (1.0 / 3.0)
    life = rating_life(np.float64(rating_kn), np.float64(3.0), BALL_EXPONENT)
    assert float(life) == pytest.approx(525e6, rel=1e-12)
    ninety = 0.02 + (4.459 - 0.02) * math.log(1.0 / 0.9) ** (1.0 / 1.483)
    assert 3.0 * (x / ninety) ** (1.0 / 3.0) == pytest.approx(24.2553, abs=5e-5)
    assert 3.0 * (x / ninety) ** (1.0 / 3.0) == pytest.approx(24.3, abs=0.05)


def test_stated_life_is_the_rating_life_twice():
    C, load, speed = 20e3, np.float64(2e3), 100.0
    turns = float(rating_life(np.float64(C), load, BALL_EXPONENT))
    stated = float(rating_life(np.float64(C), np.float64(5e3), BALL_EXPONENT)) * math.tau / 50.0
    life = stated_life(
        np.float64(stated), np.float64(5e3), np.float64(50.0), load, np.float64(speed), BALL_EXPONENT
    )
    assert float(life) == pytest.approx(turns * math.tau / speed, rel=1e-12)
