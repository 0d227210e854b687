"""The inner loop of correlated noise, compiled."""

from __future__ import annotations

from typing import Any

from frontend_sim.compiled import compiled


@compiled()
def recur(first: float, decay: Any, kick: Any, out: Any) -> None:
    """Fill out[0] = first, out[k + 1] = decay[k] out[k] + kick[k], one after the other."""
    x = first
    out[0] = x
    for k in range(len(decay)):
        x = decay[k] * x + kick[k]
        out[k + 1] = x
