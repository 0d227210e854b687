"""Parts of a run: some stretches of time, and what lies in them."""

from __future__ import annotations

import math
from dataclasses import dataclass, fields, replace
from typing import Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import MeasureError
from frontend_sim.simulation.run import RunBlock

Real = NDArray[np.float64]
Index = NDArray[np.int64]

ROUNDING = 4.0 * np.finfo(np.float64).eps
"""Share of an instant within which an end is on it: one, another and what lies between round."""

_PER_CONVERSION = tuple(
    field.name
    for field in fields(RunBlock)
    if field.name not in ("start", "waveform_time", "waveform")
)


@dataclass(frozen=True, eq=False)
class Stretches:
    """Stretches of time that a part of a run consists of; both ends belong to each.

    Parameters
    ----------
    spans : first and last instant of each, in order, none of them touch, shape (N, 2) [s]
    around : how much of each lies before and behind what it was kept for [s]
    """

    spans: Real
    around: float

    @classmethod
    def about(
        cls, spans: Real, around: float, whole: tuple[float, float] = (0.0, math.inf)
    ) -> Self:
        """Return the stretches that begin and end some time before and behind others.

        Parameters
        ----------
        spans : first and last instant of each, in any order, shape (N, 2) [s]
        around : what is added on both sides [s]
        whole : first and last instant of the run, which no stretch goes beyond [s]
        """
        if len(spans) == 0:
            return cls(np.empty((0, 2)), around)
        inside = np.clip(spans, *whole)
        # Conversions that lie on an end belong to the stretch, however their instants round.
        width = around + ROUNDING * (float(np.max(np.abs(inside))) + around)
        wide = inside[np.argsort(inside[:, 0], kind="stable")] + [-width, width]
        reach = np.maximum.accumulate(wide[:, 1])
        first = np.flatnonzero(np.concatenate([[True], wide[1:, 0] > reach[:-1]]))
        last = np.append(first[1:], len(wide)) - 1
        return cls(np.clip(np.column_stack([wide[first, 0], reach[last]]), *whole), around)

    def hold(self, time: Real) -> NDArray[np.bool_]:
        """Return which instants lie in one of the stretches, shape (K,)."""
        if len(self.spans) == 0:
            return np.zeros(len(time), np.bool_)
        place = np.searchsorted(self.spans[:, 0], time, side="right") - 1
        inside: NDArray[np.bool_] = (place >= 0) & (time <= self.spans[place, 1])
        return inside

    def breaks(self, time: Real) -> Index:
        """Return which of some instants, in order, are the first of another stretch, shape (B,)."""
        place = np.searchsorted(self.spans[:, 0], time, side="right")
        return np.flatnonzero(np.diff(place)) + 1

    def part(self, block: RunBlock) -> tuple[RunBlock, Index]:
        """Return what of a block lies in the stretches, and the places of its conversions."""
        inside, seen = self.hold(block.time), self.hold(block.waveform_time)
        arrays = {name: getattr(block, name) for name in _PER_CONVERSION}
        kept = {name: row[inside] if len(row) else row for name, row in arrays.items()}
        waveform = {point: values[seen] for point, values in block.waveform.items()}
        part = replace(block, waveform_time=block.waveform_time[seen], waveform=waveform, **kept)
        return part, np.flatnonzero(inside)


def stretches_of(run: object) -> Stretches | None:
    """Return which part of a run something holds, None where it holds all of it."""
    found = getattr(run, "stretches", None)
    return found if isinstance(found, Stretches) else None


def breaks_in(run: object, time: Real) -> Index:
    """Return which instants of a run begin another stretch of it; none where it is whole."""
    found = stretches_of(run)
    return np.empty(0, np.int64) if found is None else found.breaks(time)


def refuse_part(run: object, what: str) -> None:
    """Refuse what holds a part of a run, for a number that is made from all of it.

    Raises
    ------
    MeasureError
        If it does; the message begins with ``what`` is wanted.
    """
    if stretches_of(run) is not None:
        raise MeasureError(
            f"{what} needs a whole run, and this record keeps a part of one: what lies around the "
            "failures; run its scenario again: rerun(record)"
        )
