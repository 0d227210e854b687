"""Long series lose points, never peaks."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.present.decimation import shown_flags, shown_points


@given(count=st.integers(0, 30_000), columns=st.integers(1, 300), seed=st.integers(0, 2**32 - 1))
def test_every_column_keeps_its_extremes(count, columns, seed):
    """Lowest and highest value of each column of pixels stay, first and last point too."""
    values = np.random.default_rng(seed).standard_normal(count)
    kept = shown_points(values, columns)
    assert np.all(np.diff(kept) > 0)
    assert len(kept) <= max(4 * columns, 0)
    edges = np.linspace(0, count, columns + 1).astype(int)
    for start, stop in pairwise(edges):
        if stop > start:
            here = values[kept[(kept >= start) & (kept < stop)]]
            assert here.min() == values[start:stop].min()
            assert here.max() == values[start:stop].max()
    if count:
        assert kept[0] == 0
        assert kept[-1] == count - 1


def test_one_peak_in_ten_million():
    """A single point a million times as high as the rest is among those drawn."""
    values = np.zeros(10_000_000)
    values[7_654_321] = 1.0
    kept = shown_points(values)
    assert 7_654_321 in kept
    assert len(kept) <= 6000


@pytest.mark.parametrize("count", [0, 1, 5, 6000])
def test_short_series_are_whole(count):
    """A short series keeps every point."""
    np.testing.assert_array_equal(shown_points(np.ones(count)), np.arange(count))


@given(
    flags=st.lists(st.booleans(), max_size=2000).map(lambda flags: np.array(flags, dtype=bool)),
    columns=st.integers(1, 50),
)
def test_each_column_with_a_flag_keeps_one(flags, columns):
    """At most one mark in a column, and one in each column that has any."""
    kept = shown_flags(flags, columns)
    assert np.all(flags[kept])
    raised = np.flatnonzero(flags)
    if len(raised) > columns:
        assert set(kept * columns // len(flags)) == set(raised * columns // len(flags))
        assert len(kept) <= columns
    else:
        np.testing.assert_array_equal(kept, raised)
