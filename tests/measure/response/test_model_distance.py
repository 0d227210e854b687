"""Discrete models: their frequency response, and their distance from exact."""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
import pytest
from scipy import signal

from frontend_sim.analog.chain import Chain, chain_of
from frontend_sim.analog.discretize import METHODS
from frontend_sim.analog.stages import Butterworth, RcHighpass, RcLowpass, SecondOrder
from frontend_sim.measure.response.frequency_domain import FrequencyDomain
from frontend_sim.measure.response.grid_model import GridModel
from frontend_sim.measure.response.model_distance import Exact, ModelDistance, model_distance
from frontend_sim.measure.response.step_response import StepResponse

RATE = 20e3


def low_pass(corner: float) -> RcLowpass:
    """Return an RC low pass of a corner [Hz]."""
    return RcLowpass(resistance=1.0, capacitance=1.0 / (2.0 * math.pi * corner))


def distance(
    chain: Chain, method: str, prewarp: float | None = None, rate: float = RATE
) -> ModelDistance:
    """Return the distance of a model; one unit is 1000 LSB."""
    response = StepResponse.of(chain)
    frequency = FrequencyDomain.of(response, RATE)
    exact = Exact.of(response, frequency.corners, frequency.largest.value, rate, RATE / 2, 1e3)
    return model_distance(exact, GridModel.of(chain, method, rate, prewarp), prewarp)


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize(
    "stages",
    [
        [low_pass(1e3), low_pass(3e3)],
        [RcHighpass(resistance=1e3, capacitance=1e-7)],
        [SecondOrder(corner=4e3, quality_factor=3.0), low_pass(500.0)],
    ],
)
def test_frequency_response_agrees_with_scipy(method, stages):
    """The model's frequency response is that of scipy's discrete system, to 1e-10."""
    chain = chain_of(stages)
    system = (chain.a, chain.b[:, None], chain.c[-1:], [[chain.d[-1]]])
    a, b, c, d, _ = signal.cont2discrete(system, 1.0 / RATE, method=method)
    frequency = np.geomspace(1.0, 0.5 * RATE, 50)
    z = np.exp(2j * np.pi * frequency / RATE)
    expected = [(c @ np.linalg.solve(zi * np.eye(len(a)) - a, b) + d)[0, 0] for zi in z]
    found = GridModel.of(chain, method, RATE, None).response(frequency)
    np.testing.assert_allclose(found, expected, rtol=1e-10, atol=1e-12)


def test_bilinear_shows_the_chain_at_warped_frequencies():
    """H_d(f) = H(tan(pi f h) / (pi h)), the definition of the transform."""
    chain = chain_of([Butterworth(order=6, corner=3e3)])
    frequency = np.geomspace(1.0, 0.45 * RATE, 60)
    found = GridModel.of(chain, "bilinear", RATE, None).response(frequency)
    expected = chain.response(np.tan(np.pi * frequency / RATE) * RATE / np.pi)
    np.testing.assert_allclose(found, expected, rtol=1e-9)


def test_bilinear_warping_at_a_tenth_of_the_rate():
    """A corner at f/fs = 0.1 is found 3.108 % too low, atan(pi/10)/(pi/10) - 1 (closed form)."""
    (corner,) = distance(chain_of([low_pass(2e3)]), "bilinear").corners
    assert corner.warping == pytest.approx(math.atan(0.1 * math.pi) / (0.1 * math.pi) - 1, rel=1e-9)
    assert 100.0 * corner.warping == pytest.approx(-3.108, abs=6e-4)


def test_prewarped_bilinear_keeps_its_frequency():
    """Pre-warped at the corner, the corner and all of the response there are exact."""
    found = distance(chain_of([Butterworth(order=2, corner=2e3)]), "bilinear", prewarp=2e3)
    assert found.prewarp == 2e3
    assert abs(found.corners[0].warping) < 1e-12
    assert abs(found.corners[0].at_corner.magnitude) < 1e-11
    assert abs(found.corners[0].at_corner.phase) < 1e-10


def test_zoh_is_exact_for_a_step_on_the_grid_and_late_for_one_beside_it():
    """Step-invariant: no error on the grid; between points up to 1 - exp(-h/T) of the step."""
    found = distance(chain_of([low_pass(1e3)]), "zoh")
    assert found.step_on_grid < 1e-10
    expected = 1e3 * -math.expm1(-2.0 * math.pi * 1e3 / RATE)
    assert found.step_anywhere == pytest.approx(expected, rel=1e-12)


def test_bilinear_step_of_a_low_pass():
    """At the step's own point the model is at k/(1 + k) of the step, k = h/2T, the chain at 0."""
    found = distance(chain_of([low_pass(1e3)]), "bilinear")
    k = math.pi * 1e3 / RATE
    assert found.step_on_grid == pytest.approx(1e3 * k / (1.0 + k), rel=1e-12)


def test_zoh_turns_the_phase_by_half_a_step():
    """Far below the grid rate a held input comes half a step late: -180 f/rate degrees."""
    found = distance(chain_of([low_pass(100.0)]), "zoh", rate=200e3)
    # Of an all-pole response the h/2 shows as it is; the next term is of second order in f h.
    assert found.corners[0].at_corner.phase == pytest.approx(-180.0 * 100.0 / 200e3, rel=1e-3)


@pytest.mark.parametrize(("method", "order"), [("zoh", 1), ("foh", 2), ("bilinear", 2)])
def test_order_of_the_phase_or_gain_error(method, order):
    """Doubling the grid rate divides the error of H at the corner by 2^order."""
    chain = chain_of([Butterworth(order=3, corner=500.0)])
    at = np.array([500.0])
    exact = chain.response(at)[0]
    rates = 20e3 * 2.0 ** np.arange(4)
    errors = [abs(GridModel.of(chain, method, r, None).response(at)[0] - exact) for r in rates]
    slopes = np.diff(np.log2(errors))
    np.testing.assert_allclose(slopes, -order, atol=0.05)


def test_bilinear_has_a_zero_at_half_the_grid_rate():
    """What the chain does at infinity, the bilinear model does at half its grid rate."""
    found = distance(chain_of([low_pass(1e3)]), "bilinear")
    assert found.at_half_rate.magnitude == -math.inf


def test_what_the_grid_cannot_show_is_left_out():
    """Above half the grid rate there is no error to tell; a high pass has no corner left there."""
    found = distance(chain_of([low_pass(8e3)]), "foh", rate=10e3)
    assert found.at_half_rate is None
    assert found.corners[0].at_corner is None
    high = RcHighpass(resistance=1.0, capacitance=1.0 / (2.0 * math.pi * 80e3))
    found = distance(chain_of([high]), "foh", rate=10e3)
    assert found.corners[0].model_frequency is None
    assert found.corners[0].warping is None


@pytest.mark.parametrize("method", METHODS)
def test_step_response_of_a_model(method):
    """The step response at far points equals the recursion written out step by step."""
    chain = chain_of([Butterworth(order=4, corner=700.0)])
    model = GridModel.of(chain, method, RATE, None)
    inputs = np.ones(301)
    states = model.model.stop.copy()
    outputs = [states @ model.readout + model.feed]
    for now, following in pairwise(inputs):
        states = (
            states + model.model.e @ states + model.model.start * now + model.model.stop * following
        )
        outputs.append(states @ model.readout + model.feed)
    np.testing.assert_allclose(model.step_response(np.arange(301.0)), outputs, rtol=0.0, atol=1e-13)
