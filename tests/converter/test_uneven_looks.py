"""Looks at any places of a period: their instants, how many there are, and noise between them."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.analog.chain import compose
from frontend_sim.converter import Adc
from frontend_sim.converter.paced import PacedAdc
from frontend_sim.converter.pattern import LookPattern

PLACES = st.lists(st.integers(0, 40), min_size=1, max_size=8, unique=True).map(sorted)


@given(PLACES, st.integers(1, 30), st.floats(0.0, 1.0))
def test_a_pattern_has_its_looks_where_they_were_given(
    places: list[int], spare: int, first: float
) -> None:
    """Whatever simpler form is found, the instants are those of the places, period by period."""
    period = (places[-1] - places[0] + spare) * 1e-3
    told = [place * 1e-3 for place in places]
    pattern = LookPattern.of(first, period, told)
    expected = first + (np.arange(5)[:, None] * period + np.array(told) - told[0]).ravel()
    count = len(expected) // pattern.looks * pattern.looks
    found = pattern.between(0, count)
    np.testing.assert_allclose(found, expected[:count], rtol=0, atol=1e-12)
    gaps = np.diff(expected)
    assert pattern.closest == pytest.approx(gaps.min(), abs=1e-12)
    assert pattern.widest == pytest.approx(gaps.max(), abs=1e-12)
    np.testing.assert_allclose(np.resize(np.roll(pattern.gaps, -1), len(gaps)), gaps, atol=1e-12)


@given(PLACES, st.integers(1, 30), st.floats(1e-3, 0.3))
def test_codes_within_a_duration_are_counted(
    places: list[int], spare: int, duration: float
) -> None:
    """As many as there are instants below it."""
    period = (places[-1] - places[0] + spare) * 1e-3
    pattern = LookPattern.of(0.5e-3, period, [place * 1e-3 for place in places])
    adc = PacedAdc.of(Adc(rate=1e3, bits=12, high=1.0), pattern)
    instants = pattern.between(0, 400)
    close = np.min(np.abs(instants - duration)) < 1e-12
    if not close:
        assert adc.code_count(duration) == np.count_nonzero(instants < duration)


def test_noise_remembers_over_gaps_of_any_length() -> None:
    """kT/C noise of one pole: its correlation from look to look is exp(-gap / RC), within 4 se."""
    from frontend_sim.analog.section import Section
    from frontend_sim.analog.stages.rc_lowpass import RcLowpass
    from frontend_sim.simulation.noise import NoisePath

    chain = compose([Section.of(RcLowpass(resistance=1e3, capacitance=1e-6), "rc")])
    pattern = LookPattern.of(0.0, 4e-3, [0.0, 0.2e-3, 1.5e-3])
    path = NoisePath.of(chain.noise_model(1.0), pattern, 1)
    _, noise = path.advance(path.start(), 0, 300_000)
    rows = noise.reshape(-1, 3)
    power = 1.380649e-23 * 298.15 / 1e-6
    error = np.sqrt(2.0 / len(rows))
    np.testing.assert_allclose(np.mean(rows**2, axis=0), power, rtol=4 * error)
    gaps = np.array([0.2e-3, 1.3e-3, 2.5e-3])
    after = np.column_stack([rows[:-1, 1], rows[:-1, 2], rows[1:, 0]])
    found = np.mean(rows[:-1] * after, axis=0) / power
    np.testing.assert_allclose(found, np.exp(-gaps / 1e-3), rtol=0, atol=4 / np.sqrt(len(rows)))
