"""What a night gave becomes the file of the set."""

from __future__ import annotations

import hashlib
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

from frontend_sim.archive.provenance import versions
from frontend_sim.archive.set_previous import keep_previous
from frontend_sim.archive.set_writer import SetHead, SetRow, Shape, write_set
from frontend_sim.errors import OutputError
from frontend_sim.measure.result import Verdict
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.runs import PlannedRun, PreparedSet
from frontend_sim.replay.store import Store

Done = Iterator[tuple[PlannedRun, Outcome]]
"""Runs that were done, with what they gave, in the order of the set."""


@dataclass(frozen=True)
class Tally:
    """What became of the runs of a set.

    Parameters
    ----------
    planned : runs of the set
    counts : verdict of a run -> how many
    digest : of all names, scenarios and outcomes; the same however the set was run
    """

    planned: int
    counts: dict[str, int]
    digest: str

    @property
    def done(self) -> int:
        """Runs that were done, with or without a result."""
        return sum(self.counts.values())

    @property
    def complete(self) -> bool:
        """Whether every run gave a result."""
        return self.done == self.planned and not self.counts.get("error")

    @property
    def verdict(self) -> Verdict:
        """ "fails" if a check fails in one run; "holds" if all hold, "none" if there are none."""
        if self.counts.get("fails"):
            return "fails"
        return "holds" if self.counts.get("holds") else "none"


class Count:
    """Counts runs as they go by."""

    def __init__(self) -> None:
        """Begin with none."""
        self._counts: Counter[str] = Counter()
        self._digest = hashlib.sha256()

    def watching(self, done: Done) -> Done:
        """Hand on runs, and count each of them in."""
        for run, outcome in done:
            self._counts[outcome.verdict] += 1
            told = f"{run.name}\x1f{outcome.digest}\x1f{outcome.outcome}\n"
            self._digest.update(told.encode())
            yield run, outcome

    def tally(self, planned: int) -> Tally:
        """Return what became of so many runs."""
        return Tally(planned, dict(self._counts), self._digest.hexdigest())


def done_runs(prepared: PreparedSet, store: Store) -> Done:
    """Return every run that was done, with what it gave, in the order of the set."""
    for run in prepared.runs():
        outcome = store.outcome(run)
        if outcome is not None:
            yield run, outcome


def write_table(prepared: PreparedSet, store: Store, ended: bool) -> tuple[Tally, str]:
    """Write the file of the set from the journal.

    Parameters
    ----------
    ended : whether the call that did the runs came to its end

    Returns what became of the runs, and why the file could not be written, "" where it could: a
    disk that is full leaves the one that was there.
    """
    count = Count()
    shape = Shape.of(
        _rows(prepared, store, count.watching(done_runs(prepared, store))), prepared.units
    )
    found = count.tally(prepared.count)
    head = SetHead(
        title=prepared.title,
        seed=prepared.seed or 0,
        created=store.created,
        digest=found.digest,
        verdict=found.verdict,
        complete=found.complete and ended,
        planned=found.planned,
        text=prepared.text,
        versions=versions(),
        bases=tuple(
            (name, base.scenario.source, base.scenario.resolved())
            if base.scenario is not None
            else (name, "", {})
            for name, base in zip(_names(prepared), prepared.bases, strict=True)
        ),
    )
    try:
        keep_previous(store.set_file, found.digest)
        write_set(store.set_file, head, shape, _rows(prepared, store, done_runs(prepared, store)))
    except OutputError as error:
        return found, str(error)
    return found, ""


def _names(prepared: PreparedSet) -> list[str]:
    return [base.name or base.path.stem for base in prepared.bases]


def _rows(prepared: PreparedSet, store: Store, done: Done) -> Iterator[SetRow]:
    """Return the rows of the table."""
    names = _names(prepared)
    for run, outcome in done:
        told = {
            "name": run.name,
            "base": names[run.base],
            "verdict": outcome.verdict,
            "error": outcome.error,
            "advice": outcome.advice,
            "record": store.record_name(run),
            "digest": outcome.digest,
            "outcome": outcome.outcome,
            "seed": run.seed,
            "seconds": outcome.seconds,
        }
        yield SetRow(told, run.parameters(), outcome.results)
