"""What a night gave becomes the file of the set."""

from __future__ import annotations

import hashlib
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

from frontend_sim.archive.provenance import versions
from frontend_sim.archive.set_previous import keep_previous
from frontend_sim.archive.set_writer import SetHead, SetRow, write_set
from frontend_sim.measure.result import Verdict
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.runs import PlannedRun, PreparedSet
from frontend_sim.replay.store import Store
from frontend_sim.replay.work import cached_sha256


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


def done_runs(prepared: PreparedSet, store: Store) -> Iterator[tuple[PlannedRun, Outcome]]:
    """Return every run that was done, with what it gave, in the order of the set."""
    for run in prepared.runs(cached_sha256):
        outcome = store.outcome(run)
        if outcome is not None:
            yield run, outcome


def tally(prepared: PreparedSet, store: Store) -> Tally:
    """Count what became of the runs."""
    counts: Counter[str] = Counter()
    digest = hashlib.sha256()
    for run, outcome in done_runs(prepared, store):
        counts[outcome.verdict] += 1
        digest.update(f"{run.name}\x1f{outcome.digest}\x1f{outcome.outcome}\n".encode())
    return Tally(prepared.count, dict(counts), digest.hexdigest())


def write_table(prepared: PreparedSet, store: Store) -> Tally:
    """Write the file of the set from the journal. Raises OutputError if it cannot be written."""
    found = tally(prepared, store)
    names = [base.name or base.path.stem for base in prepared.bases]

    def rows() -> Iterator[SetRow]:
        for run, outcome in done_runs(prepared, store):
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

    head = SetHead(
        title=prepared.title,
        seed=prepared.seed or 0,
        created=store.created,
        digest=found.digest,
        verdict=found.verdict,
        complete=found.complete,
        planned=found.planned,
        text=prepared.text,
        versions=versions(),
        units=prepared.units,
        bases=tuple(
            (name, base.scenario.source, base.scenario.resolved())
            if base.scenario is not None
            else (name, "", {})
            for name, base in zip(names, prepared.bases, strict=True)
        ),
    )
    keep_previous(store.set_file, found.digest)
    write_set(store.set_file, head, rows)
    return found
