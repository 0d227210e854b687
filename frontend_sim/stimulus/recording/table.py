"""Text tables: CSV and its relatives."""

from __future__ import annotations

from pathlib import Path

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.recording.columns import listing, pick, pick_signal
from frontend_sim.stimulus.recording.layout import find_layout
from frontend_sim.stimulus.recording.rows import Rows
from frontend_sim.stimulus.recording.series import Source, Wanted
from frontend_sim.stimulus.recording.store import store_columns


def read_table(file: Path, wanted: Wanted) -> Source:
    """Read one column, and the time column if one is named, block by block.

    Raises RecordingError, with the line and the column, for everything that is no table of numbers.
    """
    if wanted.dataset is not None:
        raise RecordingError(f"{file}: a text table has no datasets; leave out dataset, use column")
    layout = find_layout(file)
    time = None if wanted.time is None else pick(file, layout.names, wanted.time, "time")
    signal = pick_signal(file, layout.names, wanted.column, time)
    rows = Rows(file, layout, signal, time)
    values, *times = store_columns(rows.blocks(), 1 if time is None else 2)
    notes = list(layout.notes)
    if rows.comments:
        notes.append(f"{rows.comments} comment lines among the numbers were skipped")
    seconds = None if time is None else rows.series(time, times[0])
    return Source(rows.series(signal, values), seconds, None, tuple(notes), listing(layout.names))
