"""Recorded points through a chain: incommensurate, irregular, long, and cut anywhere."""

from __future__ import annotations

from typing import Literal

import mpmath as mp
import numpy as np
import oracles
import pytest
from drives import InMemory, outputs
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import signal

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import Butterworth, Gain, RcHighpass, RcLowpass, TransportDelay
from frontend_sim.simulation.linear import Axis, Linear
from frontend_sim.simulation.uniform import LONGEST_SUM, WAVEFORM_TILE
from frontend_sim.stimulus.drive import Between, Lines

CHAIN = chain_of(
    [
        RcLowpass(resistance=100.0, capacitance=1e-9),
        RcLowpass(resistance=1e3, capacitance=1e-7),
        RcLowpass(resistance=1e3, capacitance=1e-7),
        RcHighpass(resistance=1e6, capacitance=1e-5),
    ]
)
SYSTEM = oracles.in_a_row(
    [
        oracles.low_pass(100.0 * 1e-9),
        oracles.low_pass(1e3 * 1e-7),
        oracles.low_pass(1e3 * 1e-7),
        oracles.high_pass(1e6 * 1e-5),
    ]
)
EIGHTH = chain_of([Butterworth(order=8, corner=900.0)])


def _noise(count: int, seed: int = 1) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    return np.random.default_rng(seed).standard_normal(count)


@pytest.mark.parametrize("between", ["line", "hold"])
def test_incommensurate_rates_agree_with_mpmath(between: str) -> None:
    """Points at 7 kHz, conversions at irregular times: no common grid, yet 1e-9 of full scale."""
    data = _noise(60)
    times = np.sort(np.random.default_rng(2).uniform(0.0, 59 / 7e3, 25))
    with mp.workdps(oracles.DIGITS):
        pieces = []
        for j in range(len(data) - 1):
            slope = (mp.mpf(data[j + 1]) - mp.mpf(data[j])) * 7000 if between == "line" else 0
            piece = oracles.line(0.0, float(data[j]), slope)
            piece.start = mp.mpf(j) / 7000
            pieces.append(piece)
    true = oracles.response(SYSTEM, pieces, list(times), float(data[0]))
    found = outputs(CHAIN, [InMemory(data, 7e3, between)], times)  # type: ignore[arg-type]  # a parameter of the test
    np.testing.assert_allclose(found, true, rtol=0, atol=1e-9)


def test_irregular_timestamps_agree_with_mpmath() -> None:
    """Points at irregular times joined by lines, conversions at a rate of their own."""
    rng = np.random.default_rng(4)
    breaks = np.concatenate([[0.0], np.cumsum(rng.uniform(1e-6, 3e-4, 40))])
    data = _noise(41, 5)
    slopes = np.append(np.diff(data) / np.diff(breaks), 0.0)
    times = np.arange(1, 15) / 2417.0
    pieces = [oracles.line(b, v, s) for b, v, s in zip(breaks, data, slopes, strict=True)]
    true = oracles.response(SYSTEM, pieces, list(times), float(data[0]))
    found = outputs(CHAIN, [Lines.of(float(data[0]), breaks, data, slopes)], times)
    np.testing.assert_allclose(found, true, rtol=0, atol=1e-9)


def test_both_ways_to_drive_agree() -> None:
    """Uniform points give the same as the same points told one by one as events."""
    data = _noise(3000)
    breaks = np.arange(3000) / 1e4
    slopes = np.append(np.diff(data) * 1e4, 0.0)
    times = np.arange(0, 900) / 3001.7
    one = outputs(CHAIN, [InMemory(data, 1e4)], times)
    other = outputs(CHAIN, [Lines.of(float(data[0]), breaks, data, slopes)], times)
    np.testing.assert_allclose(one, other, rtol=0, atol=1e-12)


@pytest.mark.parametrize("stride", [1, 2, 50, 3 * LONGEST_SUM + 7])
def test_conversions_are_the_waveform_at_their_instants(stride: int) -> None:
    """The lifted recursion, of any stride, picks points of the waveform."""
    count = max(2 * WAVEFORM_TILE, 5 * stride) + 100
    drive = InMemory(_noise(count), 1e5)
    waveform = outputs(EIGHTH, [drive], np.arange(count) / 1e5)
    conversions = outputs(EIGHTH, [drive], np.arange(0, count, stride) * 1e-5)
    np.testing.assert_allclose(conversions, waveform[::stride], rtol=0, atol=1e-12)


def test_waveform_agrees_with_lsim_and_forced_response() -> None:
    """Two other libraries, which join the points by lines as well, give the same waveform.

    Oracles: scipy.signal.lsim (interp=True) and control.forced_response. Their chain is a
    second-order one, where their own rounding stays below the tolerance.
    """
    import control

    chain = chain_of([Butterworth(order=2, corner=900.0), Gain(gain=2.0)])
    times = np.arange(5000) / 1e4
    data = _noise(5000)
    data[0] = 0.0
    found = outputs(chain, [InMemory(data, 1e4)], times)
    system = chain.state_space()
    _, by_scipy, _ = signal.lsim((system.A, system.B, system.C, system.D), data, times)
    by_control = control.forced_response(system, times, data).outputs
    np.testing.assert_allclose(found, by_scipy, rtol=0, atol=1e-9)
    np.testing.assert_allclose(found, by_control, rtol=0, atol=1e-9)


def test_held_points_agree_with_sosfilt() -> None:
    """The step-invariant model of one pole, run by scipy.signal.sosfilt step by step."""
    tau, rate = 47e-6, 2e5
    pole = np.exp(-1.0 / (tau * rate))
    data = _noise(20000)
    data[0] = 0.0
    sos = np.array([[0.0, 1.0 - pole, 0.0, 1.0, -pole, 0.0]])
    chain = chain_of([RcLowpass(resistance=10e3, capacitance=4.7e-9)])
    found = outputs(chain, [InMemory(data, rate, "hold")], np.arange(20000) / rate)
    np.testing.assert_allclose(found, signal.sosfilt(sos, data), rtol=0, atol=1e-12)


@pytest.mark.parametrize("stride", [1, 7, 50])
@pytest.mark.parametrize("block", [WAVEFORM_TILE, 3 * WAVEFORM_TILE])
def test_blocks_never_show(stride: int, block: int) -> None:
    """Bit for bit the same outputs however the instants are cut at multiples of a tile."""
    count = 4 * WAVEFORM_TILE + 321
    drive = InMemory(_noise(count * stride), 1e6)
    times = np.arange(count) * (stride / 1e6)
    whole = outputs(EIGHTH, [drive], times)
    np.testing.assert_array_equal(outputs(EIGHTH, [drive], times, block=block), whole)


@pytest.mark.parametrize("initial", ["settled", "rest"])
@pytest.mark.parametrize("stride", [1, 7, 50])
def test_blocks_of_an_even_row_never_show(stride: int, initial: Literal["settled", "rest"]) -> None:
    """The same where every instant is known to be a point, and for a chain that was at rest."""
    count = 2 * WAVEFORM_TILE + 777
    drive, interval = InMemory(_noise(count * stride), 1e6), stride / 1e6
    axis = Axis(interval, 2.0 * interval, uniform=True)
    model = Linear.of(EIGHTH, [drive], [1], initial, axis)
    times = np.arange(count) * interval
    found = []
    for block in (WAVEFORM_TILE, count):
        states, parts = model.start(), []
        for start in range(0, count, block):
            states, (values,) = model.advance(states, start, times[start : start + block])
            parts.append(values)
        found.append(np.concatenate(parts))
    np.testing.assert_array_equal(*found)


@given(block=st.integers(1, 700), rate=st.floats(100.0, 5e4))
@settings(max_examples=25, deadline=None)
def test_any_cut_of_irregular_instants_gives_the_same(block: int, rate: float) -> None:
    """Where no matrix product is used, a cut anywhere leaves every bit as it is."""
    times = np.sort(np.random.default_rng(3).uniform(0.0, 0.09, 700))
    drive = InMemory(_noise(max(int(0.1 * rate), 2)), rate)
    whole = outputs(CHAIN, [drive], times, interval=0.09 / 700)
    cut = outputs(CHAIN, [drive], times, block=block, interval=0.09 / 700)
    np.testing.assert_array_equal(cut, whole)


@given(scale=st.sampled_from([-4.0, 0.5, 2.0, 1024.0]), seed=st.integers(0, 2**31))
@settings(max_examples=20, deadline=None)
def test_scaling_by_powers_of_two_is_exact(scale: float, seed: int) -> None:
    """Gain scaling: a power of two goes through every sum without rounding."""
    times = np.arange(400) / 3001.7
    data = _noise(1400, seed)
    one = outputs(CHAIN, [InMemory(data, 1e4)], times)
    other = outputs(CHAIN, [InMemory(scale * data, 1e4)], times)
    np.testing.assert_array_equal(other, scale * one)


def test_superposition_holds() -> None:
    """The response to a sum is the sum of the responses."""
    times = np.arange(400) / 3001.7
    first, second = InMemory(_noise(1400, 1), 1e4), InMemory(_noise(1400, 2), 1e4)
    both = InMemory(first.data + second.data, 1e4)
    apart = outputs(CHAIN, [first], times) + outputs(CHAIN, [second], times)
    np.testing.assert_allclose(outputs(CHAIN, [both], times), apart, rtol=0, atol=1e-12)
    np.testing.assert_array_equal(outputs(CHAIN, [first, second], times), apart)


def test_a_delay_is_exact_at_any_instant() -> None:
    """A transport delay shifts the response by itself, not by a whole number of points."""
    delay = 123.4567e-6
    data = _noise(1400)
    stages = [RcLowpass(resistance=1e3, capacitance=1e-7)]
    times = np.arange(400) / 3001.7
    plain = outputs(chain_of(stages), [InMemory(data, 1e4)], times + 1e-3)
    late = chain_of([*stages, TransportDelay(delay=delay)])
    shifted = outputs(late, [InMemory(data, 1e4)], times + 1e-3 + delay)
    np.testing.assert_allclose(shifted, plain, rtol=0, atol=1e-12)
    early = outputs(late, [InMemory(data, 1e4)], np.array([0.0, 0.5 * delay]))
    np.testing.assert_allclose(early, data[0], rtol=1e-14)


@pytest.mark.parametrize("initial", ["settled", "rest"])
@pytest.mark.parametrize("between", ["hold", "line"])
def test_instants_before_the_second_point_need_no_step(between: Between, initial: str) -> None:
    """One conversion at t = 0, and one between the first two points, see what is there.

    With a line from u0 to u1 the low pass of a state of rest obeys its ramp response.
    """
    low_pass = chain_of([RcLowpass(resistance=1e3, capacitance=1e-7)])
    drive = InMemory(np.array([0.5, 0.75]), 1e3, between)
    settled = initial == "settled"
    at_once = outputs(low_pass, [drive], np.zeros(1), initial=initial)
    assert at_once[0] == pytest.approx(0.5 if settled else 0.0, abs=1e-15)
    later = outputs(low_pass, [drive], np.array([2e-4]), initial=initial)
    grown = 1.0 - np.exp(-2.0)
    slope = 0.0 if between == "hold" else 250.0
    wanted = 0.5 * (1.0 if settled else grown) + slope * (2e-4 - 1e-4 * grown)
    assert later[0] == pytest.approx(wanted, abs=1e-12)
