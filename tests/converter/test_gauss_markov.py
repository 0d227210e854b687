"""Correlated noise: its statistics, at any rhythm of the looks, in any cuts."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from frontend_sim.converter.gauss_markov import gauss_markov
from frontend_sim.converter.pattern import LookPattern
from frontend_sim.randomness import TILE

UNIFORM = LookPattern(0.0, 1e3)
BURSTS = LookPattern(0.1, 100.0, 8, 1e-4)


@pytest.mark.parametrize("samples", [0.2, 3.0, 100.0])
@pytest.mark.parametrize("lag", [1, 2, 10, 50])
def test_correlation_of_a_uniform_row(samples: float, lag: int) -> None:
    """exp(-lag / T) within 4.5 standard errors, of T = 0.2, 3 and 100 samples.

    The standard error of a correlation is at most sqrt((1 + 2 T) / N) (Bartlett, from memory).
    """
    count = 16 * TILE
    x = gauss_markov(3, "test", UNIFORM, samples / 1e3, 0, count)
    error = np.sqrt((1.0 + 2.0 * samples) / count)
    assert abs(np.mean(x[lag:] * x[:-lag]) - np.exp(-lag / samples)) < 4.5 * error
    assert abs(np.mean(x**2) - 1.0) < 4.5 * np.sqrt(2.0) * error
    assert abs(np.mean(x)) < 4.5 * np.sqrt(2.0) * error


def test_bursts_are_correlated_by_their_true_intervals() -> None:
    """Neighbours within a burst and across its gap have exp(-h / T) of their own h."""
    count, constant = 2000 * 64, 2e-3
    x = gauss_markov(5, "test", BURSTS, constant, 0, count).reshape(-1, 8)
    error = 4.5 * np.sqrt(1.0 / len(x))
    inside = np.mean(x[:, 3] * x[:, 4])
    across = np.mean(x[:-1, 7] * x[1:, 0])
    assert inside == pytest.approx(np.exp(-1e-4 / constant), abs=error)
    assert across == pytest.approx(np.exp(-(10e-3 - 7e-4) / constant), abs=error)


def test_the_ends_of_a_tile_are_like_any_other_place() -> None:
    """The step over the end of a tile, at 400 of them, has the variance of one step.

    Over chi-squared with 400 degrees of freedom at one in a thousand, at both ends of a tile; and
    neighbouring steps are as uncorrelated there as elsewhere.
    """
    constant, tiles = 50e-3, 400
    step = np.sqrt(-np.expm1(-2.0 * 1e-3 / constant))
    decay = np.exp(-1e-3 / constant)
    kicks = []
    for tile in range(1, tiles + 1):
        x = gauss_markov(7, "ends", UNIFORM, constant, tile * TILE - 3, tile * TILE + 3)
        kicks.append((x[1:] - decay * x[:-1]) / step)
    table = np.array(kicks)
    for column in table.T:
        assert 1e-3 < stats.chi2(tiles).cdf(float(column @ column)) < 1.0 - 1e-3
    for one, other in pairwise(table.T):
        assert abs(one @ other) / tiles < 4.5 / np.sqrt(tiles)


def test_values_are_normal() -> None:
    """Kolmogorov's test on values so far apart that they have forgotten each other."""
    x = gauss_markov(1, "test", UNIFORM, 2e-3, 0, 20 * TILE)[::40]
    assert stats.kstest(x, "norm").pvalue > 1e-3


@given(
    cuts=st.lists(st.integers(0, 3 * TILE), max_size=6),
    constant=st.floats(1e-9, 1e9),
    seed=st.integers(0, 2**63 - 1),
    pattern=st.sampled_from([UNIFORM, BURSTS]),
)
@settings(max_examples=20, deadline=None)
def test_cuts_never_show(cuts: list[int], constant: float, seed: int, pattern: LookPattern) -> None:
    """Any cut gives the same bits, at any time constant, and every value is a number."""
    whole = gauss_markov(seed, "cuts", pattern, constant, 0, 3 * TILE)
    assert np.all(np.isfinite(whole))
    edges = sorted({0, *cuts, 3 * TILE})
    parts = [gauss_markov(seed, "cuts", pattern, constant, a, b) for a, b in pairwise(edges)]
    np.testing.assert_array_equal(np.concatenate(parts), whole)


def test_limits() -> None:
    """A very short memory is white noise, a very long one a constant; streams have names."""
    white = gauss_markov(2, "a", UNIFORM, 1e-9, 0, TILE)
    assert abs(np.mean(white[1:] * white[:-1])) < 4.5 / np.sqrt(TILE)
    still = gauss_markov(2, "a", UNIFORM, 1e12, 0, TILE)
    assert np.max(np.abs(still - still[0])) < 1e-3
    other = gauss_markov(2, "b", UNIFORM, 1e-9, 0, TILE)
    assert abs(np.mean(white * other)) < 4.5 / np.sqrt(TILE)
    assert len(gauss_markov(2, "a", UNIFORM, 1.0, 5, 5)) == 0
