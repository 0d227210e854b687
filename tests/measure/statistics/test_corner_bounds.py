"""The worst run, and corners that promise too much."""

from itertools import product

import numpy as np
import pytest

from frontend_sim.errors import MeasureError
from frontend_sim.measure.statistics import (
    corner_excess,
    turning_parameters,
    worst_order,
    worst_run,
)


def _corners(response: object, count: int) -> np.ndarray:
    return np.array([response(*point) for point in product((-1.0, 1.0), repeat=count)])  # type: ignore[operator]  # a function of the test


def test_monotone_responses_are_bounded() -> None:
    """A response that is monotone in each parameter stays within its corners: no warning."""
    draws = np.random.default_rng(1).uniform(-1.0, 1.0, (3, 500))

    def response(a: float, b: float, c: float) -> float:
        return np.exp(a) + b**3 - 2.0 * c

    assert corner_excess(_corners(response, 3), response(*draws)) is None


def test_a_response_that_turns_is_found() -> None:
    """1 - a^2 + b is 1 at its corners for b = 1 less a^2 = 0; draws between go up to 1 beyond."""
    draws = np.random.default_rng(2).uniform(-1.0, 1.0, (2, 500))

    def response(a: float, b: float) -> float:
        return 1.0 - a**2 + b

    values = response(*draws)
    found = corner_excess(_corners(response, 2), values)
    assert found is not None
    assert (found.low, found.high, found.below) == (-1.0, 1.0, 0.0)
    assert found.above == pytest.approx(values.max() - 1.0, abs=1e-15)
    assert found.where == int(np.argmax(values))
    # The true share beyond: P(b > a^2) with a, b uniform on [-1, 1] is 1/3.
    assert found.share == pytest.approx(1.0 / 3.0, abs=0.07)
    assert "not monotone: runs within the tolerances lie up to" in found.text("level", "LSB")
    assert corner_excess(_corners(response, 2), values, tolerance=1.0) is None


def test_a_plain_number_keeps_its_digits() -> None:
    """The unit 1 of a share is not written, and takes no digit of the number with it."""
    found = corner_excess(np.array([0.0, 1.0]), np.array([1.21]))
    assert found is not None
    assert "up to 0.21 above" in found.text("overshoot", "1")
    assert "up to 0.21 V above" in found.text("level", "V")


def test_runs_without_a_value_are_no_part_of_the_share() -> None:
    """Of two runs that have a value one lies beyond; nothing is known of the other two."""
    found = corner_excess(np.array([0.0, 1.0]), np.array([np.nan, 0.5, np.nan, 1.5]))
    assert found is not None
    assert (found.share, found.where) == (0.5, 3)
    assert "50 % of them beyond" in found.text("level", "V")


def test_midpoints_name_the_parameter() -> None:
    """Ends and middle of one parameter at a time show along which the response turns."""
    lines = {"a": (0.0, 1.0, 0.0), "b": (0.0, 1.0, 2.0), "c": (1.0, 0.5, 1.2)}
    assert turning_parameters(lines) == ("a", "c")
    assert turning_parameters(lines, tolerance=0.6) == ("a",)


def test_infinite_corners_bound() -> None:
    """A corner that never settles is infinite, and bounds what is infinite as well."""
    assert corner_excess(np.array([1.0, np.inf]), np.array([2.0, np.inf, np.nan])) is None
    with pytest.raises(MeasureError, match="no corner has a value"):
        corner_excess(np.array([np.nan]), np.ones(2))


def test_worst_run_is_at_least_as_bad_as_every_other() -> None:
    """The smallest margin is the worst; a check without a value is worse than any."""
    margins = np.random.default_rng(3).normal(size=100)
    assert margins[worst_run(margins)] == margins.min()
    assert worst_run(np.array([1.0, -np.inf, np.nan, -3.0])) == 1
    assert worst_run(np.array([1.0, np.nan, -3.0])) == 1
    assert list(worst_order(np.array([2.0, 1.0, 1.0]))) == [1, 2, 0]
    with pytest.raises(MeasureError, match="no run"):
        worst_run(np.empty(0))
