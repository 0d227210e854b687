"""The values that a key may be given while its boundary is looked for."""

from __future__ import annotations

import math
from dataclasses import dataclass
from decimal import Decimal
from functools import cached_property
from typing import Literal, Protocol

import numpy as np

from frontend_sim.errors import QuantityError
from frontend_sim.quantities.preferred import ROUNDING, mantissas

Scale = Literal["log", "linear"]

MOST_MEMBERS = 1_000_000
"""Of more whole numbers there is no list."""

DECADE = 10.0
"""Bounds that lie further apart than this factor are searched on a logarithmic scale."""

NEAR_ZERO = 0.01
"""Values below this share of the larger bound are not told apart more finely than it."""


class Domain(Protocol):
    """Ordered values between two bounds, both included."""

    @property
    def count(self) -> int | None:
        """How many values there are; None where they are without number."""

    @property
    def scale(self) -> Scale:
        """How values are spread."""

    @property
    def resolution(self) -> str:
        """How near to a boundary the search comes, in words."""

    def spread(self, points: int) -> tuple[float, ...]:
        """Return up to so many values, the bounds and others evenly between them, increasing."""

    def between(self, low: float, high: float) -> float | None:
        """Return the value in the middle of two; None where they are near enough to each other."""

    def plainest(self, low: float, high: float) -> float | None:
        """Return the value with the shortest text between two neighbours; None where none is."""

    def place(self, value: float) -> float:
        """Return where a value stands on the scale."""

    def at(self, place: float) -> float:
        """Return the value next to a place on the scale."""

    def narrowings(self, points: int) -> int:
        """Return how many values the search takes at most from one point to the next."""


@dataclass(frozen=True)
class Continuous:
    """All numbers between two bounds, rounded so that a short text tells each of them.

    Parameters
    ----------
    low, high : bounds, in SI, low below high
    tolerance : relative width of what is left between a value that passes and one that fails;
        of values near zero, where it lies within the bounds, relative to ``NEAR_ZERO`` of the
        larger bound
    scale : log needs a low above zero
    """

    low: float
    high: float
    tolerance: float
    scale: Scale

    @property
    def count(self) -> int | None:
        """Numbers are without number."""
        return None

    @property
    def resolution(self) -> str:
        """How near to a boundary the search comes, in words."""
        return f"to {100.0 * self.tolerance:g} % of the value"

    def spread(self, points: int) -> tuple[float, ...]:
        """Return the bounds and rounded values evenly between them."""
        places = np.linspace(self.place(self.low), self.place(self.high), points)
        inner = (self.at(float(place)) for place in places[1:-1])
        kept = {value for value in inner if self.low < value < self.high}
        return (self.low, *sorted(kept), self.high)

    def between(self, low: float, high: float) -> float | None:
        """Return the rounded middle; None where the gap is within the tolerance."""
        if high - low <= self._grain(max(abs(low), abs(high))):
            return None
        middle = self.at(0.5 * (self.place(low) + self.place(high)))
        return middle if low < middle < high else None

    def plainest(self, low: float, high: float) -> float | None:
        """Return the number with the fewest digits between two, less than either of them has."""
        middle = 0.5 * (low + high)
        fewest = min(len(Decimal(repr(end)).normalize().as_tuple().digits) for end in (low, high))
        for digits in range(1, fewest):
            value = float(f"{middle:.{digits - 1}e}")
            if low < value < high:
                return value
        return None

    def place(self, value: float) -> float:
        """Return the logarithm of a value, or the value."""
        return math.log(value) if self.scale == "log" else value

    def at(self, place: float) -> float:
        """Return the value at a place, rounded to a tenth of the tolerance or better."""
        value = math.exp(place) if self.scale == "log" else place
        grain = self._grain(abs(value))
        if value == 0.0 or grain == 0.0:
            return value
        power = math.floor(math.log10(grain) + 1e-9)
        return float(Decimal(value).quantize(Decimal(1).scaleb(power)))

    def narrowings(self, points: int) -> int:
        """Return the number of halvings from one point to the next within the tolerance."""
        width = (self.place(self.high) - self.place(self.low)) / max(points - 1, 1)
        least = self.tolerance
        if self.scale == "linear":
            ends = [abs(self.low), abs(self.high)]
            least *= min(ends) if self.low * self.high > 0.0 else NEAR_ZERO * max(ends)
        return max(math.ceil(math.log2(max(width / least, 1.0))), 0) + 2

    def _grain(self, size: float) -> float:
        if self.low * self.high <= 0.0:
            size = max(size, NEAR_ZERO * max(abs(self.low), abs(self.high)))
        return self.tolerance * size


@dataclass(frozen=True)
class Members:
    """Some values and none between them: whole numbers, or preferred numbers.

    Parameters
    ----------
    values : increasing
    told : what they are, in words
    """

    values: tuple[float, ...]
    told: str

    @property
    def count(self) -> int | None:
        """Number of the values."""
        return len(self.values)

    @property
    def scale(self) -> Scale:
        """Whole numbers are spread evenly, preferred numbers by ratio."""
        steps = np.diff(self.values)
        return "linear" if np.all(steps == 1.0) else "log"

    @property
    def resolution(self) -> str:
        """How near to a boundary the search comes, in words."""
        return f"to the next of the {self.told}"

    @cached_property
    def _places(self) -> dict[float, int]:
        return {value: place for place, value in enumerate(self.values)}

    def spread(self, points: int) -> tuple[float, ...]:
        """Return all values, or so many of them."""
        last = len(self.values) - 1
        chosen = sorted({round(place) for place in np.linspace(0, last, points)})
        return self.values if len(self.values) <= points else tuple(self.values[i] for i in chosen)

    def between(self, low: float, high: float) -> float | None:
        """Return the middle one; None where the two are neighbours."""
        first, last = self._places[low], self._places[high]
        return self.values[(first + last) // 2] if last - first > 1 else None

    def plainest(self, low: float, high: float) -> float | None:
        """Return None: there is nothing between neighbours."""
        return None

    def place(self, value: float) -> float:
        """Return the number of a value, from 0."""
        return float(self._places[value])

    def at(self, place: float) -> float:
        """Return the value next to a place."""
        return self.values[min(max(round(place), 0), len(self.values) - 1)]

    def narrowings(self, points: int) -> int:
        """Return the number of halvings from one point to the next."""
        between = (len(self.values) - 1) / max(points - 1, 1)
        return max(math.ceil(math.log2(max(between, 1.0))), 0)


def whole_numbers(low: float, high: float) -> Members:
    """Return the whole numbers from low to high, both included.

    Raises
    ------
    QuantityError
        If they are more than ``MOST_MEMBERS``.
    """
    if high - low >= MOST_MEMBERS:
        raise QuantityError(
            f"from {low:g} to {high:g} lie more than {MOST_MEMBERS:,} whole numbers, which is more "
            "than are looked through; bring the bounds nearer to each other"
        )
    return Members(tuple(float(i) for i in range(int(low), int(high) + 1)), "whole numbers")


def preferred_numbers(low: float, high: float, series: str) -> Members:
    """Return the members of a preferred-number series from low to high, both above zero."""
    decades = range(math.floor(math.log10(low)) - 1, math.floor(math.log10(high)) + 2)
    found = (float(f"{each}e{power - 2}") for power in decades for each in mantissas(series))
    inside = (x for x in found if low * (1.0 - ROUNDING) <= x <= high * (1.0 + ROUNDING))
    return Members(tuple(sorted(inside)), f"members of {series}")


def usual_scale(low: float, high: float) -> Scale:
    """Return log for bounds above zero that are more than a decade apart, else linear."""
    return "log" if low > 0.0 and high > DECADE * low else "linear"
