"""The compiled recursion of a state that follows a line in the integral of its own rate."""

from __future__ import annotations

import math
from typing import Any

from frontend_sim.compiled import compiled


@compiled()
def follow_line(y: float, z: Any, begin: Any, end: Any, out: Any) -> None:
    """out[s] = y after piece s, see ``VariablePole``; z is the rate's integral over the piece."""
    for s in range(len(z)):
        gone = -math.expm1(-z[s])
        # 1 - gone / z, without the cancellation of short pieces.
        lag = 0.5 * z[s] * (1.0 - z[s] / 3.0) if z[s] < 1e-5 else 1.0 - gone / z[s]
        y += gone * (begin[s] - y) + lag * (end[s] - begin[s])
        out[s] = y
