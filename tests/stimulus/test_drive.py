"""The two forms in which a signal reaches the engine: lines, and points of a uniform grid."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from drives import InMemory
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.stimulus.drive import Lines

BREAKS = np.array([0.1, 0.25, 0.7])
LINES = Lines.of(1.0, BREAKS, [2.0, -1.0, 0.5], [4.0, 0.0, -2.0])


def _lines(t: Any) -> Any:
    """Return the pieces, written out."""
    conditions = [t < 0.1, t < 0.25, t < 0.7]
    return np.select(
        conditions, [np.ones_like(t), 2 + 4 * (t - 0.1), -np.ones_like(t)], 0.5 - 2 * (t - 0.7)
    )


@given(time=st.floats(-1.0, 3.0) | st.sampled_from([0.1, 0.25, 0.7]))
def test_lines_are_their_pieces(time: float) -> None:
    """Any instant, each break itself, and one rounding beside each."""
    times = np.array([time, *BREAKS, *np.nextafter(BREAKS, 0.0), *np.nextafter(BREAKS, 1.0)])
    np.testing.assert_allclose(LINES.values(times), _lines(times), rtol=1e-14, atol=1e-14)


def test_held_levels_need_one_state() -> None:
    """Without slopes the generator is a single held value; with one slope it is a line."""
    held = Lines.of(0.0, [0.5], [1.0])
    assert held.generator.shape == (1, 1)
    assert LINES.generator.shape == (2, 2)
    np.testing.assert_array_equal(held.values(np.array([0.4, 0.5])), [0.0, 1.0])
    np.testing.assert_array_equal(LINES.states(np.array([0.0, 0.1]))[:, 1], [0.0, 4.0])


@given(start=st.floats(0.0, 1.0), stop=st.floats(0.0, 1.0))
def test_events_are_half_open(start: float, stop: float) -> None:
    """A break at ``stop`` counts, one at ``start`` does not."""
    start, stop = min(start, stop), max(start, stop)
    expected = [b for b in BREAKS if start < b <= stop]
    np.testing.assert_array_equal(LINES.events(start, stop), expected)
    np.testing.assert_array_equal(LINES.events(0.1, 0.7), [0.25, 0.7])


DATA = np.random.default_rng(3).standard_normal(40)


@pytest.mark.parametrize("between", ["line", "hold"])
@given(
    rate=st.floats(0.1, 1e6),
    origin=st.floats(0.0, 5.0).map(lambda v: round(v, 6)),
    position=st.floats(-3.0, 45.0),
)
@settings(max_examples=60)
def test_uniform_points_are_held_or_joined(
    between: Any, rate: float, origin: float, position: float
) -> None:
    """Between points as numpy.interp has it, or the last point; the ends are kept outside."""
    drive = InMemory(DATA, rate, between, origin)
    time = origin + position / rate
    found = drive.values(np.array([time]))[0]
    at = (time - origin) * rate
    slack = 8.0 * (np.spacing(abs(time) * rate) + np.spacing(abs(at) + 1.0))
    if between == "line":
        true = np.interp(at, np.arange(40.0), DATA)
        assert abs(found - true) <= 1e-12 + 8.0 * slack
    else:
        candidates = [DATA[int(np.clip(np.floor(at + d), 0, 39))] for d in (-slack, 0.0, slack)]
        assert found in candidates


@pytest.mark.parametrize("rate", [20e3, 44.1e3, 360.0, 1e6, 3.0, 0.7])
@pytest.mark.parametrize("origin", [0.0, 0.1])
def test_an_instant_of_the_grid_is_its_point(rate: float, origin: float) -> None:
    """k/rate meets point k exactly however it was rounded, a million points from the start too."""
    k = np.concatenate([np.arange(1000), 10**6 + np.arange(1000)])
    drive = InMemory(DATA, rate, "hold", origin)
    for times in (origin + k / rate, origin + k * (1.0 / rate)):
        index, since = drive.locate(times)
        np.testing.assert_array_equal(index, k)
        np.testing.assert_array_equal(since, 0.0)


@given(rate=st.floats(1.0, 1e6), times=st.lists(st.floats(0.0, 1e3), min_size=1, max_size=20))
def test_locating_brackets_the_instant(rate: float, times: list[float]) -> None:
    """Every instant lies at or after its point and before the next, to rounding."""
    at = np.sort(np.array(times))
    index, since = InMemory(DATA, rate).locate(at)
    assert np.all(since >= 0.0)
    assert np.all(since < (1.0 + 1e-6) / rate)
    slack = 8.0 * np.spacing(at * rate + 1.0) / rate
    assert np.all(np.abs(index / rate + since - at) <= slack)


def test_nothing_asked_nothing_given() -> None:
    """No instants, no values; no points, no points."""
    drive = InMemory(DATA, 10.0)
    assert len(drive.values(np.empty(0))) == 0
    assert len(LINES.values(np.empty(0))) == 0
