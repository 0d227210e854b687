"""Which points of two runs are held side by side."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.comparison.instants import by_instant, by_number, same_clock


def test_every_second_point_of_twice_the_rate() -> None:
    """At 10 and 20 kHz the instants of the slower are common, and no other."""
    slow, quick = np.arange(100) / 10e3, np.arange(200) / 20e3
    found = by_instant(slow, quick)
    assert list(found.first) == list(range(100))
    assert list(found.second) == list(range(0, 200, 2))
    assert found.share == 0.5
    assert found.told == "at 100 common instants of 100 and 200"


def test_rates_with_few_common_instants() -> None:
    """At 10 and 7 kHz every millisecond is common."""
    found = by_instant(np.arange(100) / 10e3, np.arange(70) / 7e3)
    assert list(found.first) == list(range(0, 100, 10))
    assert list(found.second) == list(range(0, 70, 7))


def test_nothing_in_common_is_said() -> None:
    """Instants half an interval apart are no pairs, nothing is interpolated."""
    found = by_instant(np.arange(10) / 1e3, (np.arange(10) + 0.5) / 1e3)
    assert len(found) == 0
    assert found.told == "no common instants"
    assert len(by_instant(np.empty(0), np.arange(3.0))) == 0


@given(
    st.lists(st.integers(0, 400), min_size=1, max_size=60, unique=True),
    st.lists(st.integers(0, 400), min_size=1, max_size=60, unique=True),
)
def test_pairs_are_those_of_sets(first: list[int], second: list[int]) -> None:
    """On a grid of 0.1 ms the pairs are the intersection of the two sets of instants."""
    one, other = sorted(first), sorted(second)
    found = by_instant(np.array(one) * 1e-4, np.array(other) / 1e4)
    pairs = {(one[i], other[j]) for i, j in zip(found.first, found.second, strict=True)}
    assert pairs == {(k, k) for k in set(one) & set(other)}


def test_runs_of_one_clock_are_paired_by_number() -> None:
    """A shorter run is compared as long as it lasts; jitter does not matter to the number."""
    found = by_number(80, 100)
    assert len(found) == 80
    assert found.told == "by number, the first 80 of 100"
    assert same_clock({"rate": 1e3, "bits": 12}, {"rate": 1e3, "bits": 16})
    assert not same_clock({"rate": 1e3}, {"rate": 1e3, "first": 1e-4})
