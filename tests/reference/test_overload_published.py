"""Overload models against their standard forms.

Sources
-------
[T] IEC 60255-149 (formerly 60255-8): t = τ ln((I² − I_p²)/(I² − (k I_B)²)), as printed in several public
    relay manuals; the inputs are invented, the results follow from the form.
[D] From the definitions, nothing printed: windowed RMS √(1/w ∫ i²), first order τ dθ/dt = i² − θ.
"""

import numpy as np
import pytest

from actuator_sizing.core.overload import overload_trip_time
from actuator_sizing.core.windows import windowed_rms


@pytest.mark.published("A11.1", "A11.2")
@pytest.mark.parametrize(
    ("current", "preload", "minutes"),
    [(2.0, 0.0, 3.22446), (1.5, 0.0, 6.73345), (2.0, 0.9, 0.961726)],  # [T], digits as shown
)
def test_trip_times(current, preload, minutes):
    time = float(overload_trip_time(600.0, current, 1.05, preload)) / 60.0
    assert time == pytest.approx(minutes, abs=5e-6)


def test_no_trip_at_or_below_the_limit_current():
    assert np.all(np.isinf(overload_trip_time(600.0, [0.5, 1.05], 1.05)))


def pulse(seconds):
    """3 A for some seconds after a long rest, as durations and squares."""
    return np.array([seconds, 1000.0]), np.array([[9.0] * 3, [0.0] * 3])


@pytest.mark.published("A11.3")
def test_window_and_first_order_are_different_models():
    # [D]: 3 A, continuous limit 1.5 A, window 10 s and time constant 10 s.
    rms, _ = windowed_rms(*pulse(2.0), 10.0)
    assert float(rms) == pytest.approx(1.34164, abs=5e-6)
    # The first-order model holds √θ = 1.27727 A by then; half its last digit is 2e-5 s here.
    assert float(overload_trip_time(10.0, 3.0, 1.27727)) == pytest.approx(2.0, abs=2e-5)
    # The window reaches 1.5 A after 2.5 s of the pulse, the first-order model later.
    assert float(windowed_rms(*pulse(2.5), 10.0)[0]) == pytest.approx(1.5, rel=1e-12)
    assert float(overload_trip_time(10.0, 3.0, 1.5)) == pytest.approx(2.87682, abs=5e-6)
