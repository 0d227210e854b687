"""The yield and its interval."""

from functools import cache

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from frontend_sim.errors import MeasureError
from frontend_sim.measure.statistics import PassRate, pass_rate

NIGHTS = 1000
"""Simulated nights whose true yield is known."""


@cache
def _rate(passed: int, total: int, method: str) -> PassRate:
    return pass_rate(passed, total, method=method)


def _coverage(total: int, true: float, method: str) -> float:
    """Exact share of nights whose interval contains the true yield, by the binomial law."""
    passed = np.arange(total + 1)
    weights = stats.binom.pmf(passed, total, true)
    kept = [k for k in passed if weights[k] > 1e-12]
    rates = [_rate(int(k), total, method) for k in kept]
    inside = [rate.low <= true <= rate.high for rate in rates]
    return float(np.sum(weights[kept][inside]))


@pytest.mark.parametrize(("total", "true"), [(100, 0.9), (200, 0.95), (1000, 0.99), (1000, 0.5)])
def test_interval_covers_the_truth_in_95_of_100_nights(total: int, true: float) -> None:
    """Of 1000 simulated nights the 95 % interval contains the true yield in 93 to 97 %."""
    passed = np.random.default_rng(6).binomial(total, true, NIGHTS)
    known = {int(k): pass_rate(int(k), total) for k in np.unique(passed)}
    inside = [known[int(k)].low <= true <= known[int(k)].high for k in passed]
    assert 0.93 <= np.mean(inside) <= 0.97


@pytest.mark.parametrize("total", [50, 100, 200])
def test_coverage_with_ten_failures_to_expect(total: int) -> None:
    """The exact coverage lies between 95 and 97 % for every true yield tried, not on average."""
    trues = np.linspace(0.5, 1.0 - 10.0 / total, 21)
    coverages = [_coverage(total, true, "blaker") for true in trues]
    assert min(coverages) >= 0.95
    assert max(coverages) <= 0.97


@pytest.mark.parametrize("total", [20, 100, 1000])
def test_coverage_with_few_failures_to_expect(total: int) -> None:
    """With 0.1 to 10 failures to expect 95 % or more are covered, where mid-p falls to 92 %.

    On the average of those shares it is nearer to 95 % than the interval of Clopper and Pearson.
    """
    trues = 1.0 - np.linspace(0.1, 10.0, 67) / total
    blaker, exact, mid_p = (
        np.array([_coverage(total, true, method) for true in trues])
        for method in ("blaker", "exact", "mid-p")
    )
    assert blaker.min() >= 0.95
    assert np.all(blaker <= exact + 1e-9)
    assert exact.mean() - blaker.mean() > 0.005
    assert mid_p.min() < 0.935


def test_exact_interval_never_covers_less_than_it_says() -> None:
    """Clopper-Pearson covers 95 % or more up to a yield of 99.85 %, where others fall below."""
    trues = np.linspace(0.9, 0.9985, 34)
    assert min(_coverage(100, true, "exact") for true in trues) >= 0.95
    assert min(_coverage(100, true, "mid-p") for true in trues) >= 0.91
    assert min(_coverage(100, true, "wilson") for true in trues) < 0.87


def _not_spoken_against(passed: int, total: int, confidence: float) -> np.ndarray:
    """Return shares that Blaker's test does not reject, by its definition, on a grid.

    Its probability is that of all counts whose smaller tail is no more probable than the smaller
    tail of the count that was seen.
    """
    shares = np.linspace(0.0, 1.0, 4001)
    weights = stats.binom.pmf(np.arange(total + 1), total, shares[:, np.newaxis])
    below = np.cumsum(weights, axis=1)
    above = np.cumsum(weights[:, ::-1], axis=1)[:, ::-1]
    smaller = np.minimum(below, above)
    rarer = smaller <= smaller[:, [passed]] * (1.0 + 1e-9)
    return shares[np.sum(weights, axis=1, where=rarer) >= 1.0 - confidence]


@pytest.mark.parametrize("confidence", [0.8, 0.95])
@pytest.mark.parametrize(
    ("passed", "total"), [(0, 7), (7, 7), (3, 7), (1, 10), (19, 20), (48, 50), (97, 100), (50, 100)]
)
def test_blaker_by_its_definition(passed: int, total: int, confidence: float) -> None:
    """The ends are those of all shares that the test does not reject, to the step of the grid."""
    known = _not_spoken_against(passed, total, confidence)
    found = pass_rate(passed, total, confidence)
    assert (found.low, found.high) == pytest.approx((known[0], known[-1]), abs=2.6e-4)


@pytest.mark.parametrize(("passed", "total"), [(0, 7), (7, 7), (3, 7), (950, 1000), (1, 10000)])
@pytest.mark.parametrize("method", ["exact", "wilson"])
def test_intervals_of_scipy(passed: int, total: int, method: str) -> None:
    """Clopper-Pearson and Wilson intervals are those of SciPy's binomial test."""
    expected = stats.binomtest(passed, total).proportion_ci(0.95, method=method)
    found = pass_rate(passed, total, method=method)
    assert (found.low, found.high) == pytest.approx((expected.low, expected.high), abs=1e-12)


def test_mid_p_solves_its_equation() -> None:
    """At the ends of the interval half of the probability of what was seen counts."""
    found = pass_rate(37, 50, 0.9, "mid-p")
    for share, upper in ((found.low, True), (found.high, False)):
        tail = stats.binom.sf(37, 50, share) if upper else stats.binom.cdf(36, 50, share)
        assert tail + 0.5 * stats.binom.pmf(37, 50, share) == pytest.approx(0.05, abs=1e-12)


def test_all_runs_pass() -> None:
    """A night without a failure has an upper end of 1; by mid-p a lower one of 0.05^(1/n)."""
    assert pass_rate(200, 200).high == 1.0
    found = pass_rate(200, 200, method="mid-p")
    assert found.high == 1.0
    assert found.low == pytest.approx(0.05 ** (1.0 / 200.0), abs=1e-12)
    assert found.rate == 1.0


@given(st.integers(1, 3000), st.floats(0.0, 1.0), st.floats(0.5, 0.999))
def test_interval_contains_the_rate_and_mirrors(total: int, share: float, level: float) -> None:
    """The interval contains the rate seen, and failures mirror passes."""
    passed = round(share * total)
    found, other = pass_rate(passed, total, level), pass_rate(total - passed, total, level)
    assert 0.0 <= found.low <= found.rate <= found.high <= 1.0
    assert found.low == pytest.approx(1.0 - other.high, abs=1e-12)


@pytest.mark.parametrize(
    ("passed", "total", "confidence", "method", "told"),
    [
        (1, 0, 0.95, "mid-p", "a yield needs a run"),
        (3, 2, 0.95, "mid-p", "3 of 2 runs"),
        (1, 2, 95.0, "mid-p", "confidence is 95"),
        (1, 2, 0.95, "wald", "no interval 'wald'; known are blaker, mid-p, exact, wilson"),
    ],
)
def test_wrong_questions(
    passed: int, total: int, confidence: float, method: str, told: str
) -> None:
    """A question without an answer is refused, with what would have one."""
    with pytest.raises(MeasureError, match=told):
        pass_rate(passed, total, confidence, method)
