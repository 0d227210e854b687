"""Discrete models: matrices at 50 digits, gains, and what pre-warping keeps.

Orders of convergence and agreement with other libraries are in tests/simulation.
"""

from __future__ import annotations

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from frontend_sim.analog.chain import Chain, chain_of
from frontend_sim.analog.discretize import METHODS, DiscreteModel, half_step, warped_frequency
from frontend_sim.analog.stages import Butterworth, PolesZeros, RcHighpass, RcLowpass

STIFF = chain_of(
    [
        RcLowpass(resistance=100.0, capacitance=1e-9),
        RcLowpass(resistance=1e3, capacitance=1e-7),
        RcLowpass(resistance=1e3, capacitance=1e-7),
        RcHighpass(resistance=1e6, capacitance=1e-5),
    ]
)
STEP = 2e-6


def _transfer(chain: Chain, model: DiscreteModel, z: complex) -> complex:
    system = (z - 1.0) * np.eye(chain.order) - model.e
    return complex(
        chain.c[-1] @ np.linalg.solve(system, model.start + z * model.stop) + chain.d[-1]
    )


def _mpmath_model(method: str) -> tuple[NDArray[np.float64], ...]:
    """Return e, start, stop of the stiff chain, from the definitions of the three models."""
    with mp.workdps(50):
        a, b = mp.matrix(STIFF.a.tolist()), mp.matrix(STIFF.b.tolist())
        n, h = STIFF.order, mp.mpf(STEP)
        eye = mp.eye(n)
        if method == "bilinear":
            inverse = (eye - a * (h / 2)) ** -1
            e, start = inverse * (a * h), inverse * (b * (h / 2))
            parts = [e, start, start]
        else:
            exp = mp.expm(a * h, method="taylor")
            held = a**-1 * (exp - eye) * b
            rising = a**-1 * (held - b * h) / h
            parts = [exp - eye, held, b * 0]
            if method == "foh":
                parts = [exp - eye, held - rising, rising]
        return tuple(np.array([[float(x) for x in row] for row in part.tolist()]) for part in parts)


@pytest.mark.parametrize("method", METHODS)
def test_matrices_agree_with_their_definition(method: str) -> None:
    """A stiff chain with equal poles: a^-1 (exp(ah) - 1) b and its kin at 50 digits, to 1e-13."""
    model = METHODS[method](STIFF, STEP, None)  # type: ignore[index]  # a name out of the table
    e, start, stop = _mpmath_model(method)
    size = np.max(np.abs(e), axis=1, keepdims=True)
    assert np.all(np.abs(model.e - e) <= 1e-13 * size)
    assert np.all(np.abs(model.start - start[:, 0]) <= 1e-13 * size[:, 0])
    assert np.all(np.abs(model.stop - stop[:, 0]) <= 1e-13 * size[:, 0])


@pytest.mark.parametrize("method", METHODS)
def test_the_gain_at_zero_frequency_stays(method: str) -> None:
    """At z = 1 every model has the chain's own gain at zero frequency."""
    chain = chain_of(
        [Butterworth(order=5, corner=1e3), RcLowpass(resistance=1e3, capacitance=1e-7)]
    )
    model = METHODS[method](chain, 1e-4, None)  # type: ignore[index]  # a name out of the table
    assert _transfer(chain, model, 1.0) == pytest.approx(1.0, rel=1e-12)


@given(frequency=st.floats(1.0, 4.9e3), prewarp=st.none() | st.floats(10.0, 4.9e3))
def test_bilinear_shows_the_chain_at_the_warped_frequency(
    frequency: float, prewarp: float | None
) -> None:
    """The discrete response at warped_frequency(f) is the chain's at f, whatever the pre-warp."""
    chain = chain_of([Butterworth(order=3, corner=900.0)])
    h = 1e-4
    model = METHODS["bilinear"](chain, h, prewarp)
    warped = warped_frequency(frequency, h, prewarp)
    z = complex(np.exp(2j * np.pi * warped * h))
    true = chain.response(np.array([frequency]))[0]
    # z near -1 is ill-conditioned: half the rate stands for an infinite frequency.
    assert _transfer(chain, model, z) == pytest.approx(true, rel=1e-8, abs=1e-11)


@given(prewarp=st.floats(1.0, 4.999e3))
def test_the_prewarped_frequency_stays(prewarp: float) -> None:
    """What is pre-warped at f shows f at f, to rounding."""
    assert warped_frequency(prewarp, 1e-4, prewarp) == pytest.approx(prewarp, rel=1e-12)


def test_a_vanishing_prewarp_is_none() -> None:
    """Pre-warped at a frequency far below the rate, k is half a step."""
    assert half_step(1e-3, 1e-3) == pytest.approx(half_step(1e-3, None), rel=1e-11)


@pytest.mark.parametrize("method", METHODS)
def test_an_integrator_sums(method: str) -> None:
    """A pole at the origin: rectangles for a held input, trapezoids for the others; exact."""
    chain = chain_of([PolesZeros(poles=(0.0,), gain=50.0)])
    model = METHODS[method](chain, 0.01, None)  # type: ignore[index]  # a name out of the table
    gains = chain.c[-1, 0] * np.array([model.e[0, 0], model.start[0], model.stop[0]])
    expected = [0.0, 0.5, 0.0] if method == "zoh" else [0.0, 0.25, 0.25]
    np.testing.assert_allclose(gains, expected, rtol=1e-15)
