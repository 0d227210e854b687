"""What every stimulus has in common."""

from __future__ import annotations

from abc import abstractmethod
from pathlib import Path

from frontend_sim.stimulus.drive import Drive
from frontend_sim.values import Value

Key = tuple[int, ...]
"""Key of a stream of random numbers, see ``frontend_sim.randomness``."""


class Stimulus(Value):
    """What arrives at the first stage, from t = 0 on, right-continuous."""

    @abstractmethod
    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return the drives whose sum is the signal. ``key`` seeds what is random."""

    def known_length(self) -> float | None:
        """Return how long the signal is known [s], or None where it goes on for ever."""
        return None

    def files(self) -> tuple[Path, ...]:
        """Return the files that the signal is read from."""
        return ()

    def notes(self) -> tuple[str, ...]:
        """Return what was decided while the signal was read, for the log of the run."""
        return ()
