"""From the keys of a recording to its drives: every decision, and a note of each."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from frontend_sim.errors import QuantityError, RecordingError
from frontend_sim.quantities import SIGNALS
from frontend_sim.quantities.counting import counted
from frontend_sim.stimulus.drive import Drive
from frontend_sim.stimulus.recording.gaps import FAR, find_gaps
from frontend_sim.stimulus.recording.grid import Grid
from frontend_sim.stimulus.recording.missing import Holes, bridged, find_holes
from frontend_sim.stimulus.recording.playback import Conversion, Playback
from frontend_sim.stimulus.recording.readers import open_source, signature
from frontend_sim.stimulus.recording.series import Real, Series, Wanted
from frontend_sim.stimulus.recording.stamps import Stamps
from frontend_sim.stimulus.recording.store import store
from frontend_sim.stimulus.recording.timing import timing
from frontend_sim.stimulus.recording.units import signal_factor
from frontend_sim.stimulus.recording.window import (
    Window,
    grid_drives,
    grid_window,
    stamped_drive,
    stamped_window,
)

if TYPE_CHECKING:
    from frontend_sim.stimulus.recording.recording import Recording


@dataclass(frozen=True, eq=False)
class Prepared:
    """A recording made ready to play.

    Parameters
    ----------
    drives : whose sum is the signal;  length : of the recording as played [s]
    notes : every decision that was made
    """

    drives: tuple[Drive, ...]
    length: float
    notes: tuple[str, ...]


def prepared(recording: Recording) -> Prepared:
    """Return a recording made ready; the same one of an unchanged file is opened only once.

    Raises RecordingError if the file does not hold what is asked for.
    """
    try:
        return _prepared(recording, recording.signal, signature(recording.file))
    except QuantityError as error:
        raise RecordingError(f"{recording.file}: {error}") from None


@lru_cache(maxsize=16)
def _prepared(
    recording: Recording, signal_unit: str, file_signature: tuple[int, int, int]
) -> Prepared:
    wanted = Wanted(recording.picked, recording.time, recording.dataset)
    source = open_source(recording.file, wanted)
    factor = signal_factor(source.signal, recording.unit, signal_unit, recording.scale)
    conversion = Conversion(recording.scale * factor.value, recording.offset + factor.zero)
    count = counted(source.signal.count, "point")
    notes = [f"{source.signal.label}, {count}", *source.notes, *factor.notes]
    signal, axis = timing(recording, source, notes)
    if isinstance(axis, Grid):
        drives, length = _on_grid(recording, signal, axis, conversion, notes)
    else:
        drives, length = _stamped(recording, signal, axis, conversion, notes)
    return Prepared(drives, length, tuple(f"{recording.file.name}: {note}" for note in notes))


def _on_grid(
    recording: Recording, signal: Series, grid: Grid, conversion: Conversion, notes: list[str]
) -> tuple[tuple[Drive, ...], float]:
    """Return drives and length of points with a constant rate."""
    part = grid_window(recording.file, grid, signal.count, _window(recording))
    low = part.first - 1 if part.lead > 0.0 else part.first
    holes = find_holes(signal, low, part.last)
    _check_gap(recording, (holes.longest + 1) / grid.rate, signal.where(holes.longest_at))
    read = _without_holes(
        recording, signal, holes, (low, part.last), _index, conversion.gain, notes
    )
    rate = grid.rate * recording.speed
    faster = "" if recording.speed == 1.0 else f", played {recording.speed:g} times as fast"
    notes.append(
        f"recorded at {grid.rate:.9g} Hz{faster}: it holds nothing above {0.5 * rate:.6g} Hz and "
        "cannot show aliasing from there; add tones, or raise speed"
    )
    playback = Playback(
        read, part.first - low, part.last - part.first, rate, part.lead / rate,
        recording.between, conversion,
    )  # fmt: skip
    before = float(conversion(read(0, 1))[0])
    return grid_drives(part, playback, before), part.length / rate


def _stamped(
    recording: Recording, signal: Series, stamps: Stamps, conversion: Conversion, notes: list[str]
) -> tuple[tuple[Drive, ...], float]:
    """Return drives and length of points at irregular times."""
    times = store(seconds for _, seconds, _ in stamps.blocks())
    window = _window(recording)
    part = stamped_window(recording.file, times, window)
    gaps = find_gaps(times, part.first, part.last)
    where = stamps.series.where(gaps.largest_at)
    _check_gap(recording, gaps.largest, where)
    if gaps.far:
        notes.append(
            f"{counted(gaps.far, 'gap is', 'gaps are')} longer than {FAR:g} usual intervals of "
            f"{gaps.usual:.3g} s; the longest, {gaps.largest:.6g} s, ends at {where}"
        )
    rows = (part.first, part.last)
    holes = find_holes(signal, *rows)
    read = _without_holes(recording, signal, holes, rows, times.read, conversion.gain, notes)
    drive = stamped_drive(times, read, part, window, conversion)
    return (drive,), (part.end - part.start) / window.speed


def _window(recording: Recording) -> Window:
    return Window(recording.start, recording.end, recording.speed, recording.between)


def _index(first: int, last: int) -> Real:
    return np.arange(first, last, dtype=np.float64)


def _without_holes(
    recording: Recording,
    signal: Series,
    holes: Holes,
    part: tuple[int, int],
    times: Callable[[int, int], Real],
    gain: float,
    notes: list[str],
) -> Callable[[int, int], Real]:
    """Return what reads a part of the signal, holes bridged; its position 0 is the part's start."""
    first, last = part
    dimension = SIGNALS[recording.signal]
    if not holes.largest * abs(gain) <= dimension.largest:
        raise RecordingError(
            f"{recording.file}, {signal.where(holes.largest_at)}: {signal.label} reaches "
            f"{holes.largest:.3g}, which is no {dimension.name}; check column, unit and scale"
        )
    if holes.count == 0:
        return lambda a, b: signal.read(first + a, first + b)
    where = ", ".join(signal.where(at) for at in holes.first)
    where += ", ..." if holes.count > len(holes.first) else ""
    if holes.count == last - first:
        raise RecordingError(
            f"{recording.file}: {signal.label} has no value at all in the part that is played"
        )
    if recording.missing == "error":
        raise RecordingError(
            f"{recording.file}: {signal.label}: {holes.count} of {counted(last - first, 'point')} "
            f"{'has' if holes.count == 1 else 'have'} no "
            f'value ({where}); set missing = "line", "hold" or "zero" to bridge them'
        )
    done = {"line": "joined by a line", "hold": "held", "zero": "set to zero"}[recording.missing]
    were = "was" if holes.count == 1 else "were"
    notes.append(f"{counted(holes.count, 'point')} without a value ({where}) {were} {done}")
    blocks = ((times(at, at + len(seen)), seen) for at, seen in signal.blocks(first, last))
    return store(bridged(blocks, recording.missing)).read


def _check_gap(recording: Recording, gap: float, where: str) -> None:
    longest = recording.longest_gap
    if longest is not None and gap > longest * (1.0 + 1e-9):
        raise RecordingError(
            f"{recording.file}: a gap of {gap:.6g} s at {where} is longer than longest_gap = "
            f"{longest:g} s; raise it, or play a part without the gap with start and end"
        )
