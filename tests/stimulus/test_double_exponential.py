"""The double exponential: IEC 60060-1's times, found again on the signal; response of an RC."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from drives import outputs
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq, minimize_scalar

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import RcLowpass
from frontend_sim.errors import ScenarioError
from frontend_sim.stimulus.double_exponential import DoubleExponential, shape_of
from frontend_sim.stimulus.drive import Drive


def _drive(**values: Any) -> Drive:
    (drive,) = DoubleExponential(**values).drives((1,))
    return drive


def _times_of(drive: Drive, front: float, half: float) -> tuple[float, float, float]:
    """Return front time, time to half value and peak as a test engineer reads them off.

    Front: 1/0.6 of the time from 30 % to 90 %. Half value: from the virtual origin, where the line
    through those points meets zero, to 50 % on the tail. IEC 60060-1, from memory.
    """

    def value(time: float) -> float:
        return float(drive.values(np.array([time]))[0])

    top = minimize_scalar(lambda t: -value(t), bounds=(0.0, 0.9 * half), method="bounded",
                          options={"xatol": 1e-9 * front})  # fmt: skip
    peak = -top.fun
    levels = {
        share: brentq(lambda t, s=share: value(t) - s * peak, 0.0, top.x, xtol=1e-18)
        for share in (0.3, 0.9)
    }
    tail = brentq(lambda t: value(t) - 0.5 * peak, top.x, 20.0 * half, xtol=1e-18)
    found = (levels[0.9] - levels[0.3]) / 0.6
    return found, tail - (levels[0.3] - 0.3 * found), peak


@given(front=st.floats(1e-9, 1e-2), ratio=st.floats(4.2, 1e4))
@settings(max_examples=40, deadline=None)
def test_front_and_half_value_are_found_again(front: float, ratio: float) -> None:
    """For ratios from 4.2 to 1e4 the signal has the asked times to 1e-6, the peak to 1e-9."""
    drive = _drive(peak=3.0, front_time=front, half_time=ratio * front)
    found = _times_of(drive, front, ratio * front)
    np.testing.assert_allclose(found[:2], [front, ratio * front], rtol=1e-6)
    assert found[2] == pytest.approx(3.0, rel=1e-9)


def test_a_negative_surge_points_down() -> None:
    """The sign of the peak turns the surge over; the baseline carries it."""
    up = _drive(peak=2.0, front_time=1.2e-6, half_time=50e-6)
    down = _drive(peak=-2.0, front_time=1.2e-6, half_time=50e-6, baseline=1.0)
    times = np.linspace(0.0, 100e-6, 50)
    np.testing.assert_allclose(down.values(times), 1.0 - up.values(times), rtol=1e-14)


@pytest.mark.parametrize("tau", [47e-6, 1e-3])
def test_through_a_low_pass(tau: float) -> None:
    """Each decay of time constant T gives T/(T - tau) (e^(-t/T) - e^(-t/tau)) behind an RC."""
    rise, decay = 3e-6, 90e-6
    drive = _drive(peak=1.0, rise_constant=rise, decay_constant=decay, at=20e-6)
    top = np.log(decay / rise) / (1.0 / rise - 1.0 / decay)
    height = np.exp(-top / decay) - np.exp(-top / rise)
    times = np.linspace(0.0, 500e-6, 201)
    t = np.maximum(times - 20e-6, 0.0)
    parts = [k / (k - tau) * (np.exp(-t / k) - np.exp(-t / tau)) for k in (decay, rise)]
    found = outputs(chain_of([RcLowpass(resistance=1e3, capacitance=tau / 1e3)]), [drive], times)
    np.testing.assert_allclose(found, (parts[0] - parts[1]) / height, rtol=0, atol=1e-13)


def test_its_own_pole_in_the_chain_is_nothing_special() -> None:
    """A low pass whose time constant equals the decay: t/T e^(-t/T), a double pole in the whole."""
    rise, decay = 2e-5, 1e-3
    drive = _drive(peak=1.0, rise_constant=rise, decay_constant=decay)
    top = np.log(decay / rise) / (1.0 / rise - 1.0 / decay)
    height = np.exp(-top / decay) - np.exp(-top / rise)
    t = np.linspace(0.0, 5e-3, 60)
    fast = rise / (rise - decay) * (np.exp(-t / rise) - np.exp(-t / decay))
    true = (t / decay * np.exp(-t / decay) - fast) / height
    found = outputs(chain_of([RcLowpass(resistance=1e3, capacitance=1e-6)]), [drive], t)
    np.testing.assert_allclose(found, true, rtol=0, atol=1e-13)


@pytest.mark.parametrize(
    ("values", "message"),
    [
        ({}, "give either front_time and half_time"),
        ({"front_time": 1e-6}, "give either"),
        ({"front_time": 1e-6, "half_time": 5e-5, "rise_constant": 1e-7}, "give either"),
        ({"front_time": 1e-6, "half_time": 3e-6}, "at least 4 times"),
        ({"rise_constant": 1e-5, "decay_constant": 1e-6}, "must be shorter"),
        ({"rise_constant": 1e-5, "decay_constant": 1e-5}, "must be shorter"),
        ({"rise_constant": 1e-5, "decay_constant": 1.0000001e-5}, "must be shorter"),
    ],
)
def test_impossible_shapes_are_refused(values: dict[str, float], message: str) -> None:
    """Half a shape, two shapes, and tails that no double exponential has."""
    with pytest.raises(ScenarioError, match=message):
        DoubleExponential(peak=1.0, **values)


def test_short_tails_down_to_the_limit_have_a_shape() -> None:
    """Four times the front time, the shortest that is taken, still converges."""
    shape = shape_of(1.0, 4.0)
    assert 0.0 < shape.rise < shape.decay
