"""How much white noise a response lets through."""

from __future__ import annotations

import math

import numpy as np

from frontend_sim.measure.response.ladder import Ladder
from frontend_sim.measure.response.step_response import StepResponse


def noise_bandwidth(response: StepResponse, largest: float) -> float | None:
    """Return the width of the rectangle of the same height and area as |H|², one-sided [Hz],

        B = (1/|H|max²) integral of |H(f)|² df = c P c' / (2 |H|max²),
        P(2 t) = P(t) + exp(A t) P(t) exp(A t)',    P(u) = u b b' for a vanishing u.

    The Gramian P is a sum of positive terms, doubled from a vanishing time on, so rates far apart
    cost no accuracy. Source: common practice; the doubling is that of R. A. Smith 1968, "Matrix
    equation XA + BX = C" (from memory).

    Parameters
    ----------
    largest : |H|max [1]

    Returns
    -------
    Infinity where high frequencies pass, None where a mode without damping has no bandwidth.
    """
    if not response.settles or not 0.0 < largest < math.inf:
        return None
    if response.start != 0.0:
        return math.inf
    chain = response.chain
    slowest = 1.0 / float(np.min(-chain.poles.real))
    ladder = Ladder.of(chain.a, 100.0 * max(chain.order, 1) * slowest)
    gramian = ladder.unit * np.outer(chain.b, chain.b)
    for step in ladder.rungs:
        moved = step @ gramian
        gramian = 2.0 * gramian + moved + moved.T + moved @ step.T
    readout = chain.c[-1] / largest
    return 0.5 * float(readout @ gramian @ readout)
