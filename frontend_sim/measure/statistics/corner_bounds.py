"""Whether the corners of the tolerances bound what lies between them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import MeasureError

Real = NDArray[np.float64]


@dataclass(frozen=True)
class CornerExcess:
    """How far runs between the corners go beyond all of them.

    Parameters
    ----------
    low, high : smallest and largest value at the corners
    below, above : how far the extremes between them go beyond; zero where they do not
    share : of the runs between that have a value and lie beyond [1]
    where : number of the run that goes farthest, among those between
    """

    low: float
    high: float
    below: float
    above: float
    share: float
    where: int

    def text(self, measure: str, unit: str) -> str:
        """Return the warning, for the log of a night."""
        far = max(self.below, self.above)
        side = "above the highest" if self.above >= self.below else "below the lowest"
        shown = f"{far:.3g} {unit}".removesuffix(" 1")
        return (
            f"{measure} is not monotone: runs within the tolerances lie up to {shown} {side} "
            f"corner, {100 * self.share:.3g} % of them beyond; corners do not bound it, so draw at "
            "random or over a grid"
        )


def corner_excess(corners: Real, between: Real, tolerance: float = 0.0) -> CornerExcess | None:
    """Return how far runs go beyond all corners, None where the corners bound them.

    A response that rises or falls all the way with every parameter has its extremes at corners; one
    that turns between them has not, and its corners promise too much. The warning is
    evidence against the corners; none is no proof for them.

    Parameters
    ----------
    corners : the measure at the corners, shape (C,)
    between : the measure at midpoints, or at draws within the tolerances, shape (N,)
    tolerance : how far beyond is rounding or noise, in the unit of the measure

    Raises
    ------
    MeasureError
        If there is no corner.
    """
    known = np.asarray(corners)[~np.isnan(corners)]
    if len(known) == 0:
        raise MeasureError("no corner has a value, so none bounds anything")
    inner = np.asarray(between, dtype=np.float64)
    low, high = float(np.min(known)), float(np.max(known))
    with np.errstate(invalid="ignore"):  # infinity less itself
        below = np.nan_to_num(low - inner, nan=0.0, posinf=np.inf)
        above = np.nan_to_num(inner - high, nan=0.0, posinf=np.inf)
    far = np.maximum(below, above)
    beyond = far > tolerance
    if not np.any(beyond):
        return None
    return CornerExcess(
        low,
        high,
        max(float(np.max(below)), 0.0),
        max(float(np.max(above)), 0.0),
        np.count_nonzero(beyond) / np.count_nonzero(~np.isnan(inner)),
        int(np.argmax(far)),
    )


def turning_parameters(
    lines: Mapping[str, tuple[float, float, float]], tolerance: float = 0.0
) -> tuple[str, ...]:
    """Return the parameters along which a response turns between the ends of the tolerance.

    Parameters
    ----------
    lines : parameter -> the measure with that parameter at its low end, in the middle and at its
        high end, all others in the middle
    tolerance : as in ``corner_excess``
    """
    return tuple(
        name
        for name, (first, middle, last) in lines.items()
        if middle > max(first, last) + tolerance or middle < min(first, last) - tolerance
    )
