"""Whether the disk has room for a night, and how long it will take."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from frontend_sim.archive.room import free_bytes, told_bytes
from frontend_sim.errors import OutputError
from frontend_sim.quantities.counting import counted

LINE = 1 << 10
"""Bytes of a run in the table of the set, about."""
SPARE = 4 << 20
"""Bytes that are left free."""


@dataclass(frozen=True)
class Need:
    """What the runs that were done so far took, on average.

    Parameters
    ----------
    seconds : of one worker for one run
    size : bytes that one run takes on disk
    """

    seconds: float
    size: float

    def disk(self, runs: int) -> int:
        """Return the bytes that some more runs will take."""
        return int((self.size + LINE) * runs)

    def time(self, runs: int, workers: int) -> float:
        """Return how long some more runs will take [s]."""
        return self.seconds * runs / workers


def refuse_small_disk(directory: Path, need: Need, runs: int) -> None:
    """Raise OutputError if some more runs will not fit onto the disk."""
    wanted, free = need.disk(runs) + SPARE, free_bytes(directory)
    if wanted > free:
        raise OutputError(
            f"{directory}: the "
            f"{counted(runs, 'run that is left needs', 'runs that are left need')} about "
            f"{told_bytes(wanted)}, but the disk has {told_bytes(free)} left; free some space, or "
            "keep less: keep = "
            '"around-failures" or "nothing"'
        )


def told_seconds(seconds: float) -> str:
    """Return a time for people, ``2 h 05 min``."""
    if seconds < 60.0:
        return f"{seconds:.0f} s"
    minutes = round(seconds / 60.0)
    return f"{minutes} min" if minutes < 60 else f"{minutes // 60} h {minutes % 60:02d} min"
