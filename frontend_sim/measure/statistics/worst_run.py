"""The run that comes nearest to its limit, or goes farthest beyond."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import MeasureError

Real = NDArray[np.float64]


def worst_run(margins: Real) -> int:
    """Return the number of the run with the smallest margin, the first of several.

    A margin that is NaN is that of a check without a value, which fails: nothing is worse.

    Parameters
    ----------
    margins : one for each run, shape (N,)

    Raises
    ------
    MeasureError
        If there is no run.
    """
    return int(worst_order(margins)[0])


def worst_order(margins: Real) -> NDArray[np.int64]:
    """Return the numbers of all runs, the worst first; runs that are equal keep their order."""
    rows = np.asarray(margins, dtype=np.float64)
    if len(rows) == 0:
        raise MeasureError("there is no run, so none is the worst")
    return np.argsort(np.where(np.isnan(rows), -np.inf, rows), kind="stable")
