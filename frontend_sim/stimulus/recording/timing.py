"""When the points of a recording were taken: on a grid, or at time stamps of their own."""

from __future__ import annotations

from typing import TYPE_CHECKING

from frontend_sim.errors import RecordingError
from frontend_sim.quantities import TIME
from frontend_sim.quantities.counting import counted
from frontend_sim.stimulus.recording.duplicates import merged
from frontend_sim.stimulus.recording.grid import Grid, find_grid, mean_grid
from frontend_sim.stimulus.recording.series import Series, Source
from frontend_sim.stimulus.recording.stamps import Order, Stamps, check_order
from frontend_sim.stimulus.recording.units import time_factor

if TYPE_CHECKING:
    from frontend_sim.stimulus.recording.recording import Recording


def timing(recording: Recording, source: Source, notes: list[str]) -> tuple[Series, Grid | Stamps]:
    """Return the signal, one point for each time, and its times. Decisions go to the notes.

    Raises RecordingError if the times are missing, out of order, or repeated against the policy.
    """
    if source.time is None:
        return source.signal, Grid(_rate(recording, source, notes), 0.0, 0.0)
    stamps = _stamps(recording, source.time, notes)
    order = check_order(recording.file, stamps)
    _refuse_no_times(recording, stamps)
    if recording.timestamps == "uniform":
        return source.signal, _uniform(recording, stamps, notes)
    signal = source.signal
    if order.duplicates:
        signal, stamps = _without_duplicates(recording, signal, stamps, order, notes)
    grid = find_grid(stamps, printed=recording.timestamps == "auto")
    if grid is None:
        notes.append("time stamps are irregular; each point is played at its own")
        return signal, stamps
    notes.append(
        f"time stamps lie on a uniform grid of {grid.rate:.9g} Hz, within {grid.slack:.2g} s"
    )
    return signal, grid


def _rate(recording: Recording, source: Source, notes: list[str]) -> float:
    asked, own = recording.rate, source.rate
    if asked is None and own is None:
        raise RecordingError(
            f"{recording.file}: neither time nor rate is given; name the time column with "
            f"time = ..., or give rate = ...; columns are {source.names}"
        )
    if asked is None or own is None:
        return asked or own or 0.0
    if asked != own:
        notes.append(f"played at the given rate, {asked:g} Hz, not at the file's own, {own:g} Hz")
    return asked


def _stamps(recording: Recording, time: Series, notes: list[str]) -> Stamps:
    if time.absolute and recording.time_unit is not None:
        raise RecordingError(f"{recording.file}: {time.label} holds instants; leave out time_unit")
    if time.count < 2:
        raise RecordingError(
            f"{recording.file}: a single point with a time has no length; give rate instead of time"
        )
    factor = time_factor(time, recording.time_unit)
    notes += factor.notes
    return Stamps(time, factor.value)


def _refuse_no_times(recording: Recording, stamps: Stamps) -> None:
    first, last, _ = stamps.ends()
    mean = (last - first) / (stamps.count - 1)
    if last - first > TIME.largest or 0.0 < mean < TIME.smallest:
        raise RecordingError(
            f"{recording.file}: the time goes from {first:.6g} s to {last:.6g} s, which is no time "
            "of a recording; check time and time_unit"
        )


def _uniform(recording: Recording, stamps: Stamps, notes: list[str]) -> Grid:
    first, last, _ = stamps.ends()
    if last <= first:
        raise RecordingError(
            f"{recording.file}: all time stamps are equal; give rate instead of time"
        )
    grid, furthest = mean_grid(stamps)
    notes.append(
        f"time stamps are taken as uniform at their mean rate of {grid.rate:.9g} Hz; they lie up "
        f"to {furthest:.2g} s off it"
    )
    return grid


def _without_duplicates(
    recording: Recording, signal: Series, stamps: Stamps, order: Order, notes: list[str]
) -> tuple[Series, Stamps]:
    policy = recording.duplicates
    lines = ", ".join(stamps.series.where(at) for at in order.first_duplicates)
    lines += ", ..." if order.duplicates > len(order.first_duplicates) else ""
    who = counted(order.duplicates, "point repeats", "points repeat")
    if policy == "error":
        raise RecordingError(
            f"{recording.file}: {who} the time of the point before "
            f'({lines}); set duplicates = "first", "last" or "mean", or timestamps = "uniform" if '
            "the logger's clock is coarse"
        )
    notes.append(f"{who} a time ({lines}); kept the {policy} of each")
    signal, time = merged(signal, stamps.series, policy)
    return signal, Stamps(time, stamps.factor)
