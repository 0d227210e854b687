"""Which point of a uniform grid an instant belongs to; compiled, since every instant asks."""

from __future__ import annotations

from typing import Any

import numpy as np

from frontend_sim.compiled import compiled


@compiled()
def locate(
    times: Any, later: float, origin: float, rate: float, slack: float, index: Any, since: Any
) -> None:
    """index[k], since[k]: the point at or before a time, and the time since it.

    A time within slack · max((|time| + later) rate, 1) of a point, counted in points, is that
    point.
    """
    for k in range(len(times)):
        position = (times[k] - origin) * rate
        nearest = np.rint(position)
        if abs(position - nearest) <= slack * max((abs(times[k]) + later) * rate, 1.0):
            index[k] = np.int64(nearest)
            since[k] = 0.0
        else:
            whole = np.floor(position)
            index[k] = np.int64(whole)
            since[k] = max(times[k] - (origin + whole / rate), 0.0)
