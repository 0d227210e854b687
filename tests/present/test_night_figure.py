"""Histograms of whatever a night may give."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.present.night_figure import bin_edges


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
