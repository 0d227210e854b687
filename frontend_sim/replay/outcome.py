"""What one run of a set gave, and the digest that tells it from any other."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, fields
from operator import attrgetter
from typing import Any, Literal, Self

import numpy as np

from frontend_sim.measure.result import Result
from frontend_sim.simulation import RunBlock

NOT_COUNTED = ("start", "time", "voltage", "waveform_time", "waveform")
"""Fields of a block that its digest need not see: the values of waveforms are counted by name, and
the others follow from the scenario and the codes."""

row_of = attrgetter(*(field.name for field in fields(Result)))
"""Return the values of a result."""

RunVerdict = Literal["holds", "fails", "none", "error"]


@dataclass(frozen=True, eq=False)
class Outcome:
    """What one run gave.

    Parameters
    ----------
    number, name, recipe, seed : as in ``PlannedRun``
    digest : of its scenario
    outcome : digest of its conversions, waveforms, results and notes, see ``Fingerprint``
    verdict : "error" where there is no result
    results : measures and checks
    notes : what was decided during the run
    seconds : that it took
    error : why it gave no result
    lasting : whether an error would come again; others are tried again by the next call
    record : its HDF5 file, None where none is kept
    """

    number: int
    name: str
    recipe: str
    digest: str
    outcome: str
    seed: int
    verdict: RunVerdict
    results: tuple[Result, ...] = ()
    notes: tuple[str, ...] = ()
    seconds: float = 0.0
    error: str = ""
    lasting: bool = True
    record: bytes | None = None

    @classmethod
    def failed(
        cls, number: int, name: str, recipe: str, seed: int, error: str, lasting: bool,
        seconds: float = 0.0,
    ) -> Self:  # fmt: skip
        """Return the outcome of a run that gave no result."""
        outcome = hashlib.sha256(error.encode()).hexdigest()
        return cls(
            number, name, recipe, "", outcome, seed, "error",
            seconds=seconds, error=error, lasting=lasting,
        )  # fmt: skip

    @property
    def advice(self) -> str:
        """What to change first, of the first check that fails."""
        return next((result.advice for result in self.results if result.verdict == "fails"), "")

    def entry(self) -> dict[str, Any]:
        """Return everything but the record as data for JSON."""
        skipped = ("number", "record", "results")
        told = {
            field.name: getattr(self, field.name)
            for field in fields(self)
            if field.name not in skipped
        }
        return {**told, "results": list(map(row_of, self.results))}

    @classmethod
    def of_entry(cls, entry: dict[str, Any], number: int) -> Self:
        """Return the outcome of an entry again, without its record."""
        known = {field.name for field in fields(cls)}
        values = {key: value for key, value in entry.items() if key in known}
        values["results"] = tuple(Result(*row) for row in entry["results"])
        values["notes"] = tuple(entry["notes"])
        return cls(number=number, **values)


class Fingerprint:
    """The digest of a run, taken block by block; blocks may be cut anywhere.

    What follows from the scenario alone, as instants do, or from it and the codes, as what is read
    back from them, is not counted: the digest of the scenario stands beside this one.
    """

    _FIELDS = tuple(each.name for each in fields(RunBlock) if each.name not in NOT_COUNTED)

    def __init__(self) -> None:
        """Begin with nothing."""
        self._sums: dict[str, Any] = {}

    def watching(self, parts: Iterable[tuple[str, RunBlock]]) -> Iterator[tuple[str, RunBlock]]:
        """Hand on the parts of a run, and count each of them in."""
        for channel, block in parts:
            self.add(channel, block)
            yield channel, block

    def add(self, channel: str, block: RunBlock) -> None:
        """Count one block of a channel in; the name of the only channel is ""."""
        for name in self._FIELDS:
            self._count(f"{channel}/{name}", getattr(block, name))
        for point, values in block.waveform.items():
            self._count(f"{channel}/waveform/{point}", values)

    def _count(self, name: str, values: Any) -> None:
        self._sums.setdefault(name, hashlib.sha256()).update(np.ascontiguousarray(values).data)

    def digest(self, results: Sequence[Result], notes: Sequence[str]) -> str:
        """Return the SHA-256 of everything that was counted in, results and notes."""
        told = [
            {name: value.hexdigest() for name, value in self._sums.items()},
            list(map(row_of, results)),
            list(notes),
        ]
        text = json.dumps(told, sort_keys=True, separators=(",", ":"))
        return hashlib.sha256(text.encode()).hexdigest()
