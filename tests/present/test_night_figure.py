"""Histograms of whatever a night may give."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.present.drawing import new_figure
from frontend_sim.present.night_figure import bin_edges, draw_bars
from frontend_sim.present.set_comparison_plot import draw_shares


@given(st.lists(st.floats(-1e12, 1e12), min_size=1, max_size=50))
def test_edges_hold_all_values(values: list[float]) -> None:
    """Any values, all alike or not, lie within increasing edges."""
    edges = bin_edges(np.array(values))
    assert np.all(np.diff(edges) > 0.0)
    assert edges[0] <= min(values)
    assert edges[-1] >= max(values)


@pytest.mark.parametrize("level", [0.0, 1.65, -3.3e-9])
def test_values_that_differ_by_rounding_are_one_bar(level: float) -> None:
    """A level that is the same in every run but for the last bits has one bar."""
    values = np.array([level, np.nextafter(level, 10.0), np.nextafter(level, -10.0)])
    assert len(bin_edges(values)) == 2 or level == 0.0
    assert len(np.histogram(values, bin_edges(values))[0]) >= 1


@pytest.mark.parametrize(("level", "limits"), [(0.0, [1.0]), (500.0, [490.0, 3000.0, np.nan])])
def test_the_bar_of_a_constant_does_not_reach_its_limit(level: float, limits: list[float]) -> None:
    """Values that are all alike are drawn where they are: 0 % is not near 1 %."""
    low, high = bin_edges(np.full(30, level), np.array(limits))
    assert low < level < high
    nearest = np.nanmin(np.abs(np.array(limits) - level))
    assert high - low <= 0.05 * nearest


def test_runs_are_others_only_beside_draws() -> None:
    """The legend of a night of corners does not tell of other runs where there are no draws."""
    values = np.array([1.0, 2.0, np.inf])
    told = []
    for drawn in ([False] * 3, [True, False, True]):
        axes = new_figure(4.0, 3.0).subplots()
        draw_bars(axes, values, np.array(drawn))
        told.append(axes.get_legend_handles_labels()[1])
    assert told == [["runs"], ["draws", "other runs"]]


def test_a_share_counts_runs_without_a_value() -> None:
    """Of four runs one has no value and one an infinite one: half of them are below the largest."""
    axes = new_figure(4.0, 3.0).subplots()
    draw_shares(axes, np.array([2.0, np.nan, 1.0, np.inf]), label="first")
    (line,) = axes.get_lines()
    assert np.asarray(line.get_xdata()).tolist() == [1.0, 2.0]
    assert np.asarray(line.get_ydata()).tolist() == [0.25, 0.5]
