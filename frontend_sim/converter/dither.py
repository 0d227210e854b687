"""Noise that is added on purpose, so that the rounding error forgets the input."""

from __future__ import annotations

from collections.abc import Callable
from typing import Annotated, Literal

import numpy as np
from numpy.typing import NDArray
from pydantic import Field

from frontend_sim.quantities import LSB, Bounds, Reads
from frontend_sim.randomness import stream, uniform
from frontend_sim.values import Value

Real = NDArray[np.float64]

Width = Annotated[float, Reads(LSB, Bounds(above=0.0))]


class Dither(Value):
    """A random voltage before the quantizer, spread over ``width``, a new one at every look.

    uniform: all values within -width/2 and width/2 are equally likely;
    triangular: the sum of two uniform ones of half the width.
    """

    shape: Literal["uniform", "triangular"] = Field(description="how the values are spread")
    width: Width = Field(
        description="from the lowest to the highest value; 1 LSB uniform or 2 LSB triangular are "
        "usual"
    )
    subtractive: Annotated[bool, Field(strict=True)] = Field(
        default=False,
        description="true: the voltage read back has the dither taken off again, as firmware does "
        "that knows it; codes keep it",
    )

    def values(self, start: int, stop: int, seed: int) -> Real:
        """Return the dither of looks start to stop - 1, shape (stop - start,) [LSB].

        It depends on the seed and the number of a look alone.
        """
        return self.width * _SHAPES[self.shape](seed, start, stop)

    def density(self, values: Real) -> Real:
        """Return the probability density at some values, of their shape [1/LSB]."""
        inside = np.abs(values) <= 0.5 * self.width
        if self.shape == "uniform":
            return np.where(inside, 1.0 / self.width, 0.0)
        slope = 1.0 - 2.0 * np.abs(values) / self.width
        return np.where(inside, 2.0 / self.width * slope, 0.0)


def _uniform(seed: int, start: int, stop: int) -> Real:
    return uniform(stream(seed, "dither"), start, stop) - 0.5


def _triangular(seed: int, start: int, stop: int) -> Real:
    second = uniform(stream(seed, "dither", "second"), start, stop)
    return np.asarray(0.5 * (_uniform(seed, start, stop) + second - 0.5))


_SHAPES: dict[str, Callable[[int, int, int], Real]] = {
    "uniform": _uniform,
    "triangular": _triangular,
}
