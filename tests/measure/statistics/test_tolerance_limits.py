"""Distribution-free limits and percentiles."""

import numpy as np
import pytest
from scipy import stats

from frontend_sim.errors import MeasureError
from frontend_sim.measure.statistics import (
    confidence_of,
    draws_needed,
    percentile,
    tolerance_limits,
)


@pytest.mark.parametrize(
    ("coverage", "confidence", "one", "two"),
    [(0.95, 0.95, 59, 93), (0.9, 0.95, 29, 46), (0.99, 0.95, 299, 473), (0.95, 0.99, 90, 130)],
)
def test_wilks_numbers(coverage: float, confidence: float, one: int, two: int) -> None:
    """95/95 needs 59 draws to one side and 93 to both (Wilks 1941); the rest from his equations.

    One side: 1 - p^n >= c. Both: 1 - p^n - n (1 - p) p^(n - 1) >= c.
    """
    assert draws_needed(coverage, confidence) == one
    assert draws_needed(coverage, confidence, "both") == two

    def both(n: int) -> float:
        return 1.0 - coverage**n - n * (1.0 - coverage) * coverage ** (n - 1)

    assert 1.0 - coverage**one >= confidence > 1.0 - coverage ** (one - 1)
    assert both(two) >= confidence > both(two - 1)


def test_confidence_is_that_of_the_beta_distribution() -> None:
    """The share between two order statistics is beta distributed (SciPy's as the oracle)."""
    for draws, coverage, blocks in ((93, 0.95, 2), (500, 0.9, 37), (10, 0.5, 10)):
        expected = stats.beta.sf(coverage, draws + 1 - blocks, blocks)
        assert confidence_of(draws, coverage, blocks) == pytest.approx(expected, abs=1e-12)
    assert confidence_of(3, 0.5, 4) == 0.0


@pytest.mark.parametrize("side", ["both", "low", "high"])
def test_limits_hold_what_they_say_whatever_the_distribution(side: str) -> None:
    """Of 2000 samples of a skew distribution at least 95 % have limits that hold 90 % of all."""
    source, generator = stats.lognorm(1.3), np.random.default_rng(4)
    held = []
    for _ in range(2000):
        limits = tolerance_limits(source.rvs(200, random_state=generator), 0.9, 0.95, side)
        held.append(source.cdf(limits.high) - source.cdf(limits.low) >= 0.9)
        assert limits.confidence >= 0.95
    # Three standard errors of a share of 95 % over 2000 samples are 1.5 %.
    assert np.mean(held) >= 0.935
    assert np.mean(held) <= 0.99


def test_limits_of_the_least_sample_are_its_extremes() -> None:
    """With 93 draws the limits are the smallest and the largest value, nothing left out."""
    values = np.random.default_rng(1).normal(size=93)
    limits = tolerance_limits(values)
    assert (limits.low, limits.high, limits.left_out) == (values.min(), values.max(), 0)
    one = tolerance_limits(values[:59], side="high")
    assert one.low == -np.inf
    assert one.high == values[:59].max()
    # The 93 draws for both sides leave one out to one side, as Wilks' number for that is 93 too.
    assert tolerance_limits(values, side="high").high == np.sort(values)[-2]


def test_large_samples_leave_extremes_out() -> None:
    """The next block left out would break the confidence."""
    values = np.arange(10_000.0)
    limits = tolerance_limits(values)
    left = limits.left_out
    assert left > 400
    assert confidence_of(10_000, 0.95, left + 2) >= 0.95 > confidence_of(10_000, 0.95, left + 3)
    assert limits.high - limits.low == 10_000 - 1 - left


def test_samples_that_are_too_small_are_refused_with_the_number() -> None:
    """The message says how many draws would do."""
    with pytest.raises(MeasureError, match=r"92 draws .* 93 do"):
        tolerance_limits(np.zeros(92))
    with pytest.raises(MeasureError, match=r"missing: 1 of 3 values; leave out"):
        tolerance_limits(np.array([1.0, np.nan, 2.0]))
    with pytest.raises(MeasureError, match="at least one run"):
        percentile(np.empty(0), 0.5)
    with pytest.raises(MeasureError, match="share is 50"):
        percentile(np.ones(3), 50.0)


@pytest.mark.parametrize("share", [0.05, 0.5, 0.99])
def test_percentile_interval_covers(share: float) -> None:
    """Of 3000 samples at least 95 % have an interval with the true percentile in it."""
    source, generator = stats.expon(), np.random.default_rng(7)
    true = source.ppf(share)
    samples = source.rvs((3000, 150), random_state=generator)
    found = [percentile(row, share) for row in samples]
    inside = np.mean([each.low <= true <= each.high for each in found])
    assert min(each.confidence for each in found) >= 0.95
    # Three standard errors below what the interval says of itself.
    assert inside >= found[0].confidence - 0.012
    assert inside <= found[0].confidence + 0.012


@pytest.mark.parametrize("share", [0.1, 0.5, 0.9])
def test_percentile_interval_of_scipy(share: float) -> None:
    """The interval is that of SciPy's quantile test where both its sides are equally cautious."""
    values = np.random.default_rng(3).normal(size=201)
    found = percentile(values, share)
    expected = stats.quantile_test(values, p=share).confidence_interval(0.95)
    assert (found.low, found.high) == (expected.low, expected.high)
    assert found.value == pytest.approx(np.quantile(values, share), abs=1e-12)


def test_percentiles_out_of_reach_are_open() -> None:
    """Ten draws bound the 99th percentile from below alone; infinite values are kept."""
    found = percentile(np.array([1.0] * 8 + [np.inf] * 2), 0.99)
    assert found.high == np.inf
    assert found.value == np.inf
    assert percentile(np.arange(10.0), 0.99).high == np.inf
