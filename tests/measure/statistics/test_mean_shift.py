"""Differences judged against their noise."""

import math

import numpy as np
import pytest
from scipy import signal, stats

from frontend_sim.measure.statistics import flip_probability, independent_shift, series_shift

LEVEL = 0.01
"""Rate of false alarms that the tests ask for."""

TRIALS = 1000


def _alarms(noise: np.ndarray) -> float:
    return float(np.mean([series_shift(row).probability() < LEVEL for row in noise]))


@pytest.mark.parametrize("count", [40, 300, 4000])
def test_white_noise_gives_no_more_alarms_than_asked_for(count: int) -> None:
    """Of 1000 series of white noise, one in a hundred is called shifted."""
    noise = np.random.default_rng(count).normal(size=(TRIALS, count))
    # Three standard errors of 1 % over 1000 trials are 0.94 %.
    assert _alarms(noise) <= LEVEL + 0.0095


@pytest.mark.parametrize("pole", [0.9, 0.99])
def test_slow_noise_gives_few_alarms(pole: float) -> None:
    """Noise that remembers 10 or 100 neighbours in 4000 gives few; the plain error 50 or more %."""
    white = np.random.default_rng(11).normal(size=(TRIALS, 5000))
    noise = signal.lfilter([1.0], [1.0, -pole], white, axis=1)[:, 1000:]
    assert _alarms(noise) <= 0.02
    plain = [stats.ttest_1samp(row, 0.0).pvalue < LEVEL for row in noise[:200]]
    assert np.mean(plain) > 0.4


def test_a_shift_of_a_tenth_is_found() -> None:
    """A shift of 0.1 in noise of 1 is found in 20 000 values nearly always, sign and size right."""
    noise = np.random.default_rng(12).normal(size=(200, 20_000)) - 0.1
    found = [series_shift(row) for row in noise]
    assert np.mean([each.probability() < 1e-3 for each in found]) > 0.99
    assert np.mean([each.mean for each in found]) == pytest.approx(-0.1, abs=0.002)
    assert np.mean([each.probability(0.1) < LEVEL for each in found]) < 0.03


def test_paired_differences_of_scipy() -> None:
    """Independent differences are judged as SciPy's paired test of Student does."""
    first, second = np.random.default_rng(13).normal(size=(2, 30))
    expected = stats.ttest_rel(first, second + 0.3)
    found = independent_shift(first - second - 0.3)
    assert found.probability() == pytest.approx(expected.pvalue, rel=1e-10)
    # At the smallest shift that is visible, the probability is the level.
    assert type(found)(found.visible(LEVEL), found.error, 29, 30).probability() == pytest.approx(
        LEVEL, rel=1e-9
    )


def test_too_few_values_tell_nothing() -> None:
    """Fewer than eight differences have no probability below 1, and say so."""
    found = independent_shift(np.full(7, 5.0))
    assert found.mean == 5.0
    assert found.probability() == 1.0
    assert math.isinf(found.visible(LEVEL))
    assert math.isnan(independent_shift(np.empty(0)).mean)


def test_differences_that_are_all_equal_are_certain() -> None:
    """Without noise any difference beyond the tolerance is one."""
    assert series_shift(np.full(100, 0.2)).probability() == 0.0
    assert series_shift(np.full(100, 0.2)).probability(0.25) == 1.0
    assert series_shift(np.zeros(100)).probability() == 1.0


@pytest.mark.parametrize(("better", "worse"), [(0, 0), (0, 9), (3, 12), (40, 41), (7, 7)])
def test_flips_of_scipy(better: int, worse: int) -> None:
    """Flips are judged as SciPy's exact binomial test with one half."""
    total = better + worse
    expected = stats.binomtest(better, total).pvalue if total else 1.0
    assert flip_probability(better, worse) == pytest.approx(expected, rel=1e-12)
