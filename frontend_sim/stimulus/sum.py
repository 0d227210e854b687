"""Several stimuli at once."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Literal, Self

from pydantic import Field

from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.drive import Drive
from frontend_sim.stimulus.levels import LevelFault

if TYPE_CHECKING:
    from frontend_sim.stimulus import AnyStimulus


class Sum(Stimulus):
    """u = sum of the terms. Terms may be of any kind, sums too."""

    kind: Literal["sum"] = "sum"
    term: tuple[AnyStimulus, ...] = Field(min_length=1, description="the stimuli that are added")

    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return the drives of all terms; each term has a random stream of its own."""
        return tuple(
            drive
            for position, term in enumerate(self.term)
            for drive in term.drives((*key, position))
        )

    def measured_in(self, signal: str) -> Self:
        """Return the sum of all terms, each measured in an SI unit."""
        terms = tuple(term.measured_in(signal) for term in self.term)
        same = all(one is other for one, other in zip(terms, self.term, strict=True))
        return self if same else self.model_copy(update={"term": terms})

    def terms(self) -> Iterator[tuple[tuple[str | int, ...], Stimulus]]:
        """Return all terms, those of sums in it too."""
        for position, term in enumerate(self.term):
            for path, inner in term.terms():
                yield ("term", position, *path), inner

    def foreign_levels(self, signal: str) -> list[LevelFault]:
        """Return which values of which terms are in units of something else."""
        return [
            LevelFault(("term", position, *path), text)
            for position, term in enumerate(self.term)
            for path, text in term.foreign_levels(signal)
        ]

    def known_length(self) -> float | None:
        """Return the length of the shortest term that ends."""
        known = [length for term in self.term if (length := term.known_length()) is not None]
        return min(known) if known else None

    def highest_frequency(self) -> float | None:
        """Return the highest frequency of all terms that name one [Hz]."""
        named = [each for term in self.term if (each := term.highest_frequency()) is not None]
        return max(named, default=None)

    def files(self) -> tuple[Path, ...]:
        """Return the files of all terms."""
        return tuple(file for term in self.term for file in term.files())

    def notes(self) -> tuple[str, ...]:
        """Return the notes of all terms."""
        return tuple(note for term in self.term for note in term.notes())
