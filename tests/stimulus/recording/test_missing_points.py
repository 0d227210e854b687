"""Points without a value: refused, or bridged under a policy, however blocks cut the recording."""

from __future__ import annotations

from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from recorded import points, recording, values, write

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.recording.missing import Missing, bridged, find_holes
from frontend_sim.stimulus.recording.series import Series

Real = NDArray[np.float64]
NAN = float("nan")


def _series(numbers: Real) -> Series:
    return Series("x", "", len(numbers), lambda a, b: numbers[a:b], np.zeros_like, str)


@pytest.mark.parametrize(
    ("policy", "expected"),
    [
        ("hold", [2.0, 2.0, 2.0, 2.0, 8.0, 8.0]),
        ("line", [2.0, 2.0, 4.0, 6.0, 8.0, 8.0]),
        ("zero", [0.0, 2.0, 0.0, 0.0, 8.0, 0.0]),
    ],
)
def test_policies_in_a_table(tmp_path: Path, policy: str, expected: list[float]) -> None:
    """Empty cells, NaN, words for nothing, and overloads are bridged; the notes tell the lines."""
    file = write(tmp_path / "log.csv", "t,x\n0,\n1,2\n2,NaN\n3,n/a\n4,8\n5,inf\n")
    stimulus = recording(file, time="t", missing=policy)
    assert np.array_equal(points(stimulus), expected)
    assert any("4 points without a value (line 2, line 4" in note for note in stimulus.notes())


def test_refused_by_default(tmp_path: Path) -> None:
    """Without a policy missing points are an error that says how many, where, and what to do."""
    file = write(tmp_path / "log.csv", "t,x\n0,1\n1,\n2,3\n")
    with pytest.raises(RecordingError, match=r"1 of 3 points has no value \(line 3\); set missing"):
        recording(file, time="t").known_length()


def test_nothing_at_all_is_an_error(tmp_path: Path) -> None:
    """A part without any value cannot be bridged."""
    np.save(tmp_path / "log.npy", np.array([1.0, NAN, NAN, 1.0]))
    with pytest.raises(RecordingError, match="no value at all"):
        recording(tmp_path / "log.npy", rate=1, missing="hold", start=1, end=2).notes()


def test_only_the_part_that_is_played_counts(tmp_path: Path) -> None:
    """What is missing outside of start and end does not matter."""
    np.save(tmp_path / "log.npy", np.array([NAN, 1.0, 2.0, 3.0, NAN]))
    stimulus = recording(tmp_path / "log.npy", rate=1, start=1, end=3)
    assert np.array_equal(points(stimulus), [1.0, 2.0])


def test_only_the_part_that_is_played_counts_at_irregular_times(tmp_path: Path) -> None:
    """The same at irregular times: the hole at the end is not played."""
    file = write(tmp_path / "log.csv", "t,x\n0,0\n1,1\n3,3\n4,4\n9,\n")
    stimulus = recording(file, time="t", start=0.5, end=3.5)
    assert np.allclose(values(stimulus, np.array([0.0, 2.0])), [0.5, 2.5], rtol=1e-14, atol=0.0)
    with pytest.raises(RecordingError, match="no value"):
        recording(file, time="t", start=0.5, end=4.5).notes()


def test_longest_gap_bounds_missing_points(tmp_path: Path) -> None:
    """The time between the values on both sides of a hole must not exceed longest_gap."""
    np.save(tmp_path / "log.npy", np.array([0.0, NAN, NAN, 3.0, 4.0]))
    file = tmp_path / "log.npy"
    assert np.array_equal(
        points(recording(file, rate=1, missing="line", longest_gap=3)), np.arange(5.0)
    )
    with pytest.raises(RecordingError, match=r"gap of 3 s at index 1"):
        recording(file, rate=1, missing="line", longest_gap=2.9).notes()


def test_line_uses_irregular_times(tmp_path: Path) -> None:
    """Between irregular stamps the line goes in time, not in points."""
    file = write(tmp_path / "log.csv", "t,x\n0,0\n1,\n10,10\n11,0\n")
    stimulus = recording(file, time="t", missing="line")
    assert np.allclose(values(stimulus, np.array([1.0, 5.0])), [1.0, 5.0], rtol=1e-14, atol=0.0)


def _reference(times: Real, numbers: Real, policy: Missing) -> list[float]:
    """Bridge point by point, in the plainest way."""
    there = [i for i in range(len(numbers)) if np.isfinite(numbers[i])]
    result = []
    for i, number in enumerate(numbers):
        before = [j for j in there if j < i]
        after = [j for j in there if j > i]
        if np.isfinite(number):
            result.append(number)
        elif policy == "zero":
            result.append(0.0)
        elif policy == "hold" or not before or not after:
            result.append(numbers[before[-1] if before else after[0]])
        else:
            a, b = before[-1], after[0]
            share = (times[i] - times[a]) / (times[b] - times[a])
            result.append(numbers[a] + share * (numbers[b] - numbers[a]))
    return result


@settings(deadline=None)
@given(
    numbers=st.lists(
        st.sampled_from([NAN, NAN, 1.0, -2.0, 4.0, float("inf")]), min_size=1, max_size=40
    ),
    cuts=st.lists(st.integers(0, 40), max_size=6),
    policy=st.sampled_from(["hold", "line", "zero"]),
    steps=st.lists(st.floats(0.01, 10.0), min_size=40, max_size=40),
)
def test_bridging_agrees_with_the_plain_way(
    numbers: list[float], cuts: list[int], policy: Missing, steps: list[float]
) -> None:
    """Any holes, any cut into blocks, any times: as if done point by point."""
    array, times = np.array(numbers), np.cumsum(steps)[: len(numbers)]
    if not np.isfinite(array).any():
        return
    edges = sorted({0, len(array), *(cut for cut in cuts if cut < len(array))})
    blocks = [(times[a:b], array[a:b]) for a, b in pairwise(edges)]
    result = np.concatenate(list(bridged(blocks, policy)))
    assert np.allclose(result, _reference(times, array, policy), rtol=1e-12, atol=1e-12)


@given(
    numbers=st.lists(st.sampled_from([NAN, 1.0]), min_size=1, max_size=60), block=st.integers(1, 9)
)
def test_holes_are_counted_the_same_in_any_blocks(numbers: list[float], block: int) -> None:
    """Count, first positions and the longest run do not depend on blocks."""
    array = np.array(numbers)
    series = _series(array)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("frontend_sim.stimulus.recording.series.BLOCK", block)
        holes = find_holes(series, 0, len(array))
    text = "".join("x" if np.isnan(number) else "." for number in numbers)
    longest = max(map(len, text.split(".")))
    assert holes.count == text.count("x")
    assert holes.first == tuple(np.flatnonzero(np.isnan(array))[:5])
    assert holes.longest == longest
    assert not longest or holes.longest_at == text.index("x" * longest)


@pytest.mark.parametrize("header", ["", "x,y\n", "x,y\n-,-\n", "x,y\n,\n"])
def test_missing_points_at_the_start_keep_their_time(tmp_path: Path, header: str) -> None:
    """Rows of missing points alone are points of the table; dashes under the header are none."""
    file = write(tmp_path / "log.csv", f"{header}NaN,NaN\nn/a,\n2,3\n4,5\n6,7\n")
    stimulus = recording(file, rate=1, column="x" if header.count("\n") == 1 else 1, missing="hold")
    assert np.array_equal(points(stimulus), [2.0, 2.0, 2.0, 4.0, 6.0])


def test_a_row_without_a_date_is_no_row_of_dates(tmp_path: Path) -> None:
    """Above the first date a row without one is left out, as before the table began."""
    file = write(tmp_path / "log.csv", "NaN,NaN\n12:00:00,2\n12:00:01,3\n12:00:02,4\n")
    assert np.array_equal(points(recording(file, time=1, column=2)), [2.0, 3.0, 4.0])
