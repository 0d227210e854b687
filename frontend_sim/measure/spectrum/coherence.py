"""Coherent records: a whole number of cycles in a whole number of points."""

from __future__ import annotations

import math
from dataclasses import dataclass

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import positive
from frontend_sim.quantities.counting import counted

ON_BIN = 1e-9
"""Distance from a whole number of cycles that leaks nothing to speak of, -175 dB [bins]."""

ROUNDING = 8.0 * math.ulp(1.0)
"""What rounding of frequency and rate may add to it, as a share of the cycles."""


@dataclass(frozen=True)
class Coherence:
    """How a tone lies in a record.

    Parameters
    ----------
    frequency : of the tone [Hz]
    cycles : the whole number nearest to the cycles in the record, M
    count : points of the record, N
    deviation : cycles in the record, less M [bins]
    """

    frequency: float
    cycles: int
    count: int
    deviation: float

    @property
    def common_factor(self) -> int:
        """Largest number that divides both M and N; above one the record repeats itself."""
        return math.gcd(self.cycles, self.count)

    @property
    def phases(self) -> int:
        """Different phases of the sine that a coherent record looks at, N / common factor."""
        return self.count // self.common_factor

    @property
    def leakage(self) -> float:
        """Share of the tone's power beside its bin under a rectangular window, 1 - sinc²(d) [1]."""
        turn = math.pi * self.deviation
        # Below 1e-4 the series is exact, and the difference from one is lost.
        return turn * turn / 3.0 if abs(turn) < 1e-4 else 1.0 - (math.sin(turn) / turn) ** 2

    @property
    def coherent(self) -> bool:
        """Whether the tone lies on its bin to rounding, M and N have no common factor."""
        close = abs(self.deviation) <= ON_BIN + ROUNDING * self.cycles
        return close and self.common_factor == 1


def coherence_of(frequency: float, rate: float, count: int) -> Coherence:
    """Return how a tone lies in a record of ``count`` points.

    Coherent sampling: f / rate = M / N with M and N without common factor. Source: IEEE 1241, from
    memory.

    Parameters
    ----------
    frequency, rate : [Hz]

    Raises
    ------
    MeasureError
        If one of them is not above zero.
    """
    exact = positive(frequency, "the frequency of the tone", "Hz")
    length = int(positive(count, "the number of points", ""))
    cycles = exact / positive(rate, "the rate", "Hz") * length
    return Coherence(exact, round(cycles), length, cycles - round(cycles))


def coherent_tone(near: float, rate: float, count: int) -> Coherence:
    """Return the coherent tone nearest to a frequency: what to set a generator to.

    Parameters
    ----------
    near : wanted frequency, below half the rate [Hz]
    rate : samples per second [Hz]
    count : points of the record

    Raises
    ------
    MeasureError
        If there is none: the frequency is out of range, or the record has too few points.
    """
    wanted = coherence_of(near, rate, count)
    if near >= 0.5 * rate:
        raise MeasureError(
            f"a tone of {near:g} Hz lies above half the rate, {0.5 * rate:g} Hz; ask for the tone "
            "that it folds to"
        )
    target = wanted.cycles + wanted.deviation
    below = math.floor(target)
    for distance in range(count):
        pair = (below - distance, below + 1 + distance)
        for cycles in sorted(pair, key=lambda cycles: abs(cycles - target)):
            if 0 < cycles < 0.5 * count and math.gcd(cycles, count) == 1:
                return Coherence(cycles / count * rate, cycles, count, 0.0)
    points = counted(count, "point")
    raise MeasureError(f"a record of {points} has no coherent tone; take at least 3 points")
