"""Which parameter explains the spread."""

import numpy as np
import pytest
from scipy import stats

from frontend_sim.measure.statistics import rank_correlations


def test_coefficient_and_probability_of_scipy() -> None:
    """Coefficient and probability are SciPy's, ties at their average rank; Holm for two."""
    generator = np.random.default_rng(5)
    first, second = generator.normal(size=(2, 80))
    measure = np.round(first**3 + generator.normal(size=80), 1)
    found = rank_correlations({"a": first, "b": second}, measure)
    assert [entry.parameter for entry in found] == ["a", "b"]
    one, two = (stats.spearmanr(row, measure) for row in (first, second))
    assert found[0].coefficient == pytest.approx(one.statistic, abs=1e-12)
    assert found[1].coefficient == pytest.approx(two.statistic, abs=1e-12)
    assert found[0].probability == pytest.approx(2.0 * one.pvalue, rel=1e-9)
    assert found[1].probability == pytest.approx(max(two.pvalue, 2.0 * one.pvalue), rel=1e-9)


def test_chance_alone_is_seldom_called_significant() -> None:
    """Of 400 nights with 20 parameters without influence, about 5 % name one, not 64 %."""
    generator = np.random.default_rng(8)
    named = 0
    for _ in range(400):
        parameters = {str(k): row for k, row in enumerate(generator.normal(size=(20, 60)))}
        found = rank_correlations(parameters, generator.normal(size=60))
        named += any(entry.probability < 0.05 for entry in found)
    # Three standard errors of 5 % over 400 nights are 3.3 %.
    assert named <= 33


def test_shares_of_independent_causes_add_up() -> None:
    """A sum of two uniform causes with weights 2 and 1 splits its spread as 4 to 1."""
    generator = np.random.default_rng(9)
    a, b = generator.uniform(size=(2, 20_000))
    found = {entry.parameter: entry for entry in rank_correlations({"a": a, "b": b}, 2.0 * a + b)}
    assert found["a"].share == pytest.approx(0.8, abs=0.03)  # ranks bend the shares a little
    assert found["b"].share == pytest.approx(0.2, abs=0.03)


def test_what_cannot_be_told_is_left_out() -> None:
    """Constant parameters, and those with fewer than four runs, have no correlation."""
    nan = np.nan
    parameters = {
        "constant": np.ones(6),
        "rare": np.array([1.0, 2.0, 3.0, nan, nan, nan]),
        "seen": np.array([1.0, 2.0, 3.0, 4.0, 5.0, nan]),
    }
    found = rank_correlations(parameters, np.array([1.0, 2.0, 4.0, 8.0, np.inf, 0.0]))
    assert [(entry.parameter, entry.coefficient, entry.runs) for entry in found] == [
        ("seen", 1.0, 5)
    ]
    assert found[0].probability == pytest.approx(2.0 / 120.0, rel=1e-12)
    assert rank_correlations(parameters, np.zeros(6)) == ()
