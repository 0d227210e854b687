"""Which looks of a scan's converter belong to which channel."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from frontend_sim.scenario.rhythm import Rhythm
from frontend_sim.simulation.kernels import Index


@dataclass(frozen=True)
class Turns:
    """Looks and conversions of a scan, counted from the start of the run.

    All stretches of looks begin with a whole scan.
    """

    rhythm: Rhythm

    @property
    def looks(self) -> int:
        """Looks in one scan."""
        return self.rhythm.conversions * self.rhythm.looks

    @property
    def visit(self) -> int:
        """Looks in one visit."""
        return self.rhythm.dwell * self.rhythm.looks

    @cached_property
    def _places(self) -> list[Index]:
        """Places of the looks of each channel in a scan."""
        owner = np.repeat(self.rhythm.channel_of, self.rhythm.looks)
        return [np.flatnonzero(owner == i) for i in range(max(self.rhythm.order) + 1)]

    def count(self, channel: int, scans: int) -> int:
        """Return how many looks a channel has in some scans."""
        return scans * len(self._places[channel])

    def rows(self, channel: int, count: int) -> Index:
        """Return which of ``count`` looks from the start of a scan on are those of a channel."""
        scans = -(-count // self.looks)
        rows = (np.arange(scans)[:, None] * self.looks + self._places[channel]).ravel()
        return rows[: int(np.searchsorted(rows, count))]

    def conversions(self, channel: int, count: int, discarded: bool) -> Index:
        """Return which of ``count`` conversions from the start of a scan on a channel gets.

        Parameters
        ----------
        discarded : whether those that the scan throws away count
        """
        rhythm = self.rhythm
        mine = rhythm.channel_of == channel
        places = np.flatnonzero(mine if discarded else mine & rhythm.kept)
        scans = -(-count // rhythm.conversions)
        rows = (np.arange(scans)[:, None] * rhythm.conversions + places).ravel()
        return rows[: int(np.searchsorted(rows, count))]
