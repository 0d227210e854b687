"""When a scan looks at which channel."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.adc import Adc
from frontend_sim.converter.paced import PacedAdc
from frontend_sim.converter.pattern import LookPattern
from frontend_sim.scenario.scan import Scan

Index = NDArray[np.int64]


@dataclass(frozen=True)
class Rhythm:
    """The timing of one period of a scan, by the converter's own clock.

    Visit v begins v · slot after the multiplexer's first switch; its look i of conversion j is at

        v · slot + settle + j / rate + (i + 1) · interval,

    where interval is that between looks: 1 / rate unless the converter averages.

    Parameters
    ----------
    order : number of the channel of each visit
    dwell, discard : conversions of a visit, and how many of them are thrown away first
    slot, settle, conversion, interval : [s]
    looks : of one conversion
    simultaneous : whether all channels are sampled at the first look of a period
    """

    order: tuple[int, ...]
    dwell: int
    discard: int
    slot: float
    settle: float
    conversion: float
    interval: float
    looks: int
    simultaneous: bool

    @classmethod
    def of(cls, scan: Scan, names: Sequence[str], adc: Adc) -> Self:
        """Work out the timing of a scan whose order is valid."""
        order = tuple(names.index(name) for name in scan.order or names)
        conversion = 1.0 / adc.rate
        given = adc.averaging.interval if adc.averaging is not None else None
        interval = conversion / adc.looks if given is None else given
        slot = scan.settle + scan.dwell * conversion if scan.slot is None else scan.slot
        turns = (scan.dwell, scan.discard, slot, scan.settle, conversion, interval, adc.looks)
        return cls(order, *turns, scan.sampling == "simultaneous")

    def in_order(self, order: Sequence[int]) -> Rhythm:
        """Return the same timing with the channels, by number, in another order."""
        return replace(self, order=tuple(order))

    @property
    def period(self) -> float:
        """One whole scan [s]."""
        return len(self.order) * self.slot

    @property
    def conversions(self) -> int:
        """Conversions in one period, those thrown away included."""
        return len(self.order) * self.dwell

    @property
    def spare(self) -> bool:
        """Whether the multiplexer stays for longer than until the last look of a visit."""
        last = self.settle + (self.dwell - 1) * self.conversion + self.looks * self.interval
        return self.slot > last * (1.0 + 1e-9)

    @property
    def lead(self) -> float:
        """From the switch to the first look of a visit [s]."""
        return self.settle + self.interval

    @property
    def look_times(self) -> list[float]:
        """Time from the switch to each look of a visit [s]."""
        return [
            self.lead + j * self.conversion + i * self.interval
            for j in range(self.dwell)
            for i in range(self.looks)
        ]

    @cached_property
    def channel_of(self) -> Index:
        """Number of the channel of each conversion of a period, shape (conversions,)."""
        return np.repeat(np.array(self.order, np.int64), self.dwell)

    @cached_property
    def kept(self) -> NDArray[np.bool_]:
        """Which conversions of a period are not thrown away, shape (conversions,)."""
        return np.tile(np.arange(self.dwell) >= self.discard, len(self.order))

    def places(self, channel: int | None = None, discarded: bool = True) -> list[float]:
        """Return the places of looks in a period, from the first look of the first visit [s].

        Parameters
        ----------
        channel : None for all
        discarded : whether those of conversions that are thrown away count
        """
        first = 0 if discarded else self.discard
        return [
            visit * self.slot + j * self.conversion + i * self.interval
            for visit, here in enumerate(self.order)
            if channel is None or channel == here
            for j in range(first, self.dwell)
            for i in range(self.looks)
        ]

    def sequence(self, adc: Adc) -> PacedAdc:
        """Return the converter that makes all conversions of the scan one after the other."""
        places = np.array(self.places()) / adc.tempo
        return PacedAdc.of(adc, LookPattern.of(adc.first, self.period / adc.tempo, places.tolist()))

    def visiting(self, adc: Adc, channel: int, discarded: bool = False) -> PacedAdc:
        """Return what one channel gets of the converter."""
        if self.simultaneous:
            return PacedAdc.of(adc, LookPattern(adc.first, adc.tempo / self.period))
        places = np.array(self.places(channel, discarded)) / adc.tempo
        first = adc.first + float(places[0])
        return PacedAdc.of(adc, LookPattern.of(first, self.period / adc.tempo, places.tolist()))

    def skew(self, channel: int) -> float:
        """Return how late a channel's first kept code is, by the converter's clock [s].

        Counted from the earliest kept code of a period; that of a code is its last look.
        """
        if self.simultaneous:
            return 0.0
        last = self.looks - 1
        earliest = self.places(None, discarded=False)[last]
        return self.places(channel, discarded=False)[last] - earliest
