"""Time stamps: a uniform grid behind the rounding is found, and nothing else is taken for one."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from recorded import forget, points, rate, recording, values, write

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.recording.grid import find_grid, simplest
from frontend_sim.stimulus.recording.playback import StampedPlayback
from frontend_sim.stimulus.recording.series import Series
from frontend_sim.stimulus.recording.stamps import Stamps


def _file(folder: Path, stamps: Iterable[str]) -> Path:
    rows = "".join(f"{stamp},{i}\n" for i, stamp in enumerate(stamps))
    return write(folder / "log.csv", "t,x\n" + rows)


def _is_irregular(folder: Path, stamps: Iterable[str], **keys: object) -> bool:
    drives = recording(_file(folder, stamps), time="t", **keys).drives((1,))
    return isinstance(drives[0], StampedPlayback)


@pytest.mark.parametrize("true_rate", [1.0, 44.1, 50.0, 128.0, 250.0, 360.0, 500.0, 7812.5])
@pytest.mark.parametrize("style", ["{:.5f}", "{:.6f}", "{:.9f}", "{:.8g}", "{:.3e}"])
def test_rounded_stamps_give_the_true_rate(tmp_path: Path, true_rate: float, style: str) -> None:
    """Stamps printed with few digits give back exactly the rate that they were made with.

    360 Hz prints as 0.00278, 0.00556, ...; the mean of that is 359.99..., which would drift. Three
    significant digits are too few beyond a thousand points, so there are fewer of them.
    """
    count = 2000 if "e" not in style else 90
    stamps = [style.format(i / true_rate) for i in range(count)]
    assert rate(recording(_file(tmp_path, stamps), time="t")) == pytest.approx(true_rate, rel=1e-15)


def test_truncated_stamps_are_rounded_too(tmp_path: Path) -> None:
    """A logger that cuts digits off instead of rounding is understood as well."""
    stamps = [f"{i * 1000000 // 360 / 1e6:.6f}" for i in range(3000)]
    assert rate(recording(_file(tmp_path, stamps), time="t")) == 360.0


def test_stamps_may_start_anywhere(tmp_path: Path) -> None:
    """Playback begins with the first point, whatever its stamp; stamps may be negative."""
    stamps = [f"{-0.02 + i / 250:.3f}" for i in range(50)]
    stimulus = recording(_file(tmp_path, stamps), time="t")
    assert np.array_equal(points(stimulus), np.arange(50.0))
    assert stimulus.known_length() == pytest.approx(0.2, rel=1e-14)


def test_binary_stamps_in_single_precision(tmp_path: Path) -> None:
    """float32 stamps jitter by their own last bit; they still are the grid that they came from."""
    stamps = (np.arange(20000) / 360.0).astype(np.float32)
    np.savez(tmp_path / "log.npz", t=stamps, x=np.arange(20000.0))
    stimulus = recording(tmp_path / "log.npz", time="t", column="x")
    assert rate(stimulus) == 360.0


def test_a_missing_point_is_never_smeared_over_the_grid(tmp_path: Path) -> None:
    """One point left out makes the stamps irregular, even where they are printed coarsely."""
    for decimals in (2, 3, 6):
        stamps = [f"{i / 100:.{decimals}f}" for i in range(200) if i != 90]
        assert _is_irregular(tmp_path, stamps)


def test_jitter_beyond_the_print_is_kept(tmp_path: Path) -> None:
    """Stamps that jitter by several printed digits are played at their own instants."""
    jitter = np.random.default_rng(3).uniform(-4e-5, 4e-5, 400)
    stamps = [f"{i / 1000 + jitter[i]:.6f}" for i in range(400)]
    file = _file(tmp_path, stamps)
    stimulus = recording(file, time="t")
    times = np.array([float(stamp) for stamp in stamps]) - float(stamps[0])
    assert np.allclose(values(stimulus, times), np.arange(400.0), rtol=0.0, atol=1e-9)
    assert any("irregular" in note for note in stimulus.notes())


def test_as_given_never_minds_the_print(tmp_path: Path) -> None:
    """Ticks of 1 ms, 0 3 6 8 11, may be 360 Hz rounded, or exact: the user says."""
    stamps = [f"{round(i / 0.36):d}" for i in range(300)]
    file = _file(tmp_path, stamps)
    assert rate(recording(file, time="t", time_unit="ms")) == 360.0
    exact = recording(file, time="t", time_unit="ms", timestamps="as-given")
    assert isinstance(exact.drives((1,))[0], StampedPlayback)
    assert values(exact, np.array([0.003, 0.008]))[1] == 3.0
    grid = [f"{i / 250}" for i in range(300)]
    assert not _is_irregular(tmp_path, grid, timestamps="as-given")


def test_uniform_takes_the_mean_rate_and_tells_the_jitter(tmp_path: Path) -> None:
    """With timestamps = "uniform" jitter is ignored; the notes say how large it is."""
    stamps = [f"{i / 100 + 0.003 * (i % 2):.4f}" for i in range(101)]
    stimulus = recording(_file(tmp_path, stamps), time="t", timestamps="uniform")
    assert rate(stimulus) == 100.0
    assert any("mean rate of 100 Hz" in note and "0.003 s off" in note for note in stimulus.notes())


def test_uniform_accepts_the_repeats_of_a_coarse_clock(tmp_path: Path) -> None:
    """Ten points per printed stamp are ten points of a ten times higher rate, when asked for."""
    stamps = [f"{i // 10 / 100:.2f}" for i in range(1001)]
    stimulus = recording(_file(tmp_path, stamps), time="t", timestamps="uniform")
    assert rate(stimulus) == pytest.approx(1000.0, rel=2e-3)
    assert len(points(stimulus)) == 1001


def test_duplicates_are_an_error_unless_a_policy_is_given(tmp_path: Path) -> None:
    """Repeated stamps are refused with count and line, or merged to the first, last or mean."""
    file = write(tmp_path / "log.csv", "t,x\n0,1\n1,2\n1,4\n1,9\n2,3\n3,8\n3,0\n")
    with pytest.raises(RecordingError, match=r"3 points repeat .*line 4, line 5, line 8"):
        recording(file, time="t").known_length()
    for policy, expected in (
        ("first", [1.0, 2.0, 3.0, 8.0]),
        ("last", [1.0, 9.0, 3.0, 0.0]),
        ("mean", [1.0, 5.0, 3.0, 4.0]),
    ):
        stimulus = recording(file, time="t", duplicates=policy)
        assert np.array_equal(points(stimulus), expected)
        assert any(f"kept the {policy}" in note for note in stimulus.notes())


def test_duplicates_across_blocks(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A run of equal stamps that a block boundary cuts is one run."""
    stamps = np.repeat(np.arange(40.0), np.arange(40) % 7 + 1)
    numbers = np.random.default_rng(5).standard_normal(len(stamps))
    np.savez(tmp_path / "log.npz", t=stamps, x=numbers)
    expected = [numbers[stamps == second].mean() for second in np.unique(stamps)]
    for block in (1, 2, 5, 1 << 20):
        monkeypatch.setattr("frontend_sim.stimulus.recording.series.BLOCK", block)
        forget()
        stimulus = recording(tmp_path / "log.npz", time="t", column="x", duplicates="mean")
        assert np.allclose(points(stimulus), expected, rtol=0.0, atol=1e-14)


def test_gaps_are_told_or_refused(tmp_path: Path) -> None:
    """A gap is bridged and told by default; a longest_gap refuses it, with its line."""
    stamps = [str(i) for i in (0, 1, 2, 3, 9, 10, 11, 12)]
    file = _file(tmp_path, stamps)
    stimulus = recording(file, time="t")
    assert any("1 gap is longer" in note and "line 6" in note for note in stimulus.notes())
    assert values(stimulus, np.array([6.0]))[0] == 3.5
    assert recording(file, time="t", longest_gap="6 s").known_length() == 12.0
    with pytest.raises(RecordingError, match=r"gap of 6 s at line 6 is longer"):
        recording(file, time="t", longest_gap="5.9 s").known_length()
    assert recording(file, time="t", longest_gap="5.9 s", start=9.5).known_length() == 2.5


def test_steps_back_and_missing_stamps_are_errors(tmp_path: Path) -> None:
    """Time that goes back, or is not there, is an error with its line, also where blocks meet."""
    back = _file(tmp_path, ["0", "1", "2", "1.5", "3"])
    with pytest.raises(RecordingError, match=r"line 5: time goes back from 2 to 1\.5"):
        recording(back, time="t").known_length()
    hole = write(tmp_path / "hole.csv", "t,x\n0,1\n,2\n2,3\n")
    with pytest.raises(RecordingError, match=r"line 3: the time is missing"):
        recording(hole, time="t").known_length()


@given(
    interval=st.floats(1e-6, 1e3),
    width=st.floats(1e-12, 1e-2),
)
def test_simplest_lies_within_its_bounds(interval: float, width: float) -> None:
    """The interval with the fewest digits is between the bounds, and no shorter one is."""
    low, high = interval * (1.0 - width), interval * (1.0 + width)
    found = simplest(low, high)
    assert low <= found <= high


@given(
    true_rate=st.sampled_from([125.0, 200.0, 256.0, 360.0, 1000.0, 44100.0]),
    count=st.integers(20, 3000),
    digits=st.integers(1, 4),
    phase=st.floats(0.0, 1.0),
)
def test_any_rounding_is_explained(true_rate: float, count: int, digits: int, phase: float) -> None:
    """Stamps of any phase, rounded to a part of an interval, always are a grid of that rate's kind.

    The oracle is the definition: the found grid lies within half a digit of every stamp.
    """
    digit = 10.0 ** np.floor(np.log10(0.4 / true_rate)) / 10.0 ** (digits - 1)
    exact = (np.arange(count) + phase) / true_rate
    stamps = np.round(exact / digit) * digit
    series = Series(
        "t", "s", count, lambda a, b: stamps[a:b], lambda t: np.full(len(t), 0.5 * digit), str
    )
    grid = find_grid(Stamps(series, 1.0), printed=True)
    assert grid is not None
    off = stamps - grid.first - np.arange(count) / grid.rate
    assert np.max(np.abs(off)) <= max(0.5 * digit, 1e-6 / true_rate) * (1.0 + 1e-6)
    # Two grids that both lie within half a digit of all stamps differ by a digit at the far end.
    assert abs(1.0 / grid.rate - 1.0 / true_rate) * (count - 1) <= 2.0 * digit
