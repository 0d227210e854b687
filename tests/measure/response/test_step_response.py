"""The step response against partial fractions at 60 digits."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
import partial_fractions
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import (
    Gain,
    PolesZeros,
    RcHighpass,
    RcLowpass,
    SecondOrder,
    TransportDelay,
)
from frontend_sim.measure.response.step_response import StepResponse

CASES = {
    "first order": ([], [-1e3], 1e3),
    "double pole": ([], [-1e3, -1e3], 1e6),
    "triple pole": ([], [-50.0] * 3, 50.0**3),
    "high pass, jump": ([0.0], [-1e3], 1.0),
    "two high passes": ([0.0, 0.0], [-1e3, -1e3], 1.0),
    "lead": ([-10.0], [-1e3], 1.0),
    "complex pair": ([], [-1 + 10j, -1 - 10j], 101.0),
    "100 ns to 10 s": ([], [-1e7, -1e3, -0.1], 1e9),
    "12 decades with a double pole": ([-3.0], [-1e6, -1e6, -1e-6], 1e6),
    "integrator": ([], [0.0, -1e3], 1e3),
    "double integrator": ([], [0.0, 0.0], 1.0),
    "integrator with zero": ([-5.0], [0.0, -200.0], 40.0),
    "nonminimum phase": ([100.0], [-1e2, -3e2], -300.0),
    "notch": ([1e3j, -1e3j], [-300 + 900j, -300 - 900j], 1.0),
}


def pairs(roots: Sequence[complex]) -> tuple[tuple[float, float], ...]:
    """Write roots as the stage wants them."""
    return tuple((complex(root).real, complex(root).imag) for root in roots)


@pytest.mark.parametrize("case", CASES.values(), ids=CASES.keys())
def test_is_exact_at_any_time(case: tuple[list[complex], list[complex], float]) -> None:
    """Repeated poles, poles at the origin, rates 12 decades apart: 1e-12 of the largest so far."""
    zeros, poles, gain = case
    response = StepResponse.of(
        chain_of([PolesZeros(poles=pairs(poles), zeros=pairs(zeros), gain=gain)])
    )
    rates = [abs(p) for p in poles if p != 0] or [1.0]
    times = np.geomspace(1e-3 / max(rates), 30.0 / min(rates), 97)
    expected = partial_fractions.step_response(zeros, poles, gain, times)
    found = response.values(times)
    # Of the largest value so far, so that a response that grows is judged at every time.
    largest = np.maximum.accumulate(np.abs(expected))
    assert np.max(np.abs(found - expected) / largest) < 1e-12


def test_slow_mode_keeps_its_relative_accuracy():
    """A response of 1e-7 early in a chain of 100 ns and 1000 s is right to 1e-12 of itself."""
    response = StepResponse.of(chain_of([PolesZeros(poles=pairs([-1e7, -1e-3]), gain=1e4)]))
    times = np.array([1e-4, 3e-3, 0.1])
    expected = partial_fractions.step_response([], [-1e7, -1e-3], 1e4, times)
    np.testing.assert_allclose(response.values(times), expected, rtol=1e-12)


@pytest.mark.parametrize(
    ("stages", "start", "end"),
    [
        ([RcLowpass(resistance=1e4, capacitance=1e-9)], 0.0, 1.0),
        ([RcHighpass(resistance=1e4, capacitance=1e-9)], 1.0, 0.0),
        ([RcHighpass(resistance=1e4, capacitance=1e-9), Gain(gain=2.0)], 2.0, 0.0),
        ([Gain(gain=-3.0)], -3.0, -3.0),
        ([Gain(gain=0.0), RcLowpass(resistance=1.0, capacitance=1.0)], 0.0, 0.0),
        ([PolesZeros(poles=(0.0,), gain=-2.0)], 0.0, -math.inf),
        ([PolesZeros(poles=(0.0, -1.0), zeros=(3.0,), gain=1.0)], 0.0, -math.inf),
        ([PolesZeros(poles=((0.0, 5.0), (0.0, -5.0)), gain=1.0)], 0.0, None),
        ([SecondOrder(corner=1e3, quality_factor=2.0, response="notch")], 1.0, 1.0),
        ([], 1.0, 1.0),
    ],
)
def test_start_and_end(stages, start, end):
    """Start is the direct path, end the DC gain: infinite if it drifts, None if it rings."""
    response = StepResponse.of(chain_of(stages))
    assert response.start == start
    assert response.end == (end if end is None else pytest.approx(end, rel=1e-15))


def test_delay_moves_the_response():
    """Before the delay is over nothing comes; after it, the response without delay does."""
    stages = [RcHighpass(resistance=1e4, capacitance=1e-7)]
    plain = StepResponse.of(chain_of(stages))
    late = StepResponse.of(chain_of([*stages, TransportDelay(delay=0.25)]))
    times = np.array([0.0, 0.125, 0.25, 0.250976562])
    expected = np.concatenate([[0.0, 0.0], plain.values(times[2:] - 0.25)])
    np.testing.assert_array_equal(late.values(times), expected)
    assert late.delay == 0.25


@pytest.mark.parametrize("count", [1, 2, 3, 64, 1000])
def test_equal_steps_agree_with_single_times(count):
    """The response at equal steps is that at the same times, to 1e-13."""
    stages = [
        SecondOrder(corner=1e3, quality_factor=8.0),
        RcHighpass(resistance=1.0, capacitance=1.0),
    ]
    response = StepResponse.of(chain_of(stages))
    single = response.without_delay(3.3e-5 * np.arange(count + 1.0))
    np.testing.assert_allclose(response.evenly(3.3e-5, count), single, rtol=0.0, atol=1e-13)


@pytest.mark.parametrize("first", ["integrator", "high pass"])
def test_an_integrator_hidden_by_a_high_pass_has_an_end(first):
    """1/s times s/(s + a) ends at 1/a, whichever comes first, though states may drift away."""
    a = 200.0
    integrator = PolesZeros(poles=(0.0,))
    high_pass = PolesZeros(poles=(-a,), zeros=(0.0,))
    stages = [integrator, high_pass] if first == "integrator" else [high_pass, integrator]
    response = StepResponse.of(chain_of(stages))
    assert response.end == pytest.approx(1.0 / a, rel=1e-15)
    times = np.geomspace(1e-6, 1e3, 50)
    np.testing.assert_allclose(response.values(times), -np.expm1(-a * times) / a, rtol=1e-13)


@settings(max_examples=40, deadline=None)
@given(
    decades=st.lists(st.floats(-6.0, 6.0), min_size=1, max_size=5),
    times=st.lists(st.floats(1e-8, 1e8), min_size=1, max_size=5),
)
def test_rates_anywhere(decades, times):
    """Any cascade of low passes agrees with its partial fractions to 1e-12 of the step."""
    rates = [10.0 ** round(decade, 2) for decade in decades]
    chain = chain_of([RcLowpass(resistance=1.0, capacitance=1.0 / rate) for rate in rates])
    gain = math.prod(-pole.real for pole in chain.poles)
    expected = partial_fractions.step_response([], list(chain.poles), gain, times)
    found = StepResponse.of(chain).values(np.array(times))
    np.testing.assert_allclose(found, expected, rtol=0.0, atol=1e-12)
