"""Where stages without amplifiers stand in a row, though every stage counts as buffered."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

import numpy as np

from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import RESISTANCE, as_text


def unbuffered_notes(stages: Sequence[Stage]) -> tuple[str, ...]:
    """Return a note for every passive stage that loads the stage before it on the board.

    That is another passive one, or a sensor with a resistance of its own.
    """
    labelled = [(stage.label(position), stage) for position, stage in enumerate(stages, start=1)]
    return tuple(
        f"stages {before!r} and {after!r} are passive and stand in a row; each counts as "
        f"buffered, but on the board they load each other: put {_cure(source)}a buffer between "
        "them"
        for (before, source), (after, stage) in pairwise(labelled)
        if stage.passive and (source.passive or source.resistance_at_rest())
    )


def _cure(source: Stage) -> str:
    if source.passive:
        return "them into one ladder, or "
    resistance = source.resistance_at_rest()
    if resistance and passes_rest(source):
        return f"the {as_text(resistance, RESISTANCE, 4)} of the first into the second, or "
    return ""


def passes_rest(stage: Stage) -> bool:
    """Return whether a signal at rest passes; its resistance at rest then is that of its signals,
    which it is not behind a capacitor.
    """
    zero = np.zeros(1, dtype=np.complex128)
    return all(abs(block.response(zero)[0]) > 0.0 for block in stage.blocks())
