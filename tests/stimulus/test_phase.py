"""The phase of a sinusoid far from its start, against mpmath."""

from __future__ import annotations

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.stimulus.phase import cycles


def _miss(frequency: float, time: float) -> float:
    """Return how far ``cycles`` is from the true phase, round the circle."""
    with mp.workdps(60):
        true = mp.mpf(frequency) * mp.mpf(time)
        difference = mp.mpf(float(cycles(frequency, np.array([time]))[0])) - true
        return float(abs(difference - mp.nint(difference)))


@given(frequency=st.floats(1e-6, 1e9), time=st.floats(1e-9, 1e6))
@settings(max_examples=300)
def test_right_to_the_last_digits_of_a_cycle(frequency: float, time: float) -> None:
    """Up to 1e15 cycles from the start the phase is right to 2.3e-16 of a cycle."""
    assert _miss(frequency, time) <= 2.3e-16


@pytest.mark.parametrize("count", [1e3, 1e6, 1e9, 1e12, 1e15])
def test_a_plain_product_would_drift(count: float) -> None:
    """The reason for the care: the rounded product alone is off by 1e-17 of all cycles or more."""
    times = count / 777.7 * (1.0 + np.arange(50) * 0.0123)
    assert max(_miss(777.7, float(t)) for t in times) <= 2.3e-16
    with mp.workdps(60):
        plain = [float(abs(mp.mpf(777.7 * t) - mp.mpf(777.7) * mp.mpf(t))) for t in times.tolist()]
    assert max(plain) > 1e-17 * count


def test_whole_cycles_have_no_phase() -> None:
    """Integers times powers of two give zero exactly."""
    np.testing.assert_array_equal(cycles(4096.0, np.array([0.0, 0.25, 1e6, 2.0**40])), 0.0)
