"""A scan that repeats for ever behind shared stages: its fixed point.

With e the distance of the shared states from those of the connected channel at its switch, see
``shared_pins``, sources that rest at u, R = -A^-1 B and visits of length T,

    e[v+1] = exp(A T) e[v] + R (u[i(v)] - u[i(v+1)]),        e[v + V] = e[v],

and an output c of the shared states is off by c exp(A s) e[v] a time s after the switch.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.analog.exponential import expm1
from frontend_sim.scenario.rhythm import Rhythm
from frontend_sim.simulation.kernels import Real


def gain_of(shared: Chain, point: int) -> float:
    """Return the gain of shared stages for a constant, 1 where they pass none.

    Parameters
    ----------
    point : number of the pin
    """
    rest = shared.c[point] @ shared.settled(1.0) + shared.d[point]
    return float(rest) if abs(rest) > 1e-12 else 1.0


def left_over(
    shared: Chain, outputs: Sequence[int], rhythm: Rhythm, count: int, tempo: float
) -> Real:
    """Return what is left at each look of a scan of a volt more at each channel.

    The volt is one before the shared stages.

    Parameters
    ----------
    outputs : numbers of the points that are asked; their delays are lags behind the look
    count : of channels;  tempo : how fast the clock runs [1]

    Returns
    -------
    Shape (outputs, looks, channels).
    """
    n, visits = shared.order, len(rhythm.order)
    times = np.array(rhythm.look_times) / tempo
    if n == 0:
        return np.zeros((len(outputs), visits * len(times), count))
    connected = np.zeros((visits, count))
    connected[np.arange(visits), list(rhythm.order)] = 1.0
    jumps = shared.settled(1.0)[:, None] * (connected - np.roll(connected, -1, axis=0))[:, None, :]
    slot = np.eye(n) + expm1(shared.a * (rhythm.slot / tempo))
    gathered, whole = np.zeros((n, count)), np.eye(n)
    for jump in jumps:
        gathered, whole = slot @ gathered + jump, slot @ whole
    apart = np.linalg.solve(np.eye(n) - whole, gathered)
    read = np.array([[late(shared, each, time) for time in times] for each in outputs])
    found = []
    for jump in jumps:
        found.append(read @ apart)
        apart = slot @ apart + jump
    return np.concatenate(found, axis=1)


def late(shared: Chain, output: int, time: float) -> Real:
    """Return c exp(A t), of an output that lags behind by its delay, shape (n,)."""
    row = shared.c[output]
    return np.asarray(row + row @ expm1(shared.a * (time - shared.delay[output])))
