"""What was written is read once, before anything is renamed."""

from __future__ import annotations

from pathlib import Path

from frontend_sim.archive.opening import open_record
from frontend_sim.errors import OutputError, RecordError


def read_back(temporary: Path, path: object) -> None:
    """Read everything of a record; OutputError on ``path`` if that fails."""
    try:
        with open_record(temporary) as record:
            record.verify()
    except RecordError as error:
        raise OutputError(f"{path} was written but does not read back: {error}") from error
