"""When the converter looks: how often, in which order, with how much jitter."""

from __future__ import annotations

import math
from fractions import Fraction
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from frontend_sim.converter.adc import Adc
from frontend_sim.converter.clock import nominal_instants, sampling_instants


def _adc(rate: float, **values: float) -> Adc:
    return Adc(rate=rate, bits=12, high=1.0, **values)


@pytest.mark.parametrize(
    ("duration", "rate", "first", "count"),
    [
        (0.25, 20e3, 0.0, 5000),
        (300.0, 360.0, 0.0, 108000),
        (0.1, 30.0, 0.0, 3),
        (0.3, 10.0, 0.0, 3),
        (0.7, 1e6 / 7.0, 0.0, 100000),
        (1.0, 3.0, 1.0 / 3.0, 2),
        (1.0, 3.0, 0.0, 3),
        (1.0 + 1e-9, 3.0, 0.0, 4),
        (1.0 - 1e-9, 3.0, 0.0, 3),
        (2.0 / 3.0, 3.0, 0.0, 2),
        (10.0, 1e6 / 3.0, 0.0, 3333334),
        (86400.0, 44.1e3, 0.0, 3810240000),
        (0.5, 1.0, 0.0, 1),
        (0.5, 1.0, 0.5, 0),
        (0.5, 1.0, 7.0, 0),
    ],
)
def test_awkward_durations(duration: float, rate: float, first: float, count: int) -> None:
    """All k with first + k/rate in [0, duration), where decimal fractions meet their multiples."""
    assert _adc(rate, first=first).code_count(duration) == count


@given(
    milliseconds=st.integers(1, 10**7),
    tenths=st.integers(1, 10**5),
    first=st.integers(0, 10**6),
)
@example(milliseconds=300_000, tenths=3600, first=0)
# The product of the floats lies above a whole number, which the exact product meets.
@example(milliseconds=294_970, tenths=441_000, first=0)
@example(milliseconds=909_556, tenths=2000, first=9896)
# The exact product lies above a whole number, by a ten-thousandth of a period in 1e8 of them.
@example(milliseconds=9_999_999, tenths=99_999, first=0)
@example(milliseconds=9_999_901, tenths=99_999, first=0)
@settings(max_examples=400)
def test_the_count_is_that_of_exact_fractions(milliseconds: int, tenths: int, first: int) -> None:
    """Durations in ms and rates in 0.1 Hz, taken as exact fractions: never one more, one less."""
    duration, rate = Fraction(milliseconds, 1000), Fraction(tenths, 10)
    start = Fraction(first, 1000)
    exact = max(math.ceil((duration - start) * rate), 0)
    adc = _adc(float(rate), first=float(start))
    assert adc.code_count(float(duration)) == exact
    if exact:
        last = nominal_instants(adc, exact - 1, exact)[0]
        assert last < float(duration)


@given(rate=st.floats(1e-3, 1e9), start=st.integers(0, 10**12))
def test_instants_are_quotients(rate: float, start: int) -> None:
    """k/rate is divided, not summed up: right to half a rounding at k = 1e12 too."""
    found = nominal_instants(_adc(rate), start, start + 3)
    for k, time in zip(range(start, start + 3), found, strict=True):
        exact = Fraction(k) / Fraction(rate)
        assert abs(Fraction(float(time)) - exact) <= Fraction(float(np.spacing(time))) / 2


def test_delay_shifts_every_instant() -> None:
    """The aperture delay comes on top of the nominal instant."""
    adc = _adc(1e4, first=2e-3, aperture_delay=3e-6)
    np.testing.assert_allclose(
        sampling_instants(adc, 0, 3, 1), [2.003e-3, 2.103e-3, 2.203e-3], rtol=1e-14
    )


JITTERY = _adc(1e6, aperture_jitter=20e-9)


def test_jitter_has_the_rms_asked_and_no_colour() -> None:
    """Over 2e5 conversions: mean, rms, correlation of neighbours within 4 standard errors."""
    count = 200_000
    jitter = sampling_instants(JITTERY, 0, count, 5) - nominal_instants(JITTERY, 0, count)
    assert np.std(jitter) == pytest.approx(20e-9, rel=4.0 / np.sqrt(2.0 * count))
    assert abs(np.mean(jitter)) < 4.0 * 20e-9 / np.sqrt(count)
    neighbours = np.mean(jitter[1:] * jitter[:-1]) / 20e-9**2
    assert abs(neighbours) < 4.0 / np.sqrt(count)


def test_instants_stay_in_order_at_the_largest_jitter() -> None:
    """With 5 % of a period rms, a million instants still increase."""
    adc = _adc(1e6, aperture_jitter=50e-9)
    assert np.all(np.diff(sampling_instants(adc, 0, 1_000_000, 3)) > 0.0)


@given(cuts=st.lists(st.integers(0, 60_000), max_size=6), seed=st.integers(0, 2**63 - 1))
@settings(max_examples=25, deadline=None)
def test_cuts_never_show(cuts: list[int], seed: int) -> None:
    """The instant of conversion k depends on the seed and k, not on the block it falls into."""
    edges = sorted({0, *cuts, 60_000})
    parts = [sampling_instants(JITTERY, a, b, seed) for a, b in pairwise(edges)]
    whole = sampling_instants(JITTERY, 0, 60_000, seed)
    np.testing.assert_array_equal(np.concatenate(parts), whole)


def test_another_seed_is_another_jitter() -> None:
    """Seeds are independent: the correlation of two runs lies within 4 standard errors of zero."""
    count = 100_000
    nominal = nominal_instants(JITTERY, 0, count)
    one, other = (sampling_instants(JITTERY, 0, count, seed) - nominal for seed in (1, 2))
    assert abs(np.corrcoef(one, other)[0, 1]) < 4.0 / np.sqrt(count)
