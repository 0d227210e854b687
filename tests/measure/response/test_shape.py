"""Shapes in words, overshoot and undershoot."""

from __future__ import annotations

import math

import numpy as np
import pytest

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import (
    Bessel,
    Butterworth,
    Gain,
    PolesZeros,
    Polynomial,
    RcHighpass,
    RcLowpass,
    SecondOrder,
    TransportDelay,
)
from frontend_sim.analog.stages.base import Stage
from frontend_sim.measure.response.decay import Decay
from frontend_sim.measure.response.shape import Shape, shape_of
from frontend_sim.measure.response.step_response import StepResponse

LOW = RcLowpass(resistance=1e3, capacitance=1e-6)
HIGH = RcHighpass(resistance=1e3, capacitance=1e-6)


def shape(*stages: Stage) -> Shape:
    """Return the shape of a chain."""
    response = StepResponse.of(chain_of(stages))
    moving = response.settles and response.chain.order > 0
    return shape_of(response, Decay.of(response.chain, 1e-10) if moving else None)


@pytest.mark.parametrize(
    ("stages", "word"),
    [
        ([], "no dynamics"),
        ([Gain(gain=3.0), TransportDelay(delay=1.0)], "no dynamics"),
        ([LOW], "first-order"),
        ([HIGH, Gain(gain=2.0)], "first-order"),
        ([LOW, RcLowpass(resistance=1.001e3, capacitance=1e-6)], "overdamped"),
        ([LOW, Gain(gain=2.0), LOW, Gain(gain=2.0)], "critically damped"),
        ([SecondOrder(corner=1e3, quality_factor=0.5)], "critically damped"),
        ([SecondOrder(corner=1e3, quality_factor=0.49)], "overdamped"),
        ([SecondOrder(corner=1e3, quality_factor=0.51)], "underdamped"),
        ([Polynomial(numerator=(1.0,), denominator=(1.0, 3.0, 3.0, 1.0))], "critically damped"),
        ([Polynomial(numerator=(7.0,), denominator=(0.01, 0.14, 0.49))], "critically damped"),
        ([Butterworth(order=3, corner=1.0)], "underdamped"),
        ([PolesZeros(poles=((0.0, 2.0), (0.0, -2.0)))], "undamped"),
        ([PolesZeros(poles=(0.0,))], "integrating"),
    ],
)
def test_words(stages, word):
    """The word follows from the poles; equal means equal within rounding."""
    assert shape(*stages).word == word


@pytest.mark.parametrize("damping", [0.1, 0.5, 1.0 / math.sqrt(2.0), 0.9])
def test_overshoot_of_second_order(damping):
    """exp(-pi z / sqrt(1 - z²)) at t = pi / (w0 sqrt(1 - z²)) (Ogata, from memory)."""
    found = shape(SecondOrder(corner=1e3, quality_factor=0.5 / damping, gain=-3.0))
    root = math.sqrt(1.0 - damping**2)
    assert found.overshoot == pytest.approx(math.exp(-math.pi * damping / root), rel=1e-11)
    assert found.peak_time == pytest.approx(math.pi / (2e3 * math.pi * root), rel=1e-6)
    assert found.peak == pytest.approx(-3.0 * (1.0 + found.overshoot), rel=1e-12)
    assert found.undershoot == 0.0
    assert found.reference == "end value"


@pytest.mark.parametrize(("order", "printed"), [(2, 4.321), (3, 8.147), (4, 10.830), (6, 14.251)])
def test_butterworth_overshoot(order, printed):
    """In per cent, at the printed precision (computed from closed forms)."""
    assert 100.0 * shape(Butterworth(order=order, corner=1.0)).overshoot == pytest.approx(
        printed, abs=0.00051
    )


def test_complex_poles_may_not_overshoot():
    """A fast pair of Q = 0.6 behind a slow pole is underdamped, with 0.00 % overshoot."""
    found = shape(LOW, SecondOrder(corner=1e6, quality_factor=0.6))
    assert found.word == "underdamped"
    assert found.overshoot == 0.0


@pytest.mark.parametrize("stages", [[LOW], [LOW, LOW], [LOW] * 5])
def test_real_low_passes_do_not_overshoot(stages):
    """A cascade of RC low passes rises without overshoot, exactly zero in the table."""
    found = shape(*stages)
    assert found.overshoot == 0.0
    assert found.undershoot == 0.0
    assert found.peak == pytest.approx(1.0, rel=1e-14)


def test_bessel_overshoot_is_small():
    """The Bessel low pass of fourth order overshoots by 0.8 to 0.9 % (filter handbooks, memory)."""
    assert 0.008 < shape(Bessel(order=4, corner=1e3)).overshoot < 0.009


def test_first_order_high_pass():
    """Jump to 1, then decay: the jump is the largest excursion and the reference."""
    found = shape(HIGH, Gain(gain=2.0))
    assert (found.reference, found.reference_value) == ("largest excursion", 2.0)
    assert (found.overshoot, found.undershoot, found.peak_time) == (0.0, 0.0, 0.0)


def test_undershoot_of_two_high_passes():
    """y = (1 - x) exp(-x), x = t/RC, is least at x = 2: -exp(-2)."""
    assert shape(HIGH, HIGH).undershoot == pytest.approx(math.exp(-2.0), rel=1e-12)


def test_undershoot_of_butterworth_high_pass():
    """y = sqrt(2) exp(-a t) cos(a t + pi/4) is least at a t = pi/2: -exp(-pi/2)."""
    found = shape(Butterworth(order=2, corner=50.0, response="high-pass"))
    assert found.undershoot == pytest.approx(math.exp(-math.pi / 2.0), rel=1e-11)


def test_band_pass_starts_and_ends_at_zero():
    """Largest excursion of two RC: x exp(-x) at x = 1; there is no start to overshoot."""
    found = shape(HIGH, LOW)
    assert found.reference_value == pytest.approx(math.exp(-1.0), rel=1e-13)
    assert found.peak_time == pytest.approx(1e-3, rel=1e-6)
    assert found.overshoot is None


def test_jump_beyond_the_end():
    """(2 s + 1)/(s + 1) starts at 2 and ends at 1: 100 % overshoot without a complex pole."""
    found = shape(PolesZeros(poles=(-1.0,), zeros=(-0.5,), gain=2.0))
    assert (found.word, found.overshoot, found.peak_time) == ("first-order", 1.0, 0.0)


def test_start_on_the_wrong_side():
    """(100 - s)/(100 + s) starts at -1 and ends at 1: 100 % undershoot."""
    found = shape(PolesZeros(poles=(-100.0,), zeros=(100.0,), gain=-1.0))
    assert found.undershoot == pytest.approx(1.0, rel=1e-15)
    assert found.overshoot == 0.0


def test_delay_counts_in_the_time_of_the_peak():
    """The peak comes later by the delay."""
    pair = SecondOrder(corner=1e3, quality_factor=2.0)
    plain, late = shape(pair), shape(pair, TransportDelay(delay=0.5))
    assert late.peak_time == pytest.approx(plain.peak_time + 0.5, rel=1e-12)
    assert late.overshoot == plain.overshoot


def test_no_end_no_percentages():
    """What drifts or rings for ever has no overshoot."""
    assert shape(PolesZeros(poles=(0.0,))).overshoot is None
    assert np.isinf(StepResponse.of(chain_of([PolesZeros(poles=(0.0,))])).end)
