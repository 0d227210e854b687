"""Mismatched capacitors: the levels that a successive-approximation search really finds."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.converter.capacitor_array import bit_weights, found_levels, trial_levels


def search(weights: np.ndarray, voltage: float) -> int:
    """Return the code that the bit-by-bit search ends at, from the highest bit."""
    code, held = 0, 0.0
    for bit in reversed(range(len(weights))):
        if voltage >= held + weights[bit]:
            held += weights[bit]
            code += 1 << bit
    return code


@given(
    weights=st.lists(st.integers(1, 2000).map(lambda n: n / 64.0), min_size=1, max_size=7),
    voltages=st.lists(st.integers(-300, 15_000).map(lambda n: n / 64.0), min_size=1, max_size=40),
)
@settings(max_examples=200)
def test_levels_are_those_of_the_search(weights: list[float], voltages: list[float]) -> None:
    """Whatever the weights, also far from binary: count of levels at or below = code found.

    Weights are binary fractions, so that no sum is rounded, in whatever order it is taken.
    """
    array = np.array(weights)
    levels = found_levels(trial_levels(array))
    assert np.all(np.diff(levels) >= 0.0)
    for voltage in [*voltages, *levels, *(levels - 1.0 / 128.0)]:
        assert np.searchsorted(levels, voltage, side="right") == search(array, voltage)


def test_equal_capacitors_give_an_ideal_converter() -> None:
    """Weights 1, 2, 4, ..., levels 1, 2, 3, ..., to the last digit."""
    weights = bit_weights(10, 0.0, 3)
    np.testing.assert_array_equal(weights, 2.0 ** np.arange(10))
    np.testing.assert_array_equal(found_levels(trial_levels(weights)), np.arange(1.0, 1024.0))


def test_the_array_has_no_gain_error() -> None:
    """All bits and the closing unit are the whole range, whatever the seed."""
    for seed in range(5):
        weights = bit_weights(8, 0.05, seed)
        assert np.sum(weights) + 2.0 > 255.0
        assert np.sum(weights) < 256.0


def test_seeds_are_parts() -> None:
    """The same seed is the same part; another seed is another."""
    np.testing.assert_array_equal(bit_weights(12, 0.01, 5), bit_weights(12, 0.01, 5))
    assert np.any(bit_weights(12, 0.01, 5) != bit_weights(12, 0.01, 6))


@pytest.mark.parametrize("bits", [8, 12])
def test_spread_of_the_middle_level(bits: int) -> None:
    """Half against half of 2^N units: its deviation has s sqrt(2^N) / 2 LSB, 2000 parts drawn.

    The level is 2^N A / (A + B), A and B halves of 2^(N-1) units each, to first order in s. The DNL
    there, against the code below, has s sqrt(2^N - 1). Source: any text on matching in arrays,
    derived here. Four standard errors of an rms over 2000 draws are 6.3 %; the second order of
    s adds less than 1 %.
    """
    mismatch, parts = 0.02, 2000
    middle, step = [], []
    for seed in range(parts):
        trial = trial_levels(bit_weights(bits, mismatch, seed))
        half = 1 << (bits - 1)
        middle.append(trial[half] - half)
        step.append(trial[half] - trial[half - 1] - 1.0)
    units = 2.0**bits
    assert np.std(middle) == pytest.approx(mismatch * np.sqrt(units) / 2.0, rel=0.07)
    assert np.std(step) == pytest.approx(mismatch * np.sqrt(units - 1.0), rel=0.07)
    assert abs(np.mean(middle)) < 4.0 * np.std(middle) / np.sqrt(parts)


def test_a_light_highest_bit_loses_codes() -> None:
    """If the highest bit weighs 3 LSB less than all others with one unit, three codes are lost."""
    weights = np.array([1.0, 2.0, 4.0, 8.0, 13.0])
    levels = found_levels(trial_levels(weights))
    # 15 = 8+4+2+1 is tried above 13, so 13 to 15 are never found: the search takes the bit first.
    assert [search(weights, v) for v in (12.5, 13.0, 13.5)] == [12, 16, 16]
    widths = np.diff(levels)
    np.testing.assert_array_equal(np.flatnonzero(widths == 0.0) + 1, [13, 14, 15])
