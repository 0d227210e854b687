"""Looks for the boundaries between what passes and what fails along an ordered domain."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field
from itertools import pairwise

from frontend_sim.solve.domain import Domain

POINTS = 17
"""Values that are looked at first."""

MOST_BOUNDARIES = 40
"""Of more boundaries only the outermost are narrowed down: the verdict jumps about."""

PLACES = 3
"""Hidden windows are looked for at so many places."""

TRIES = 8
"""Values that are looked at for each of them, and for the bounds."""


@dataclass(frozen=True)
class Boundary:
    """Two neighbouring values of which one passes and the other fails."""

    passes: float
    fails: float

    @property
    def rising(self) -> bool:
        """Whether the larger of the two passes."""
        return self.passes > self.fails


@dataclass
class Search:
    """A search for all boundaries of a predicate; what is known so far can be read at any time.

    First values evenly spread over the domain are looked at. Then, where the score of a value that
    fails is a peak, or that of one that passes a dip, a window may hide beside it: the top of the
    parabola through the neighbours and the middle of the wider side are looked at in turn. Last,
    each boundary is narrowed down by halving. What lies between two values of the same verdict and
    shows in no score stays unseen.

    Parameters
    ----------
    domain : where to look
    score : of a value, at least 0 if it passes and below if it fails; minus infinity for a value
        that fails without a number
    points : values that are looked at first
    known : value -> score
    """

    domain: Domain
    score: Callable[[float], float]
    points: int = POINTS
    known: dict[float, float] = field(default_factory=dict)
    finished: bool = False

    @property
    def most(self) -> int:
        """How many values are looked at where there is one boundary."""
        count, first = self.domain.count, self.points
        if count is not None and count <= first:
            return count
        most = first + (PLACES + 2) * TRIES + self.domain.narrowings(first)
        return most if count is None else min(most, count)

    def run(self) -> None:
        """Search; an exception of the score passes through, and ``known`` stays."""
        for value in self.domain.spread(self.points):
            self.passes(value)
        self._look_for_windows()
        found = self.boundaries()
        # The outermost ones first: the least and the largest value that pass lie there.
        outside_in = sorted(range(len(found)), key=lambda i: min(i, len(found) - 1 - i))
        for place in outside_in[:MOST_BOUNDARIES]:
            self._narrow(found[place])
        self.finished = True

    def passes(self, value: float) -> bool:
        """Return whether a value passes; each value is scored once."""
        if value not in self.known:
            self.known[value] = self.score(value)
        return self.known[value] >= 0.0

    def boundaries(self) -> tuple[Boundary, ...]:
        """Return the boundaries that are known, by increasing value."""
        values = sorted(self.known)
        return tuple(
            Boundary(b, a) if self.known[b] >= 0.0 else Boundary(a, b)
            for a, b in pairwise(values)
            if (self.known[a] >= 0.0) != (self.known[b] >= 0.0)
        )

    def _narrow(self, boundary: Boundary) -> None:
        good, bad = boundary.passes, boundary.fails
        while (middle := self.domain.between(min(good, bad), max(good, bad))) is not None:
            good, bad = (middle, bad) if self.passes(middle) else (good, middle)
        plain = self.domain.plainest(min(good, bad), max(good, bad))
        if plain is not None:
            self.passes(plain)  # a limit that is a round number is met there

    def _look_for_windows(self) -> None:
        if self.domain.count is not None and self.domain.count <= len(self.known):
            return
        values = sorted(self.known)
        found = [
            (abs(self.known[b]), a, b, c)
            for a, b, c in zip(values, values[1:], values[2:], strict=False)
            if self._turns(a, b, c)
        ]
        for _, a, b, c in sorted(found)[:PLACES]:
            self._climb(a, b, c)
        self._approach(values[0], values[1])
        self._approach(values[-1], values[-2])

    def _approach(self, end: float, other: float) -> None:
        """Halve the way to a bound that is nearer to the other verdict than what is beside it."""
        for _ in range(TRIES):
            here, there = self.known[end], self.known[other]
            alike = (here >= 0.0) == (there >= 0.0)
            if not alike or not (math.isfinite(here) and abs(here) < abs(there)):
                return
            middle = self.domain.between(min(end, other), max(end, other))
            if middle is None or self.passes(middle) != (here >= 0.0):
                return
            if abs(self.known[middle]) < abs(here):
                self._climb(min(end, other), middle, max(end, other))
                return
            other = middle

    def _turns(self, a: float, b: float, c: float) -> bool:
        """Return whether the score turns back at b, on its way to the other verdict."""
        left, here, right = self.known[a], self.known[b], self.known[c]
        if not all(map(math.isfinite, (left, here, right))) or left == here == right:
            return False
        alike = (left >= 0.0) == (here >= 0.0) == (right >= 0.0)
        best = max(left, right) <= here < 0.0 or 0.0 <= here <= min(left, right)
        return alike and best

    def _climb(self, a: float, b: float, c: float) -> None:
        """Look at the top of a parabola through three values, and into the wider side, in turn."""
        verdict = self.known[b] >= 0.0
        for turn in range(TRIES):
            place = self._middle(a, b, c) if turn % 2 else self._top(a, b, c)
            value = self.domain.at(place)
            if not a < value < c or value in self.known:
                continue
            if self.passes(value) != verdict or not math.isfinite(self.known[value]):
                return
            nearer = abs(self.known[value]) < abs(self.known[b])
            middle, other = (value, b) if nearer else (b, value)
            a, c = (a, other) if other > middle else (other, c)
            b = middle

    def _middle(self, a: float, b: float, c: float) -> float:
        x, y, z = (self.domain.place(value) for value in (a, b, c))
        return 0.5 * (y + (z if z - y > y - x else x))

    def _top(self, a: float, b: float, c: float) -> float:
        x, y, z = (self.domain.place(value) for value in (a, b, c))
        left, here, right = (self.known[value] for value in (a, b, c))
        up, down = (y - x) * (here - right), (y - z) * (here - left)
        if up == down:
            return 0.5 * (x + z)
        return y - 0.5 * ((y - x) * up - (y - z) * down) / (up - down)
