"""Settling times against closed forms, and as the last exit of any response."""

from __future__ import annotations

import math

import mpmath as mp
import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from frontend_sim.analog.chain import Chain, chain_of
from frontend_sim.analog.stages import (
    Butterworth,
    Gain,
    PolesZeros,
    RcHighpass,
    RcLowpass,
    SecondOrder,
    TransportDelay,
)
from frontend_sim.errors import ModelError
from frontend_sim.measure.response.decay import Decay
from frontend_sim.measure.response.settling import settling_time
from frontend_sim.measure.response.step_response import StepResponse

RELATIVE = 1e-11
"""Promised are 1e-9; bisection on the exact response gives more."""


def settles(chain: Chain, band: float) -> float:
    """Return the settling time of a chain."""
    return settling_time(Decay.of(chain, band), band)


@pytest.mark.parametrize("bits", [8, 10, 12, 14, 16, 18, 20, 24, 32])
@pytest.mark.parametrize("stage", [RcLowpass, RcHighpass])
def test_first_order_takes_ln_2_to_the_bits_plus_one(bits, stage):
    """RC ln 2^(N+1) to half an LSB of N bits (closed form), for a low and a high pass."""
    chain = chain_of([stage(resistance=12e3, capacitance=4.7e-9)])
    expected = 12e3 * 4.7e-9 * (bits + 1) * math.log(2.0)
    assert settles(chain, 2.0 ** -(bits + 1)) == pytest.approx(expected, rel=RELATIVE)


@pytest.mark.parametrize("band", [1e-2, 1e-3, 2.0**-13, 2.0**-25, 2.0**-33])
def test_critically_damped_pair(band):
    """Two equal sections: (1 + x) exp(-x) = band, x = t/T (Ogata, from memory), by mpmath."""
    section = [RcLowpass(resistance=1e3, capacitance=1e-7), Gain(gain=2.0)]
    expected = mp.findroot(lambda x: mp.log1p(x) - x - mp.log(band), 10.0)
    found = settles(chain_of([*section, *section]), 4.0 * band)
    assert found == pytest.approx(1e-4 * float(expected), rel=RELATIVE)


@pytest.mark.parametrize(
    ("order", "printed"), [(1, 1.434), (2, 1.866), (3, 2.763), (4, 3.718), (6, 5.369)]
)
def test_butterworth_to_half_an_lsb_of_twelve_bits(order, printed):
    """Times the corner, to 2^-13, at the printed precision (computed from closed forms)."""
    found = settles(chain_of([Butterworth(order=order, corner=1.0)]), 2.0**-13)
    assert found == pytest.approx(printed, abs=0.00051)


@pytest.mark.parametrize("quality", [0.6, 0.9, 3.0, 40.0, 1e3, 1e5])
@pytest.mark.parametrize("band", [0.05, 1e-3, 2.0**-17])
def test_ringing_leaves_its_band_for_the_last_time(quality, band):
    """Second order: e = -exp(-z w t)(cos wd t + z/sqrt(1-z²) sin wd t), its last |e| = band.

    The closed form is at the band at the time found, above it just before, and its envelope over
    the turning points shows that no later one reaches the band.
    """
    z = 0.5 / quality
    w = 2.0 * math.pi * 1e3
    wd = w * math.sqrt(1.0 - z * z)
    found = settles(chain_of([SecondOrder(corner=1e3, quality_factor=quality)]), band)

    def distance(t: float) -> float:
        with mp.workdps(40):
            t = mp.mpf(t)
            zeta = mp.mpf(1) / (2 * mp.mpf(quality))
            wn = 2 * mp.pi * 1000
            wdn = wn * mp.sqrt(1 - zeta**2)
            swing = mp.cos(wdn * t) + zeta / mp.sqrt(1 - zeta**2) * mp.sin(wdn * t)
            return float(abs(mp.exp(-zeta * wn * t) * swing))

    # The phase decides: a small share of the time may be a large part of a period.
    slope = band * w
    assert abs(distance(found) - band) < 1e-11 * (band + slope * found)
    assert distance(found * (1.0 - 1e-12)) > band
    # Turning points lie at k pi / wd, where |e| = exp(-z w k pi / wd).
    next_turn = math.floor(found * wd / math.pi) + 1
    assert math.exp(-z * w * next_turn * math.pi / wd) <= band
    assert math.exp(-z * w * (next_turn - 1) * math.pi / wd) >= band


def test_a_slow_tail_is_not_missed():
    """A pole beside a zero leaves a tail of 0.2 %: 1 % is quick, 0.1 % takes the slow pole's time.

    H = a (s + z) p / ((s + a)(s + p) z), e = A exp(-a t) + B exp(-p t) by residues.
    """
    a, p, z = 1e5, 1.0, 1.002
    chain = chain_of([PolesZeros(poles=(-a, -p), zeros=(-z,), gain=a * p / z)])
    tail = -a * p / z * (z - p) / (p * (a - p))
    assert settles(chain, 1e-3) == pytest.approx(math.log(abs(tail) / 1e-3) / p, rel=1e-9)
    assert settles(chain, 1e-2) < 1e-4


def test_a_fast_ring_beside_a_slow_mode():
    """A 1 MHz ring dies in microseconds and a 10 s pole rules: RC ln(1/band), 8 decades later."""
    chain = chain_of(
        [
            SecondOrder(corner=1e6, quality_factor=20.0),
            RcLowpass(resistance=1e6, capacitance=1e-5),
        ]
    )
    # The ring delays the slow mode by its own group delay at zero frequency, to first order.
    expected = 10.0 * math.log(1e3) + 1.0 / (20.0 * 2.0 * math.pi * 1e6)
    assert settles(chain, 1e-3) == pytest.approx(expected, rel=1e-12)


def test_delay_and_chains_without_states():
    """A delay counts; a chain that does not move is settled as soon as the step arrives."""
    assert settling_time(None, 0.1, delay=2e-3) == 2e-3
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=1e-6), TransportDelay(delay=1e-3)])
    found = settling_time(Decay.of(chain, 0.01), 0.01, delay=1e-3)
    assert found == pytest.approx(1e-3 * (1.0 + math.log(100.0)), rel=RELATIVE)


def test_inside_the_band_from_the_start():
    """A response that never leaves its band has settled at once."""
    chain = chain_of([PolesZeros(poles=(-1.0,), zeros=(-1.001,), gain=1.0)])
    assert settles(chain, 0.01) == 0.0


def test_a_band_of_zero_is_refused():
    """No response reaches a band without width; the message says what to do."""
    with pytest.raises(ModelError, match="give one above zero"):
        Decay.of(chain_of([RcLowpass(resistance=1.0, capacitance=1.0)]), 0.0)


pole_pairs = st.tuples(st.floats(-2.0, 2.0), st.floats(0.02, 1.0))
real_poles = st.floats(-2.0, 2.0)


def random_chain(pairs: list[tuple[float, float]], reals: list[float], high_pass: bool) -> Chain:
    """Make a chain of second-order and first-order low passes, with a high pass if asked for."""
    stages = [
        SecondOrder(corner=10.0**decade, quality_factor=0.5 / damping) for decade, damping in pairs
    ]
    lows = [RcLowpass(resistance=1.0, capacitance=10.0**-decade) for decade in reals]
    highs = [RcHighpass(resistance=1.0, capacitance=0.3)] if high_pass else []
    return chain_of([*stages, *lows, *highs])


@settings(max_examples=40, deadline=None)
@given(
    pairs=st.lists(pole_pairs, max_size=3),
    reals=st.lists(real_poles, max_size=3),
    high_pass=st.booleans(),
    band=st.sampled_from([0.1, 0.01, 1e-3, 2.0**-17]),
)
def test_nothing_leaves_the_band_later(pairs, reals, high_pass, band):
    """Random chains: no sample after the settling time is out of the band, just before one is."""
    chain = random_chain(pairs, reals, high_pass)
    assume(chain.order > 0)
    found = settles(chain, band)
    response = StepResponse.of(chain)
    last = 40.0 / float(np.min(-chain.poles.real))
    later = found + np.concatenate(
        [np.geomspace(1e-6, 1.0, 500) * last, np.linspace(0.0, last, 4000)[1:]]
    )
    noise = 1e-13
    assert np.max(np.abs(response.values(later) - response.end)) <= band + noise
    if found > 0.0:
        before = response.values(np.array([found * (1.0 - 1e-8)]))[0]
        assert abs(before - response.end) > band - noise


@settings(max_examples=30, deadline=None)
@given(pairs=st.lists(pole_pairs, max_size=2), reals=st.lists(real_poles, max_size=3))
def test_the_bound_holds(pairs, reals):
    """The bound at each node of the march is at least as large as every later excursion."""
    chain = random_chain(pairs, reals, high_pass=False)
    assume(chain.order > 0)
    decay = Decay.of(chain, 1e-6)
    response = StepResponse.of(chain)
    times = np.linspace(0.0, float(decay.times[-1]), 5000)
    size = np.abs(response.values(times) - response.end)
    later = np.maximum.accumulate(size[::-1])[::-1]
    for node in range(0, len(decay.times), 37):
        after = np.searchsorted(times, decay.times[node])
        assert after == len(times) or later[after] <= decay.bound[node] + 1e-14
