"""What is the same to rounding shows no change, wherever it is told."""

from __future__ import annotations

import numpy as np
import pytest

from frontend_sim.comparison.columns import column_difference
from frontend_sim.comparison.results import result_differences
from frontend_sim.comparison.series import exact_difference
from frontend_sim.comparison.tolerance import Tolerances
from frontend_sim.measure.result import Result


def level(value: float, limit: float = 1.0) -> Result:
    """Return a check on a level."""
    return Result("level", value, "V", limit, value - limit, "holds", bound="at least")


def test_a_result_that_is_the_same_has_no_change() -> None:
    """A change of 1e-13 is none, for the margin as well; one of 1e-3 is told, and a limit's too."""
    rows = [
        result_differences([level(1.5)], [other], Tolerances(), lambda name: False)[0]
        for other in (level(1.5 + 1e-13), level(1.5 + 1e-3), level(1.5, 1.2))
    ]
    assert [row.finding for row in rows] == ["same", "differs", "same"]
    assert [row.change for row in rows] == [0.0, pytest.approx(1e-3), 0.0]
    assert [row.margin_change for row in rows] == [0.0, pytest.approx(1e-3), pytest.approx(-0.2)]


@pytest.mark.parametrize(("size", "finding"), [(1e-13, "same"), (1e-3, "differs")])
def test_a_signal_that_is_the_same_has_no_change(size: float, finding: str) -> None:
    """Mean, rms and peak are zero where all of them are rounding, and as they are elsewhere."""
    time = np.arange(4.0)
    row = exact_difference("pin", "LSB", time, np.full(4, -size), 1e-9, 0.0, "by number")
    assert row.finding == finding
    told = 0.0 if finding == "same" else size
    assert (row.mean, row.rms, row.peak) == pytest.approx((-told, told, told), rel=1e-12)


@pytest.mark.parametrize(("size", "finding"), [(1e-13, "same"), (1e-3, "differs")])
def test_a_night_that_is_the_same_has_no_change(size: float, finding: str) -> None:
    """Mean, largest change, that of the worst margin and every pair are zero where all round."""
    first, verdicts = np.array([1.0, 2.0, np.nan]), np.array(["holds", "holds", "fails"])
    second = first + size
    row = column_difference(
        "level", "V", first, second, (verdicts, verdicts), (first - 0.5, second - 0.5), True, 0.0,
        1e-3,
    )  # fmt: skip
    assert row.finding == finding
    assert row.of_check
    told = 0.0 if finding == "same" else size
    assert (row.mean, row.peak, row.margin) == pytest.approx((told, told, told), rel=1e-9)
    np.testing.assert_allclose(row.difference, [told, told, np.nan], rtol=1e-9, atol=0.0)
