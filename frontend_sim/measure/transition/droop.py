"""How far the top of a pulse sinks."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import finite, increasing, samples
from frontend_sim.quantities.counting import counted


@dataclass(frozen=True)
class Droop:
    """The sinking top of a pulse, between the first and the last sample on it.

    Parameters
    ----------
    droop : (first - last) / (first - baseline), negative where the top rises [1]
    tilt : slope of the line with the least squared distance from all samples on the top [V/s]
    first, last : the two samples [V]
    seconds : time between them [s]
    """

    droop: float
    tilt: float
    first: float
    last: float
    seconds: float


def droop_of(
    times: ArrayLike, values: ArrayLike, start: float, stop: float, baseline: float = 0.0
) -> Droop:
    """Measure the droop of a pulse, as a high pass makes it.

    Of a high pass with time constant T it is 1 - exp(-seconds / T). Between the samples, and
    between the edges and the samples next to them, nothing is known.

    Parameters
    ----------
    times : increasing, shape (N,) [s]
    values : shape (N,) [V]
    start, stop : the top of the pulse, after the rise has settled and before the fall [s]; samples
        at start and before stop count
    baseline : level before the pulse [V]

    Raises
    ------
    MeasureError
        If fewer than two samples lie on the top, or the pulse has no height.
    """
    row = samples(values, 2)
    instants = increasing(times, len(row))
    first, last = np.searchsorted(instants, [finite(start, "the start"), finite(stop, "the stop")])
    if last - first < 2:
        raise MeasureError(
            f"{counted(max(int(last - first), 0), 'sample lies', 'samples lie')} on the top of the "
            f"pulse, from {start:g} s to {stop:g} s; a droop needs at least 2"
        )
    top, since = row[first:last], instants[first:last] - instants[first]
    height = float(top[0]) - finite(baseline, "the baseline")
    if height == 0.0:
        raise MeasureError(f"the pulse has no height above the baseline of {baseline:g}")
    tilt = float(np.polyfit(since / since[-1], top, 1)[0] / since[-1])
    sunk = float(top[0] - top[-1])
    return Droop(sunk / height, tilt, float(top[0]), float(top[-1]), float(since[-1]))
