"""What every stimulus has in common."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Iterator
from pathlib import Path
from typing import Self

from frontend_sim.stimulus.drive import Drive
from frontend_sim.stimulus.levels import LevelFault, absolute_keys, level_faults, written_level
from frontend_sim.values import Value

Key = tuple[int, ...]
"""Key of a stream of random numbers, see ``frontend_sim.randomness``."""


class Stimulus(Value):
    """What arrives at the first stage, from t = 0 on, right-continuous."""

    @abstractmethod
    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return the drives whose sum is the signal. ``key`` seeds what is random."""

    def measured_in(self, signal: str) -> Self:
        """Return the stimulus as a signal in an SI unit, ``V`` unless the first stage is a sensor.

        Only recordings differ: their numbers, and the units that files state, are read by it.
        """
        return self

    def unit_faults(self, signal: str) -> list[LevelFault]:
        """Return which values are not given in units of a signal.

        A temperature needs a value to start from: zero, the default elsewhere, is absolute zero.

        Parameters
        ----------
        signal : SI unit of the signal
        """
        faults = self.foreign_levels(signal)
        return faults or (_temperature_faults(self) if signal == "K" else [])

    def foreign_levels(self, signal: str) -> list[LevelFault]:
        """Return which values are in units of something else, see ``unit_faults``."""
        return list(level_faults(self, signal))

    def written_level(self) -> str:
        """Return a level of the signal as the file has it, with its unit; empty without one."""
        return written_level(self)

    def terms(self) -> Iterator[tuple[tuple[str | int, ...], Stimulus]]:
        """Return what the signal is the sum of, each with its path; a plain stimulus is its own."""
        yield (), self

    def is_absolute(self) -> bool:
        """Return whether the signal is given by its values, not only by differences from zero."""
        return bool(absolute_keys(self)[0])

    def known_length(self) -> float | None:
        """Return how long the signal is known [s], or None where it goes on for ever."""
        return None

    def highest_frequency(self) -> float | None:
        """Return the highest frequency that is meant to arrive; None where none is named [Hz]."""
        return None

    def files(self) -> tuple[Path, ...]:
        """Return the files that the signal is read from."""
        return ()

    def notes(self) -> tuple[str, ...]:
        """Return what was decided while the signal was read, for the log of the run."""
        return ()


def _temperature_faults(stimulus: Stimulus) -> list[LevelFault]:
    absolute = [(path, term) for path, term in stimulus.terms() if term.is_absolute()]
    if not absolute:
        _, free = absolute_keys(stimulus)
        give = f"give {free[0]}" if free else "add it to a step in a sum"
        return [LevelFault((), f'it swings around 0 K; {give}, for instance "25 degC"')]
    faults = [
        LevelFault(
            path,
            "the terms of a sum are added in K, and another term gives temperatures already; give "
            "this one as differences, around 0 K",
        )
        for path, _ in absolute[1:]
    ]
    path, first = absolute[0]
    return faults + [
        LevelFault(
            (*path, key),
            f'it is 0 K, absolute zero, where nothing is given; add for instance {key} = "25 degC"',
        )
        for key in absolute_keys(first)[1]
    ]
