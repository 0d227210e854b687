"""Discrete models: their order, what they owe to the exact mode, and the grid picked for them."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from drives import outputs
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import signal

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.discretize import METHODS, bilinear, warped_frequency, zoh
from frontend_sim.analog.stages import Butterworth, RcLowpass, SecondOrder
from frontend_sim.errors import ScenarioError
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate
from frontend_sim.simulation.linear import GridMethod
from frontend_sim.stimulus.drive import Lines
from frontend_sim.stimulus.sine import Tone

CHAIN = chain_of(
    [RcLowpass(resistance=1e3, capacitance=1e-7), SecondOrder(corner=800.0, quality_factor=2.0)]
)
TONE = Tone(1.0, 137.0, 0.3, 0.2)
TIMES = np.arange(1, 60) / 1000.0


def _error(method: Any, rate: float) -> float:
    grid = GridMethod(method, rate)
    exact = outputs(CHAIN, [TONE], TIMES)
    return float(np.max(np.abs(outputs(CHAIN, [TONE], TIMES, grid) - exact)))


@pytest.mark.parametrize(("method", "order"), [("bilinear", 2), ("foh", 2), ("zoh", 1)])
def test_order_of_convergence(method: str, order: int) -> None:
    """The error of a smooth input falls by h² for bilinear and foh, by h for a staircase.

    The slope over four halvings of the step lies within 0.1 of the order.
    """
    rates = 20e3 * 2.0 ** np.arange(5)
    errors = [_error(method, rate) for rate in rates]
    slope = -np.polyfit(np.log2(rates), np.log2(errors), 1)[0]
    assert abs(slope - order) < 0.1


def test_a_step_on_the_grid_is_exact_for_zoh() -> None:
    """Step invariance: a held input that jumps at a grid point leaves no error."""
    step = Lines.of(0.0, [0.005], [1.0])
    exact = outputs(CHAIN, [step], TIMES)
    held = outputs(CHAIN, [step], TIMES, GridMethod("zoh", 1000.0))
    np.testing.assert_allclose(held, exact, rtol=0, atol=1e-14)


def test_a_ramp_on_the_grid_is_exact_for_foh() -> None:
    """Ramp invariance: lines that bend at grid points leave no error."""
    ramp = Lines.of(0.1, [0.005, 0.012], [0.1, 0.8], [100.0, 0.0])
    exact = outputs(CHAIN, [ramp], TIMES)
    joined = outputs(CHAIN, [ramp], TIMES, GridMethod("foh", 1000.0))
    np.testing.assert_allclose(joined[TIMES < 0.012], exact[TIMES < 0.012], rtol=0, atol=1e-14)


@pytest.mark.parametrize("method", METHODS)
def test_matrices_agree_with_scipy(method: Any) -> None:
    """One step of each model against scipy.signal.cont2discrete, as transfer from points to pin."""
    h = 1.0 / 7e3
    system = CHAIN.state_space()
    a, b, c, d, _ = signal.cont2discrete((system.A, system.B, system.C, system.D), h, method)
    z = np.exp(2j * np.pi * np.linspace(0.01, 0.49, 25))
    n = CHAIN.order
    theirs = [(c @ np.linalg.solve(zi * np.eye(n) - a, b) + d)[0, 0] for zi in z]
    model = METHODS[method](CHAIN, h, None)
    ours = [
        CHAIN.c[-1]
        @ np.linalg.solve((zi - 1.0) * np.eye(n) - model.e, model.start + zi * model.stop)
        + CHAIN.d[-1]
        for zi in z
    ]
    np.testing.assert_allclose(ours, theirs, rtol=1e-10)


def test_bilinear_warps_as_the_tangent_says() -> None:
    """At f/fs = 0.1 the bilinear model lies 3.108 % low: (2/T) tan(wT/2); computed value."""
    # The analog frequency that the model shows at 0.1 fs is 0.1 fs / (1 - 0.03108...).
    analog = np.tan(np.pi * 0.1) / np.pi
    assert warped_frequency(analog, 1.0, None) == pytest.approx(0.1, rel=1e-14)
    assert warped_frequency(0.1, 1.0, None) / 0.1 - 1.0 == pytest.approx(-0.03108, abs=5e-6)


def test_prewarping_keeps_one_frequency() -> None:
    """With pre-warp at the corner, the discrete response there equals the continuous one."""
    chain = chain_of([Butterworth(order=4, corner=1e3)])
    h = 1.0 / 8e3
    model = bilinear(chain, h, 1e3)
    z = np.exp(2j * np.pi * 1e3 * h)
    states = np.linalg.solve((z - 1.0) * np.eye(4) - model.e, model.start + z * model.stop)
    value = chain.c[-1] @ states + chain.d[-1]
    np.testing.assert_allclose(value, chain.response(np.array([1e3]))[0], rtol=1e-12)


def test_slow_poles_keep_their_rate() -> None:
    """A pole of 10 s on a grid of 100 MHz decays right to 1e-12 of its own rate.

    A matrix exponential that adds the identity would leave 1e-16 of 1 in a rate of 1e-9.
    """
    chain = chain_of([RcLowpass(resistance=1e6, capacitance=1e-5)])
    model = zoh(chain, 1e-8)
    assert model.e[0, 0] == pytest.approx(np.expm1(-1e-9), rel=1e-14)
    assert model.start[0] == pytest.approx(-np.expm1(-1e-9), rel=1e-14)


def _scenario(stimulus: dict[str, Any], **simulation: Any) -> Scenario:
    return Scenario.model_validate(
        {
            "stimulus": stimulus,
            "chain": [
                {"kind": "rc-lowpass", "resistance": 10e3, "capacitance": 4.7e-9},
                {"kind": "butterworth", "order": 2, "corner": 3e3},
            ],
            "adc": {"rate": 20e3, "bits": 12, "high": 3.3},
            "simulation": {"duration": 0.02, **simulation},
        }
    )


CLOSED_FORMS: list[dict[str, Any]] = [
    {"kind": "sine", "amplitude": 1.5, "frequency": 997.0, "offset": 1.6},
    {"kind": "ramp", "slope": 150.0, "at": 0.003},
    {"kind": "step", "after": 2.0, "at": 0.005},
    {"kind": "half-sine", "peak": 2.5, "length": 0.011, "at": 0.002},
]


@pytest.mark.parametrize("stimulus", CLOSED_FORMS, ids=lambda s: s["kind"])
@pytest.mark.parametrize("method", ["zoh", "foh", "bilinear"])
def test_the_estimate_of_auto_is_an_upper_bound(method: str, stimulus: dict[str, Any]) -> None:
    """A grid picked by "auto" keeps its accuracy, and its estimate covers the true error."""
    accuracy = 0.5 if method == "zoh" else 0.05
    exact = simulate(_scenario(stimulus))
    try:
        scenario = _scenario(stimulus, discretization=method, grid_rate="auto", accuracy=accuracy)
        run = simulate(scenario)
    except ScenarioError as error:
        assert stimulus["kind"] == "step", error  # noqa: PT017 - the refusal is checked below
        return
    assert run.grid is not None
    assert run.grid.estimate is not None
    true = float(np.max(np.abs(run.pin - exact.pin))) / scenario.adc.lsb
    assert true <= run.grid.estimate <= accuracy
    assert run.grid.largest_error == pytest.approx(true, rel=1e-12)


def test_auto_says_when_no_grid_will_do() -> None:
    """A jump between grid points of every grid is refused, with the number that was reached."""
    stimulus = {"kind": "step", "after": 2.0, "at": 0.0050001234567}
    with pytest.raises(ScenarioError, match=r"cannot reach 1e-05 LSB.*estimate is still"):
        simulate(_scenario(stimulus, discretization="bilinear", accuracy=1e-5, duration=0.5))


def test_a_coarse_grid_is_told_with_its_error() -> None:
    """A given grid that is too coarse gives the right number and a note, never silence."""
    stimulus = CLOSED_FORMS[0]
    run = simulate(_scenario(stimulus, discretization="zoh", grid_rate=20e3))
    exact = simulate(_scenario(stimulus))
    assert run.grid is not None
    true = float(np.max(np.abs(run.pin - exact.pin))) / run.scenario.adc.lsb
    assert run.grid.largest_error == pytest.approx(true, rel=1e-12)
    assert any("LSB from the exact answer" in note for note in run.notes)


@given(rate=st.floats(21e3, 300e3), method=st.sampled_from(["zoh", "foh", "bilinear"]))
@settings(max_examples=20, deadline=None)
def test_conversions_between_grid_points_follow_the_model(rate: float, method: Any) -> None:
    """On any grid, incommensurate ones too, a finer grid comes closer to the exact answer."""
    coarse = _error(method, rate)
    fine = _error(method, 8.0 * rate)
    assert fine < 0.4 * coarse
