"""Frequencies at which a response has to be looked at, so that nothing narrow is missed."""

from __future__ import annotations

import numpy as np

from frontend_sim.analog.block import Complex, Real

PER_DECADE = 200
"""Points per decade of the plain grid."""

BEYOND = 1e3
"""The grid reaches this factor below the slowest and above the fastest root."""


def frequency_grid(roots: Complex, highest: float | None = None) -> Real:
    """Return frequencies that resolve every root of a response, sorted, shape (K,) [Hz].

    A logarithmic grid from far below the slowest to far above the fastest pole or zero, and around
    the imaginary part of each complex root points whose distance goes from a thousandth of the
    width of its resonance, |Re|, to the distance of the next decade. Beyond the grid the response
    is a power of the frequency to 1 ppm.

    Parameters
    ----------
    roots : poles and zeros, shape (r,) [rad/s]
    highest : end of the grid [Hz]; left out, far above the fastest root
    """
    sizes = np.abs(roots[roots != 0.0]) / (2.0 * np.pi)
    if len(sizes) == 0:
        sizes = np.array([1.0 if highest is None else highest])
    low = float(np.min(sizes)) / BEYOND
    high = float(np.max(sizes)) * BEYOND if highest is None else highest
    low = min(low, high / BEYOND)
    count = int(np.ceil(np.log10(high / low) * PER_DECADE)) + 1
    parts = [np.geomspace(low, high, count)]
    offsets = np.geomspace(1e-3, 1e1, 161)
    for root in roots[roots.imag > 0.0]:
        centre = abs(root.imag) / (2.0 * np.pi)
        width = max(abs(root.real) / (2.0 * np.pi), 1e-12 * centre)
        reach = np.concatenate([width * offsets, centre * np.geomspace(1e-6, 0.5, 161)])
        parts.append(np.concatenate([centre - reach, [centre], centre + reach]))
    grid = np.unique(np.concatenate(parts))
    return np.asarray(grid[(grid >= low) & (grid <= high)], dtype=np.float64)
