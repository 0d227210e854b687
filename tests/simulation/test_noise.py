"""Noise of the chain in runs: its variance, its spectrum folded, its seed, and cuts of time."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.analog.chain import Chain, chain_of
from frontend_sim.analog.noise import BOLTZMANN, stationary_covariance
from frontend_sim.analog.stages import Butterworth, RcLowpass
from frontend_sim.converter.pattern import LookPattern
from frontend_sim.simulation.noise import NoisePath

T = 300.0
COUNT = 40_000


def _noise(
    chain: Chain, rate: float, seed: int, count: int = COUNT
) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    path = NoisePath.of(chain.noise_model(1.0), LookPattern(0.0, rate), seed)
    _, values = path.advance(path.start(), 0, count)
    return np.asarray(values)


@pytest.mark.parametrize("rate", [1e2, 1e4, 1e6, 3e7])
def test_variance_is_k_t_over_c_at_any_rate(rate: float) -> None:
    """kT/C within three standard errors, from far below the pole to far above it.

    Neighbours correlate by r = exp(-T/RC), which widens the standard error of the variance by
    sqrt((1 + r²) / (1 - r²)).
    """
    r_c = 1e3 * 1e-10
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=1e-10)], T)
    variance = float(np.mean(_noise(chain, rate, 3) ** 2))
    r = math.exp(-1.0 / rate / r_c)
    error = math.sqrt(2.0 / COUNT * (1.0 + r * r) / (1.0 - r * r))
    assert abs(variance / (BOLTZMANN * T / 1e-10) - 1.0) < 3.0 * error


def test_neighbours_correlate_as_the_pole_says() -> None:
    """The correlation of conversions T apart is exp(-T/RC) within three standard errors."""
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=1e-7)], T)
    values = _noise(chain, 20e3, 5)
    found = float(np.mean(values[1:] * values[:-1]) / np.mean(values**2))
    r = math.exp(-0.5)
    assert abs(found - r) < 3.0 * math.sqrt((1.0 - r * r) / COUNT)


def test_a_wideband_chain_folds_all_its_noise() -> None:
    """Behind a slow converter the samples are white and carry the whole power of the band."""
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=1e-11)], T)
    values = _noise(chain, 1e3, 7)
    spectrum = np.abs(np.fft.rfft(values.reshape(-1, 200), axis=1)) ** 2
    low, high = spectrum[:, 1:50].mean(), spectrum[:, 50:99].mean()
    # Each mean is over 200 x 49 exponential variables: a standard error of 1 %.
    assert abs(low / high - 1.0) < 3.0 * math.sqrt(2.0) * 0.0101
    assert values.std() == pytest.approx(math.sqrt(BOLTZMANN * T / 1e-11), rel=3 * 0.0036)


def test_the_first_conversion_is_stationary() -> None:
    """Over many seeds the first value has the stationary variance already."""
    stages = [RcLowpass(resistance=1e3, capacitance=1e-8), Butterworth(order=3, corner=2e3)]
    chain = chain_of(stages, T)
    model = chain.noise_model(1.0)
    variance = float(model.c @ stationary_covariance(model.a, model.b) @ model.c)
    first = [_noise(chain, 1e4, seed, 1)[0] for seed in range(600)]
    # 600 values: a standard error of sqrt(2/600) = 5.8 %.
    assert abs(np.mean(np.square(first)) / variance - 1.0) < 3 * 0.058


@given(cut=st.integers(1, 2999))
@settings(max_examples=20, deadline=None)
def test_cuts_never_show(cut: int) -> None:
    """Bit for bit the same noise however conversions are cut into blocks."""
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=1e-8)], T)
    path = NoisePath.of(chain.noise_model(1.0), LookPattern(0.0, 1e5), 11)
    _, whole = path.advance(path.start(), 0, 3000)
    state, first = path.advance(path.start(), 0, cut)
    _, second = path.advance(state, cut, 3000)
    np.testing.assert_array_equal(np.concatenate([first, second]), whole)


def test_seeds_differ() -> None:
    """Another seed, another noise; the same seed, the same."""
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=1e-8)], T)
    one, same, other = (_noise(chain, 1e4, seed, 1000) for seed in (1, 1, 2))
    np.testing.assert_array_equal(one, same)
    assert abs(np.corrcoef(one, other)[0, 1]) < 0.15


def test_an_integrator_gathers_noise_from_the_start_of_the_run() -> None:
    """A resistor before an integrator: the noise begins at zero and its variance grows with time.

    White noise of density e integrated with rate k has the variance k² e² t / 2.
    """
    from frontend_sim.analog.stages import PolesZeros

    stages = [RcLowpass(resistance=1e6, capacitance=1e-12), PolesZeros(poles=(0.0,), gain=1e3)]  # type: ignore[arg-type]  # numbers become pairs
    chain = chain_of(stages, T)
    ends = [_noise(chain, 1e3, seed, 100)[[0, 99]] for seed in range(400)]
    first, last = np.mean(np.square(ends), axis=0)
    assert first == 0.0
    density = 4.0 * BOLTZMANN * T * 1e6
    # 400 runs: a standard error of sqrt(2/400) = 7 %.
    assert abs(last / (1e6 * density * 0.099 / 2.0) - 1.0) < 3 * 0.071
