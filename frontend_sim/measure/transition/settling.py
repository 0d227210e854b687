"""When samples have settled: their last exit from a band."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import finite, increasing, positive, samples


@dataclass(frozen=True)
class SampledSettling:
    """When the samples leave a band for the last time.

    Between two samples nothing is known: the signal comes back for good somewhere between
    ``last_outside`` and ``settled``, if it does not leave the band between later samples. What the
    chain does at every instant is told by ``frontend_sim.measure.response``.

    Parameters
    ----------
    last_outside : time of the last sample outside the band, None if none is [s]
    settled : time of the first sample from which on all lie in the band [s]
    conversions : samples from the start on that have to be thrown away
    remaining : samples that were seen in the band after that, the one at ``settled`` included
    """

    last_outside: float | None
    settled: float
    conversions: int
    remaining: int


def sampled_settling(
    times: ArrayLike, values: ArrayLike, final: float, band: float, start: float | None = None
) -> SampledSettling:
    """Return the last exit of samples from final - band ... final + band.

    Never the first entry: a signal that rings enters its band several times. A value on the edge
    of the band lies inside.

    Parameters
    ----------
    times : increasing, shape (N,) [s]
    values : shape (N,) [V], or codes with final and band in LSB
    final : level around which the band lies [V]
    band : half its width [V]
    start : instant of the event, from which all times count [s]; left out, the first sample

    Raises
    ------
    MeasureError
        If the last sample lies outside the band, so that the record does not tell when the signal
        settles, or no sample follows the start.
    """
    row = samples(values, 1)
    instants = increasing(times, len(row))
    level = finite(final, "the final level")
    half = positive(band, "half the width of the band", "V")
    begin = float(instants[0]) if start is None else finite(start, "the start")
    first = int(np.searchsorted(instants, begin))
    if first == len(row):
        raise MeasureError(
            f"no sample follows the start at {begin:g} s; the record ends at {instants[-1]:g} s"
        )
    since, later = instants[first:] - begin, row[first:]
    outside = np.flatnonzero(~(np.abs(later - level) <= half))
    if len(outside) == 0:
        return SampledSettling(None, float(since[0]), 0, len(later))
    last = int(outside[-1])
    if last == len(later) - 1:
        raise MeasureError(
            f"the record ends at {later[-1]:.6g}, outside {level:.6g} ± {half:.3g}: it has not "
            f"settled {since[-1]:.3g} s after the start; record longer, or widen the band"
        )
    return SampledSettling(
        float(since[last]), float(since[last + 1]), last + 1, len(later) - last - 1
    )
