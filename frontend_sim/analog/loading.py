"""Where stages without amplifiers stand in a row, though every stage counts as buffered."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

from frontend_sim.analog.stages.base import Stage


def unbuffered_notes(stages: Sequence[Stage]) -> tuple[str, ...]:
    """Return a note for every two passive stages in a row, which really load each other."""
    labels = [stage.label(position) for position, stage in enumerate(stages, start=1)]
    return tuple(
        f"stages {before[0]!r} and {after[0]!r} are passive and stand in a row; each counts as "
        "buffered, but on the board they load each other: put them into one ladder, or a buffer "
        "between them"
        for before, after in pairwise(zip(labels, stages, strict=True))
        if before[1].passive and after[1].passive
    )
