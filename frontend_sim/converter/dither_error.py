"""What dither makes of the rounding error, in closed form."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from frontend_sim.converter.dither import Dither

NODES, WEIGHTS = np.polynomial.legendre.leggauss(4)


@dataclass(frozen=True)
class DitherError:
    """Error of what is read back, over all values of the dither, at one input.

    Parameters
    ----------
    mean : [LSB]
    rms : about its mean [LSB]
    """

    mean: float
    rms: float


def dither_error(dither: Dither | None, position: float) -> DitherError:
    """Return mean and rms of the error of an ideal quantizer that rounds to the nearest code,

        e = Q(x + d) - x, and without the dither again e = Q(x + d) - d - x.

    The integrals over the density of d are taken piece by piece, between the edges of the codes and
    the corners of the density, where they are polynomials and Gauss' rule is exact. With uniform
    dither of 1 LSB the mean is zero at every input; with triangular dither of 2 LSB the rms is
    LSB/2 at every input as well; with either taken off again it is LSB/sqrt 12. Source: Wannamaker
    et al. 2000, "A theory of nonsubtractive dither"; from memory.

    Parameters
    ----------
    dither : None for a quantizer without
    position : x, the input in codes above the middle of some code [LSB]
    """
    if dither is None:
        return DitherError(math.floor(position + 0.5) - position, 0.0)
    half = 0.5 * dither.width
    first = math.floor(position - half + 0.5)
    last = math.floor(position + half + 0.5)
    cuts = [code + 0.5 - position for code in range(first, last)]
    edges = np.unique([-half, 0.0, half, *(cut for cut in cuts if abs(cut) < half)])
    middle, reach = 0.5 * (edges[1:] + edges[:-1]), 0.5 * np.diff(edges)
    d = middle[:, None] + reach[:, None] * NODES
    share = reach[:, None] * WEIGHTS * dither.density(d)
    code = np.floor(middle + position + 0.5)[:, None]
    error = code - position - (d if dither.subtractive else 0.0)
    mean = float(np.sum(share * error))
    return DitherError(mean, math.sqrt(max(float(np.sum(share * (error - mean) ** 2)), 0.0)))
