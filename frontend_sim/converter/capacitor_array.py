"""A successive-approximation converter whose binary-weighted capacitors do not match."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from frontend_sim.randomness import normal, stream

Real = NDArray[np.float64]


def bit_weights(bits: int, mismatch: float, seed: int) -> Real:
    """Return the weights of the bits, lowest first, shape (bits,) [LSB].

    Capacitor i consists of 2^i unit capacitors of relative standard deviation s, so its own is
    s / sqrt(2^i); one more unit closes the array:

        C_i = 2^i (1 + s n_i / sqrt(2^i)),    w_i = 2^bits C_i / (C_0 + ... + C_(bits-1) + C_end).

    Weights and closing unit add up to 2^bits, so the array has neither gain nor offset error.
    Source: any text on charge redistribution, e.g. McCreary and Gray 1975, "All-MOS charge
    redistribution analog-to-digital conversion techniques"; from memory.

    Parameters
    ----------
    mismatch : s, relative standard deviation of one unit capacitor [1]
    """
    drawn = normal(stream(seed, "capacitor mismatch"), 0, bits + 1)
    units = 2.0 ** np.arange(bits)
    capacitors = units + mismatch * np.sqrt(units) * drawn[:bits]
    closing = 1.0 + mismatch * drawn[bits]
    return np.asarray(2.0**bits * capacitors / (np.sum(capacitors) + closing))


def trial_levels(weights: Real) -> Real:
    """Return what the array gives for every code, the sum of its bits' weights, shape (2^bits,).

    Parameters
    ----------
    weights : of the bits, lowest first, shape (bits,) [LSB]
    """
    levels = np.zeros(1)
    for weight in weights:
        levels = np.concatenate([levels, levels + weight])
    return levels


def found_levels(trial: Real) -> Real:
    """Return the lowest input at which the search ends at a code or above, shape (2^bits - 1,).

    The search decides bit by bit, from the highest, and never goes back. Where the array gives more
    for a code than for a later one, no input leads to the codes between: with s the stride of a
    bit, a code that ends in that bit is only tried between its neighbours at twice the stride,

        T[c] = min(max(trial[c], T[c - s]), T[c + s]),    T[0] = -inf, T[2^bits] = inf,

    from the highest bit down. Levels never fall; equal ones enclose a missing code.

    Parameters
    ----------
    trial : what the array gives for codes 0 to 2^bits - 1, of which that for 0 has no meaning
    """
    count = len(trial)
    found = np.append(trial, np.inf)
    found[0] = -np.inf
    stride = count // 2
    while stride:
        codes = np.arange(stride, count, 2 * stride)
        found[codes] = np.clip(found[codes], found[codes - stride], found[codes + stride])
        stride //= 2
    return np.asarray(found[1:-1])
