"""What is the same to rounding shows no change, wherever it is told."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from compared import LSB, made, varied

from frontend_sim.archive import open_record, record_run
from frontend_sim.comparison import compare_records
from frontend_sim.comparison.columns import column_difference
from frontend_sim.comparison.results import result_differences
from frontend_sim.comparison.series import exact_difference
from frontend_sim.comparison.tolerance import Tolerances
from frontend_sim.measure.result import Result
from frontend_sim.present.comparison_plot import comparison_figure
from frontend_sim.simulation import Simulation


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
    assert [row.words for row in rows] == ["same", "differs", "same, limit moved"]
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


def test_a_constant_shift_is_drawn_against_zero(tmp_path: Path) -> None:
    """An offset moves the pin by as much everywhere: the axis shows that, not its last bits."""
    for name, scenario in (("a", made()), ("b", varied(offset=0.2e-3))):
        record_run(Simulation(scenario), tmp_path / f"{name}.h5")
    with open_record(tmp_path / "a.h5") as one, open_record(tmp_path / "b.h5") as other:
        figure = comparison_figure(compare_records(one, other), one, other)
    low, high = figure.axes[1].get_ylim()
    assert low <= 0.0 < 0.1e-3 / LSB < high


@pytest.mark.parametrize(("moved", "words"), [(0.0, "same"), (-0.2, "same, limit moved")])
def test_a_limit_that_moved_is_told(moved: float, words: str) -> None:
    """The same values and verdicts with another limit: the margin changed, and it is said why."""
    values, verdicts = np.array([1.0, 2.0]), np.array(["holds", "holds"])
    row = column_difference(
        "level", "V", values, values, (verdicts, verdicts), (values - 0.5, values - 0.5 + moved),
        True, 0.0, 1e-3,
    )  # fmt: skip
    assert (row.finding, row.margin, row.words) == ("same", pytest.approx(moved), words)
