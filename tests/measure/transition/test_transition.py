"""Steps and pulses in samples against closed forms of first- and second-order responses."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import SecondOrder
from frontend_sim.errors import MeasureError
from frontend_sim.measure.response.decay import Decay
from frontend_sim.measure.response.settling import settling_time
from frontend_sim.measure.transition import (
    delay,
    droop_of,
    excursions_of,
    rise_time,
    sampled_settling,
)

T = 1e-3
TIMES = np.arange(2000) * 1e-5
FIRST_ORDER = 1.0 - np.exp(-TIMES / T)


def second_order(damping: float, times: np.ndarray) -> np.ndarray:
    """Return the step response of 1 / (s² + 2 z s + 1), any control textbook."""
    root = math.sqrt(1.0 - damping**2)
    return 1.0 - np.exp(-damping * times) / root * np.sin(root * times + math.acos(damping))


@pytest.mark.parametrize("bits", [8, 10, 12])
def test_settling_of_a_first_order_step(bits):
    """To half an LSB it takes ln 2^(N+1) time constants: the next sample is the settled one."""
    exact = T * math.log(2.0 ** (bits + 1))
    found = sampled_settling(TIMES, FIRST_ORDER, 1.0, 2.0 ** -(bits + 1))
    assert found.last_outside <= exact <= found.settled
    assert found.settled - found.last_outside == pytest.approx(1e-5, rel=1e-9)
    assert found.conversions == math.ceil(exact / 1e-5)
    assert found.remaining == len(TIMES) - found.conversions


@pytest.mark.parametrize("damping", [0.1, 0.3, 0.707])
def test_settling_of_samples_and_of_the_response(damping):
    """Fine samples bracket the exact last exit that the response measure gives."""
    times = np.arange(0.0, 120.0, 1e-3)
    chain = chain_of([SecondOrder(corner=1.0 / (2.0 * math.pi), quality_factor=0.5 / damping)])
    exact = settling_time(Decay.of(chain, 0.01), 0.01)
    found = sampled_settling(times, second_order(damping, times), 1.0, 0.01)
    assert found.last_outside <= exact <= found.settled
    assert found.settled - found.last_outside < 1.001e-3


def test_the_last_exit_counts_and_not_the_first_entry():
    """A record that passes through its band comes back; the start may lie anywhere."""
    values = [0.0, 1.0, 1.0, 3.0, 1.1, 0.9, 1.0]
    found = sampled_settling(np.arange(7.0), values, 1.0, 0.1001, start=0.5)
    assert (found.last_outside, found.settled) == (2.5, 3.5)
    assert (found.conversions, found.remaining) == (3, 3)
    calm = sampled_settling(np.arange(7.0), values, 1.0, 0.1001, start=4.0)
    assert (calm.last_outside, calm.settled, calm.conversions) == (None, 0.0, 0)


def test_settling_of_codes():
    """Codes settle within whole LSB; a code on the edge of the band is inside."""
    found = sampled_settling(np.arange(5) * 1e-3, [0, 90, 101, 99, 100], 100, 1)
    assert (found.settled, found.conversions) == (2e-3, 2)


@settings(max_examples=100, deadline=None)
@given(values=st.lists(st.floats(-10.0, 10.0), min_size=1, max_size=60), band=st.floats(0.01, 20.0))
def test_no_later_sample_is_outside(values, band):
    """From the settled sample on all are inside, and the one before is not; or it is refused."""
    times = np.arange(len(values), dtype=float)
    try:
        found = sampled_settling(times, values, 0.0, band)
    except MeasureError:
        assert abs(values[-1]) > band
        return
    first = found.conversions
    assert all(abs(value) <= band for value in values[first:])
    assert first == 0 or abs(values[first - 1]) > band
    assert found.settled == times[first]


@pytest.mark.parametrize(("damping", "percent"), [(0.5, 16.303), (1.0 / math.sqrt(2.0), 4.321)])
def test_overshoot(damping, percent):
    """exp(-pi z / sqrt(1 - z²)): 16.303 % and 4.321 %, Ogata (from memory), list of values.

    Samples every 1e-3 miss the top by 1e-6 of the step at most.
    """
    times = np.arange(0.0, 40.0, 1e-3)
    for height in (2.0, -0.5):
        found = excursions_of(times, height * second_order(damping, times), initial=0.0)
        assert 100.0 * found.overshoot == pytest.approx(percent, abs=6e-4)
        assert found.overshoot_time == pytest.approx(math.pi / math.sqrt(1 - damping**2), abs=1e-3)
        assert found.undershoot < 1e-15


def test_undershoot():
    """A response that first goes the wrong way: 1 - 3 exp(-t) starts at -2 of its end."""
    times = np.arange(0.0, 40.0, 0.1)
    found = excursions_of(times, 1.0 - 3.0 * np.exp(-times), initial=0.0, final=1.0)
    assert (found.undershoot, found.undershoot_time) == (2.0, 0.0)
    assert found.overshoot == 0.0


@pytest.mark.parametrize("height", [1.0, -3.0])
def test_rise_time_and_delay(height):
    """A first-order step rises in T ln 9 = 2.197 T and is delayed by T ln 2 = 0.693 T.

    Straight lines between samples 0.01 T apart are off by 0.01² / 8 of T each at most.
    """
    values = 0.5 + height * FIRST_ORDER
    rise = rise_time(TIMES, values, final=0.5 + height)
    assert rise.value == pytest.approx(T * math.log(9.0), abs=3e-8)
    assert rise.least <= T * math.log(9.0) <= rise.most
    assert rise.most - rise.least == pytest.approx(2e-5, rel=1e-9)
    half = delay(TIMES + 7.0, values, 7.0, final=0.5 + height)
    assert half.value == pytest.approx(T * math.log(2.0), abs=2e-8)
    assert half.least <= T * math.log(2.0) <= half.most


def test_a_step_between_two_samples():
    """A rise within one interval is known to lie below two of them, and not below zero."""
    found = rise_time([0.0, 1.0, 2.0, 3.0], [0.0, 0.0, 1.0, 1.0])
    assert (found.least, found.most) == (0.0, 1.0)
    assert found.value == pytest.approx(0.8, rel=1e-12)


def test_ringing_does_not_stretch_the_rise():
    """A dip below 10 % before the rise, and one below 90 % after it, do not count."""
    values = [0.0, 0.2, 0.0, 0.5, 1.2, 0.8, 1.0]
    found = rise_time(np.arange(7.0), values)
    # From 0.2 after sample 2 to 4/7 after sample 3.
    assert found.value == pytest.approx(1.0 - 0.2 + 4.0 / 7.0, rel=1e-12)


@settings(max_examples=50, deadline=None)
@given(
    scale=st.floats(1e-6, 1e6), move=st.floats(-10.0, 10.0), stretch=st.floats(1e-6, 1e6),
    negative=st.booleans(),
)  # fmt: skip
def test_scale_offset_and_stretch(scale, move, stretch, negative):
    """Times stretch with the axis; ratios do not depend on scale, sign and offset."""
    times = np.arange(0.0, 40.0, 0.05)
    values = second_order(0.4, times)
    sign = -1.0 if negative else 1.0
    moved = sign * scale * (values + move)
    first = excursions_of(times, values, initial=0.0, final=1.0)
    after = excursions_of(
        times * stretch, moved, initial=sign * scale * move, final=sign * scale * (1.0 + move)
    )
    assert after.overshoot == pytest.approx(first.overshoot, abs=1e-9)
    rise = rise_time(times, values)
    found = rise_time(times * stretch, moved)
    assert found.value == pytest.approx(stretch * rise.value, rel=1e-7)


def test_droop_of_a_high_pass():
    """Behind a high pass of time constant T a pulse sinks by 1 - exp(-t/T), at samples exactly."""
    times = np.arange(0.0, 0.02, 1e-4)
    on = (times >= 0.005) & (times < 0.012)
    values = np.where(on, 2.0 * np.exp(-(times - 0.005) / 0.03), -0.1)
    found = droop_of(times, values, 0.005, 0.012)
    assert found.seconds == pytest.approx(0.0069, rel=1e-9)
    assert found.droop == pytest.approx(1.0 - math.exp(-found.seconds / 0.03), rel=1e-12)
    assert found.first == pytest.approx(2.0, rel=1e-12)
    assert found.tilt == pytest.approx(-(2.0 / 0.03) * math.exp(-0.00345 / 0.03), rel=0.005)
    lifted = droop_of(times, values + 5.0, 0.005, 0.012, baseline=5.0)
    assert lifted.droop == pytest.approx(found.droop, rel=1e-9)


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: sampled_settling(TIMES, FIRST_ORDER, 2.0, 0.1), "has not settled 0.02 s after"),
        (lambda: sampled_settling(TIMES, FIRST_ORDER, 1.0, 0.0), "half the width of the band"),
        (lambda: sampled_settling(TIMES, FIRST_ORDER, math.nan, 1.0), "the final level must be"),
        (lambda: sampled_settling(TIMES, FIRST_ORDER, 1.0, 0.1, start=1.0), "no sample follows"),
        (lambda: sampled_settling(TIMES[:5], FIRST_ORDER, 1.0, 0.1), "2,000 samples need as many"),
        (lambda: excursions_of([0.0, 1.0], [1.0, 1.0]), "starts and ends at 1; .* give initial"),
        (lambda: rise_time(TIMES, FIRST_ORDER, final=2.0), "never reaches 90%"),
        (lambda: rise_time(TIMES, 0.5 + FIRST_ORDER, initial=0.0), "starts beyond 10%"),
        (lambda: rise_time(TIMES, FIRST_ORDER, low=0.9, high=0.1), "shares of the way must rise"),
        (lambda: delay(TIMES, FIRST_ORDER, 0.0, initial=-3.0), "starts beyond 50%"),
        (lambda: delay(TIMES, FIRST_ORDER, 0.0, share=1.0), "between 0 and 1"),
        (lambda: droop_of(TIMES, FIRST_ORDER, 1.0, 2.0), "0 samples lie on the top"),
        (lambda: droop_of(TIMES, FIRST_ORDER, 0.0, 0.01), "the pulse has no height"),
    ],
)
def test_refusals(call, message):
    """A record that does not hold the answer is refused, with what it holds."""
    with pytest.raises(MeasureError, match=message):
        call()
