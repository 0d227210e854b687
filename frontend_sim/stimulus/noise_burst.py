"""A burst of noise."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Literal

import numpy as np
from pydantic import Field

from frontend_sim.quantities import Frequency, NotNegativeSignalDifference, PositiveTime, Time
from frontend_sim.randomness import normal
from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.drive import Between, Drive, Real, UniformDrive

POINTS_PER_CYCLE = 16
"""Points per cycle of the bandwidth; the lines between them droop by 0.11 dB at the band's end."""
TILE = 8192
"""The burst is filtered in tiles at fixed positions, so a cut of time never shows."""


@dataclass(frozen=True, eq=False)
class Burst(UniformDrive):
    """Gaussian noise, filtered to its bandwidth, as points joined by lines."""

    rms: float
    bandwidth: float
    origin: float
    length: float
    key: Key
    initial: float = 0.0
    between: Between = "line"

    @property
    def rate(self) -> float:
        """Points per second."""
        return POINTS_PER_CYCLE * self.bandwidth

    @property
    def _count(self) -> int:
        return max(int(np.floor(self.length * self.rate + 1e-9)) + 1, 2)

    @cached_property
    def _filter(self) -> Real:
        """A windowed sinc, half amplitude at the bandwidth, that makes the rms value one.

        Kaiser window for 60 dB; the transition takes 20 % of the bandwidth. Between two points of
        variance r0 and covariance r1 a line has the mean variance (2 r0 + r1) / 3.
        """
        half = 150
        n = np.arange(-half, half + 1)
        taps = np.sinc(2.0 * n / POINTS_PER_CYCLE) * np.kaiser(2 * half + 1, 5.65)
        variance = (2.0 * np.sum(taps**2) + np.sum(taps[1:] * taps[:-1])) / 3.0
        return np.asarray(taps / np.sqrt(variance))

    def points(self, first: int, last: int) -> Real:
        """Return points of the burst; zero at both its ends and outside."""
        wanted = np.zeros(last - first)
        start, stop = max(first, 1), min(last, self._count - 1)
        if stop > start:
            tiles = range(start // TILE, (stop - 1) // TILE + 1)
            drawn = np.concatenate([self._tile(tile) for tile in tiles])
            offset = tiles[0] * TILE
            wanted[start - first : stop - first] = drawn[start - offset : stop - offset]
        return wanted

    def _tile(self, tile: int) -> Real:
        taps = self._filter
        white = normal(self.key, tile * TILE, (tile + 1) * TILE + len(taps) - 1)
        return self.rms * np.convolve(white, taps, mode="valid")


class NoiseBurst(Stimulus):
    """Gaussian noise of a stated rms value and bandwidth, for a while; zero outside.

    The density is flat to 0.9 times the bandwidth, at half amplitude there, and 60 dB down from
    1.1 times on, but for the images that lines between points leave, 47 dB down around 16 times
    the bandwidth. Same seed, same burst.
    """

    kind: Literal["noise-burst"] = "noise-burst"
    rms: NotNegativeSignalDifference = Field(description="rms value during the burst")
    bandwidth: Frequency = Field(description="bandwidth, from zero to the half-amplitude point")
    length: PositiveTime = Field(description="length of the burst")
    at: Time = Field(default=0.0, description="instant at which the burst begins")

    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return one burst."""
        return (Burst(self.rms, self.bandwidth, self.at, self.length, (*key, 1)),)

    def highest_frequency(self) -> float:
        """Return the bandwidth [Hz]."""
        return self.bandwidth
