"""The half-sine shock: its size, its velocity change, and its response through a resonance."""

from __future__ import annotations

import numpy as np
import pytest
from drives import outputs
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import PolesZeros, SecondOrder
from frontend_sim.stimulus.half_sine import HalfSine


@given(
    peak=st.floats(-50.0, 50.0).map(lambda v: round(v, 9)),
    length=st.floats(1e-5, 1.0),
    at=st.floats(0.0, 2.0).map(lambda v: round(v, 9)),
)
def test_the_peak_stands_in_the_middle(peak: float, length: float, at: float) -> None:
    """Zero at both ends, the peak in the middle, 1/sqrt 2 of it a quarter from either end."""
    (drive,) = HalfSine(peak=peak, length=length, at=at, baseline=1.0).drives((1,))
    times = at + length * np.array([0.0, 0.25, 0.5, 0.75, 1.0])
    level = drive.values(times) - 1.0
    expected = peak * np.array([0.0, np.sqrt(0.5), 1.0, np.sqrt(0.5), 0.0])
    slack = abs(peak) * np.pi / length * 4.0 * np.spacing(at + length) + 1e-15 * abs(peak) + 1e-15
    np.testing.assert_allclose(level, expected, rtol=1e-14, atol=slack)


def test_the_velocity_change_is_two_over_pi() -> None:
    """An integrator behind the shock ends at 2/pi · peak · length, as IEC 60068-2-27 tabulates.

    100 units over 11 ms give a change of 0.70028 unit seconds; computed from the closed form.
    """
    (drive,) = HalfSine(peak=100.0, length=11e-3, at=1e-3).drives((1,))
    integrator = PolesZeros(poles=(0.0,))
    found = outputs(chain_of([integrator]), [drive], np.array([1e-3, 6.5e-3, 12e-3, 50e-3]))
    change = 2.0 / np.pi * 100.0 * 11e-3
    assert change == pytest.approx(0.70028, abs=5e-6)
    np.testing.assert_allclose(found, [0.0, 0.5 * change, change, change], rtol=1e-13, atol=1e-15)


def test_an_undamped_resonance_shows_its_shock_response() -> None:
    """Primary and residual response of an undamped resonance of period T, in closed form.

    With w = 2 pi/T and p = pi/length: during the shock (sin pt - (p/w) sin wt)/(1 - (p/w)²), after
    it the free swing from the values at its end. Source: any shock and vibration handbook.
    """
    length, f = 10e-3, 73.0
    w, p = 2.0 * np.pi * f, np.pi / length
    stage = SecondOrder(corner=f, quality_factor=1e15)
    (drive,) = HalfSine(peak=1.0, length=length).drives((1,))
    times = np.linspace(0.1e-3, 40e-3, 91)

    def primary(t: np.ndarray[tuple[int], np.dtype[np.float64]]) -> object:
        return (np.sin(p * t) - p / w * np.sin(w * t)) / (1.0 - (p / w) ** 2)

    end = -p / w * np.sin(w * length) / (1.0 - (p / w) ** 2)
    speed = p * (-1.0 - np.cos(w * length)) / (1.0 - (p / w) ** 2)
    t = times - length
    free = end * np.cos(w * t) + speed / w * np.sin(w * t)
    true = np.where(times < length, primary(times), free)
    found = outputs(chain_of([stage]), [drive], times)
    np.testing.assert_allclose(found, true, rtol=0, atol=1e-12)
