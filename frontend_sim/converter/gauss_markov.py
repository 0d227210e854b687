"""Noise with a memory: the first-order Gauss-Markov process at the looks of a converter."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.pattern import LookPattern
from frontend_sim.randomness import TILE, normal, stream

Real = NDArray[np.float64]


def gauss_markov(
    seed: int, name: str, pattern: LookPattern, time_constant: float, start: int, stop: int
) -> Real:
    """Return a stationary first-order process of rms 1 at looks ``start`` to ``stop - 1``,

        E[x(t) x(t')] = exp(-|t - t'| / T).

    The step over any interval is exact: x(t + h) = a x(t) + sqrt(1 - a²) n with a = exp(-h/T).
    What stands at a look depends on seed, name and its number alone. For that the row is cut into
    tiles at fixed places; the ends of the tiles are a process of their own, and inside a tile a
    free run from its left end is bent to meet its right end (the conditional distribution of a
    Gaussian process given both ends). Source: any text on stochastic processes, e.g. Gillespie
    1996, "Exact numerical simulation of the Ornstein-Uhlenbeck process and its integral"; from
    memory.

    Parameters
    ----------
    seed, name : of the stream of random numbers
    pattern : when the looks are, by the converter's clock
    time_constant : T, above zero [s]

    Returns
    -------
    Shape (stop - start,) [1].
    """
    if stop <= start:
        return np.empty(0)
    first, last = start // TILE, (stop - 1) // TILE
    ends = _ends(seed, name, pattern, time_constant, last + 1)
    tiles = [
        _tile(seed, name, pattern, time_constant, tile, ends[tile], ends[tile + 1])
        for tile in range(first, last + 1)
    ]
    return np.concatenate(tiles)[start - first * TILE : stop - first * TILE]


def _ends(seed: int, name: str, pattern: LookPattern, constant: float, last: int) -> Real:
    """Return the process at the first looks of tiles 0 to ``last``, shape (last + 1,)."""
    times = pattern.at(np.arange(last + 1, dtype=np.int64) * TILE)
    drawn = normal(stream(seed, name, "ends"), 0, last + 1)
    return _free(float(drawn[0]), np.diff(times) / constant, drawn[1:])


def _tile(
    seed: int,
    name: str,
    pattern: LookPattern,
    constant: float,
    tile: int,
    left: float,
    right: float,
) -> Real:
    """Return the process within one tile, shape (TILE,), between its two ends."""
    times = pattern.between(tile * TILE, (tile + 1) * TILE + 1) / constant
    drawn = normal(stream(seed, name), tile * TILE, (tile + 1) * TILE)
    run = _free(left, np.diff(times), drawn)
    # Covariance of x(t) with the right end over the variance of the right end, left end given.
    whole = times[-1] - times[0]
    weight = np.exp(times - times[-1]) * np.expm1(-2.0 * (times - times[0]))
    bent = run + weight / np.expm1(-2.0 * whole) * (right - run[-1])
    return np.asarray(bent[:-1])


def _free(first: float, spans: Real, drawn: Real) -> Real:
    """Return the process from a first value on, over some spans of time, in time constants."""
    from frontend_sim.converter.kernels import recur

    out = np.empty(len(spans) + 1)
    recur(first, np.exp(-spans), np.sqrt(-np.expm1(-2.0 * spans)) * drawn, out)
    return out
