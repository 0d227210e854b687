"""Histograms of whatever a night may give."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from compared import night
from hypothesis import given
from hypothesis import strategies as st
from nights import made_set

from frontend_sim.archive.set_table import open_set
from frontend_sim.comparison import compare_sets
from frontend_sim.present.drawing import new_figure
from frontend_sim.present.night_figure import bin_edges, draw_bars, night_figure
from frontend_sim.present.set_comparison_plot import draw_shares, set_comparison_figure
from frontend_sim.replay import replay_set
from frontend_sim.summary import summarize


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


@pytest.mark.parametrize("spread", [0.0, 1e-7, 1e-3, 5e-3, 0.05])
def test_bars_are_seen_beside_a_limit_that_is_far(spread: float) -> None:
    """A noise of 0.4987 LSB that hardly spreads shows bars of a width, and a limit of 0.7 LSB."""
    values = 0.4987 + spread * np.linspace(-1.0, 1.0, 600)
    edges = bin_edges(values, np.array([0.7, np.inf]))
    panel = max(0.7, edges[-1]) - edges[0]
    assert min(np.diff(edges)) >= 0.0049 * panel
    assert edges[0] <= values[0]
    assert values[-1] <= edges[-1] < 0.7


def test_runs_are_others_only_beside_draws() -> None:
    """The legend of a night of corners does not tell of other runs where there are no draws."""
    values = np.array([1.0, 2.0, np.inf])
    told = []
    for drawn in ([False] * 3, [True, False, True]):
        axes = new_figure(4.0, 3.0).subplots()
        draw_bars(axes, values, np.array(drawn))
        told.append(axes.get_legend_handles_labels()[1])
    assert told == [["runs"], ["draws", "other runs"]]


def test_a_bar_that_stands_alone_does_not_fill_its_panel() -> None:
    """Every run without a clipped code, and a limit of none: a bar at 0 %, room beside it."""
    axes = new_figure(4.0, 3.0).subplots()
    draw_bars(axes, np.zeros(30), np.zeros(30, np.bool_), np.zeros(1))
    (bar,) = axes.patches
    left, right = axes.get_xlim()
    assert bar.get_bbox().width <= 0.5 * (right - left)


def test_no_difference_stands_in_the_unit_of_the_values(tmp_path: Path) -> None:
    """A night against itself: corners in kHz, and their differences of zero in kHz as well."""
    table = night(tmp_path, "one", "[draws]\ncount = 2\n")
    figure = set_comparison_figure(compare_sets(table, table), table, table)
    assert figure.axes[0].get_xlabel() == "corner [kHz]"
    assert figure.axes[1].get_ylabel() == "second − first [kHz]"


def test_temperatures_stand_in_degrees_celsius(tmp_path: Path) -> None:
    """As in the set file and in the names of runs: -40 and 85 degC, not 233 and 358 K."""
    rules = (
        'keep = "nothing"\n[[vary]]\nkey = "environment.temperature"\n'
        'from = "-40 degC"\nto = "85 degC"\npoints = 9\n'
    )
    replay_set(made_set(tmp_path, rules), tmp_path / "night", on="in-process")
    found = summarize(open_set(tmp_path / "night"))
    panel = night_figure(found, found.checks[0]).axes[1]
    assert panel.get_xlabel() == "environment.temperature [degC]"
    told = np.concatenate([np.asarray(line.get_xdata()) for line in panel.get_lines()])
    assert (told.min(), told.max()) == (pytest.approx(-40.0), pytest.approx(85.0))


def test_a_share_counts_runs_without_a_value() -> None:
    """Of four runs one has no value and one an infinite one: half of them are below the largest."""
    axes = new_figure(4.0, 3.0).subplots()
    draw_shares(axes, np.array([2.0, np.nan, 1.0, np.inf]), label="first")
    (line,) = axes.get_lines()
    assert np.asarray(line.get_xdata()).tolist() == [1.0, 2.0]
    assert np.asarray(line.get_ydata()).tolist() == [0.25, 0.5]
