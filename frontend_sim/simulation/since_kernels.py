"""The loop over instants that lie alike behind points of a grid, compiled."""

from __future__ import annotations

from typing import Any

import numpy as np

from frontend_sim.compiled import compiled
from frontend_sim.simulation.interval_kernels import advance, product

NEAR = 64.0
"""Units around a known interval that a Taylor polynomial bridges: 2^-11 over the system's norm."""
TERMS = 4
"""Its order, two within a unit: what is left out is below 2^-55 / 120, or 2^-51 / 6."""


@compiled()
def since_point(
    states: Any,
    value: Any,
    rise: Any,
    since: Any,
    usual: float,
    step: Any,
    unit: float,
    system: Any,
    table: Any,
) -> None:
    """Advance states[k] in place by since[k] from a point of a uniform drive.

    value[k] and rise[k] are the generator's states; without a second one the value is held. Most
    instants lie ``usual`` behind a point, infinite if nothing is known: step is that interval's
    exponential less the identity, by columns. What an instant differs from it, at most NEAR units
    to either side, goes by a Taylor polynomial.
    """
    n = states.shape[1]
    size = len(system)
    z, work, more = np.empty(size), np.empty(size), np.empty(size)
    for k in range(len(since)):
        if since[k] > 0.0:
            z[:n] = states[k]
            z[n] = value[k]
            if size > n + 1:
                z[n + 1] = rise[k]
            rest = since[k] - usual
            if abs(rest) > NEAR * unit:
                advance(z, work, more, n, since[k], unit, system, table)
            else:
                product(step, z, n, work)
                for r in range(size):
                    z[r] += work[r]
                if rest != 0.0:
                    work[:] = z
                    for term in range(1, 3 if abs(rest) <= unit else TERMS + 1):
                        product(system, work, n, more)
                        for r in range(size):
                            work[r] = rest / term * more[r]
                            z[r] += work[r]
            states[k] = z[:n]
