"""Playback: the right value at any instant, whatever start, end, speed, and blocks."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from recorded import forget, points, recording, values, write

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.drive import PiecewiseDrive, UniformDrive
from frontend_sim.stimulus.recording import gaps, series, store, window
from frontend_sim.stimulus.recording.playback import Conversion, Playback

X = np.random.default_rng(8).standard_normal(50)
STAMPS = np.cumsum(np.random.default_rng(9).uniform(0.05, 2.0, 50))


@pytest.fixture
def uniform(tmp_path: Path) -> Path:
    """Fifty points without times."""
    np.save(tmp_path / "uniform.npy", X)
    return tmp_path / "uniform.npy"


@pytest.fixture
def irregular(tmp_path: Path) -> Path:
    """Fifty points at irregular times."""
    np.savez(tmp_path / "irregular.npz", t=STAMPS, x=X)
    return tmp_path / "irregular.npz"


def _signal(stamps: np.ndarray, times: np.ndarray, between: str) -> np.ndarray:
    """The oracle: the recorded signal at times of the recording's own axis."""
    if between == "line":
        return np.interp(times, stamps, X)
    return X[np.maximum(np.searchsorted(stamps, times, side="right") - 1, 0)]


@pytest.mark.parametrize("between", ["line", "hold"])
@pytest.mark.parametrize("speed", [1.0, 2.0, 0.3])
@pytest.mark.parametrize(
    ("start", "end"),
    [(None, None), (1.0, None), (0.37, 4.21), (None, 2.5), (2.0, 2.3), (4.95, None)],
)
def test_a_window_of_a_grid(
    uniform: Path, between: str, speed: float, start: float | None, end: float | None
) -> None:
    """Ten points per second: between start and end every instant has the recorded value."""
    stimulus = recording(
        uniform, rate=10, start=start, end=end, speed=speed, between=between, scale=2, offset=1
    )
    first, last = start or 0.0, end or 5.0
    length = stimulus.known_length()
    assert length == pytest.approx((last - first) / speed, rel=1e-12)
    times = np.linspace(0.0, (last - first) / speed, 997, endpoint=False)
    expected = _signal(np.arange(50) / 10.0, first + times * speed, between)
    # Off the corners: there the oracle's own rounding decides between two held values.
    clear = np.abs((first + times * speed) * 10.0 - np.rint((first + times * speed) * 10.0)) > 1e-9
    assert np.allclose(values(stimulus, times)[clear], 2.0 * expected[clear] + 1.0, atol=1e-12)
    assert np.allclose(values(stimulus, np.array([-1.0])), values(stimulus, np.array([0.0])))


@pytest.mark.parametrize("between", ["line", "hold"])
@pytest.mark.parametrize("speed", [1.0, 3.0])
@pytest.mark.parametrize(("first", "last"), [(None, None), (3.3, 17.7), (None, 20.0), (8.0, 8.05)])
def test_a_window_of_irregular_stamps(
    irregular: Path, between: str, speed: float, first: float | None, last: float | None
) -> None:
    """At irregular stamps every instant has the recorded value, cut ends included."""
    stimulus = recording(
        irregular, column="x", time="t", start=first, end=last, speed=speed, between=between
    )
    start, end = first or STAMPS[0], last or STAMPS[-1]
    assert stimulus.known_length() == pytest.approx((end - start) / speed, rel=1e-12)
    times = np.linspace(0.0, (end - start) / speed, 997, endpoint=False)
    expected = _signal(STAMPS, start + times * speed, between)
    assert np.allclose(values(stimulus, times), expected, rtol=0.0, atol=1e-12)
    (drive,) = stimulus.drives((1,))
    assert isinstance(drive, PiecewiseDrive)
    events = drive.events(0.0, np.inf)
    assert np.all(np.diff(events) > 0.0)
    assert np.array_equal(values(stimulus, events[:1]), drive.states(events[:1])[:, 0])


@pytest.mark.parametrize("block", [1, 2, 7, 49])
def test_a_window_of_irregular_stamps_in_any_blocks(
    irregular: Path, block: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Where blocks cut the stamps, the window and its ends are the same."""
    for module in (gaps, series, window):
        monkeypatch.setattr(module, "BLOCK", block)
    forget()
    stimulus = recording(irregular, column="x", time="t", start=3.3, end=17.7)
    times = np.linspace(0.0, 14.4, 997, endpoint=False)
    expected = _signal(STAMPS, 3.3 + times, "line")
    assert np.allclose(values(stimulus, times), expected, rtol=0.0, atol=1e-12)


def test_after_the_end_the_last_value_is_held(uniform: Path, irregular: Path) -> None:
    """With beyond = "hold" the signal stays at its last value, and its length is not a limit."""
    for stimulus, last in (
        (recording(uniform, rate=10, beyond="hold"), X[-1]),
        (recording(irregular, column="x", time="t", beyond="hold"), X[-1]),
        (recording(irregular, column="x", time="t", beyond="hold", between="hold"), X[-1]),
        (recording(uniform, rate=10, end=2, beyond="hold"), X[20]),
        (recording(uniform, rate=10, end=2, beyond="hold", between="hold"), X[19]),
        (
            recording(irregular, column="x", time="t", end=9.0, beyond="hold"),
            np.interp(9.0, STAMPS, X),
        ),
    ):
        assert stimulus.known_length() is None
        assert values(stimulus, np.array([1e3]))[0] == pytest.approx(last, rel=1e-14)


def test_length_counts_the_last_interval(uniform: Path, irregular: Path) -> None:
    """N points last N / rate; irregular ones end at the last stamp; speed shortens both."""
    assert recording(uniform, rate=360).known_length() == 50 / 360.0
    assert recording(uniform, rate=10, speed=2).known_length() == 2.5
    length = recording(irregular, column="x", time="t").known_length()
    assert length == STAMPS[-1] - STAMPS[0]


@given(
    cuts=st.lists(st.integers(-70, 130), min_size=3, max_size=3),
    gain=st.sampled_from([1.0, 0.1]),
    offset=st.sampled_from([0.0, 0.7]),
)
def test_points_do_not_depend_on_the_cut(cuts: list[int], gain: float, offset: float) -> None:
    """points(a, b) and points(b, c) joined are points(a, c), bit for bit, with ends repeated."""
    a, b, c = sorted(cuts)
    drive = Playback(lambda i, j: X[i:j], 0, 50, 1.0, 0.0, "line", Conversion(gain, offset))
    joined = np.concatenate([drive.points(a, b), drive.points(b, c)])
    assert np.array_equal(joined, drive.points(a, c))
    expected = X[np.clip(np.arange(a, c), 0, 49)] * gain + offset
    assert np.array_equal(joined, expected)


@settings(deadline=None, max_examples=30)
@given(edges=st.lists(st.floats(0.0, 60.0), min_size=1, max_size=5))
def test_events_do_not_depend_on_the_cut(edges: list[float]) -> None:
    """Events of intervals in a row are the events of the whole, each once."""
    from frontend_sim.stimulus.recording.playback import StampedPlayback

    times, numbers = store.store_columns([(STAMPS - STAMPS[0], X)], 2)
    drive = StampedPlayback(times, numbers, "line", Conversion(1.0, 0.0))
    stops = [*sorted(edges), 100.0]
    parts, start = [], 0.0
    for stop in stops:
        parts.append(drive.events(start, stop))
        start = stop
    assert np.array_equal(np.concatenate(parts), STAMPS[1:] - STAMPS[0])


def test_a_recording_in_a_temporary_file_is_the_same(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Tables too long for memory go to a temporary file, with the same points and instants."""
    text = "t,x\n" + "".join(
        f"{t!r},{x!r}\n" for t, x in zip(STAMPS.tolist(), X.tolist(), strict=True)
    )
    file = write(tmp_path / "a.csv", text)
    times = np.linspace(0.0, 40.0, 333)
    in_memory = (
        values(recording(file, time="t"), times),
        points(recording(file, rate=1, column="x")),
    )
    monkeypatch.setattr(store, "IN_MEMORY", 4)
    forget()
    in_file = values(recording(file, time="t"), times), points(recording(file, rate=1, column="x"))
    assert np.array_equal(in_memory[0], in_file[0])
    assert np.array_equal(in_memory[1], in_file[1])


@pytest.mark.parametrize(
    ("keys", "message"),
    [
        ({"start": 5.0}, r"start = 5 s, but the recording goes from 0 s to 5 s"),
        ({"start": -0.1}, r"start = -0\.1 s, but"),
        ({"end": 5.1}, r"end = 5\.1 s, but"),
        ({"end": -1}, r"end = -1 s, but"),
    ],
)
def test_a_window_outside_is_an_error(uniform: Path, keys: dict[str, float], message: str) -> None:
    """Start and end must lie within the recording; the message says how long it is."""
    with pytest.raises(RecordingError, match=message):
        recording(uniform, rate=10, **keys).known_length()


def test_start_on_the_recordings_own_axis(tmp_path: Path) -> None:
    """A record with a pre-trigger, from -10 ms on, starts at the trigger with start = 0."""
    rows = "".join(f"{-0.01 + i / 1000:.3f},{i}\n" for i in range(30))
    stimulus = recording(write(tmp_path / "a.csv", "t,x\n" + rows), time="t", start=0)
    assert np.array_equal(points(stimulus), np.arange(10.0, 30.0))
    (drive,) = stimulus.drives((1,))
    assert isinstance(drive, UniformDrive)
    assert drive.origin == 0.0
