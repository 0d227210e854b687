"""The coordinator of a night: hands out runs, stores what they give, and survives what happens."""

from __future__ import annotations

import pickle
import time
from collections import Counter, deque
from collections.abc import Callable, Iterator
from concurrent.futures import FIRST_COMPLETED, Future, wait
from contextlib import suppress
from dataclasses import dataclass, replace
from pathlib import Path

from frontend_sim.replay.estimate import Need, refuse_small_disk
from frontend_sim.replay.executors.base import Executor, WorkerDied
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.runs import PlannedRun, PreparedSet
from frontend_sim.replay.store import RECORDS, Store
from frontend_sim.replay.work import Batch, Job, cached_sha256

TARGET = 0.5
"""How long a batch should take [s]: long beside the cost of handing it out."""
MOST_JOBS = 64
MOST_BYTES = 16 << 20
"""Bytes of records that one batch should return at the most."""
TICK = 0.5
"""How often progress is told [s]."""
MOST_DEATHS = 3
"""Workers that a run may take with it before it is listed as failed."""


@dataclass(frozen=True)
class Progress:
    """How far a night is.

    Parameters
    ----------
    done, total : runs of this call that are done, and that it has to do
    kept : runs that were done before and are kept
    fails, errors : runs of this call of which a check fails, or that gave no result
    rate : runs per second;  left : time that is left [s], None where it is not yet known
    """

    done: int
    total: int
    kept: int
    fails: int
    errors: int
    rate: float
    left: float | None


Report = Callable[[Progress], None]


class Night:
    """Does what is left to do of a set; see ``replay_set``."""

    def __init__(
        self, prepared: PreparedSet, store: Store, executor: Executor, report: Report | None
    ) -> None:
        """Find out what is left to do, by digest and checksum."""
        self._set, self._store, self._executor, self._report = prepared, store, executor, report
        self._done_before, self.kept = pending(prepared, store)
        self.total = prepared.count - self.kept
        self.counts: Counter[str] = Counter()
        self._bases = [
            b"" if base.scenario is None else pickle.dumps(base.scenario) for base in prepared.bases
        ]
        self._seconds, self._bytes = 0.0, 0
        self._suspects: deque[Batch] = deque()
        self._deaths: Counter[str] = Counter()
        self._alone = False
        self._begun = time.monotonic()

    @property
    def done(self) -> int:
        """Runs of this call that are done."""
        return self.counts.total()

    def run(self) -> None:
        """Do all that is left to do.

        Raises
        ------
        OutputError
            If the disk is full, or is going to be.
        """
        coming = self._batches()
        waiting: dict[Future[list[Outcome]], Batch] = {}
        while True:
            while (batch := self._next(coming, len(waiting))) is not None:
                waiting[self._executor.submit(batch)] = batch
            if not waiting:
                break
            finished, _ = wait(waiting, TICK, FIRST_COMPLETED)
            for future in finished:
                self._take(future, waiting.pop(future))
            self._tell()
        self._tell()

    def _next(self, coming: Iterator[Batch], waiting: int) -> Batch | None:
        """Return what is handed out next, None if nothing is at the moment.

        Runs whose worker died go alone, so that it shows which of them did it.
        """
        if self._suspects or (self._alone and waiting):
            self._alone = not waiting or self._alone
            return None if waiting else self._suspects.popleft()
        self._alone = False
        # Before the first run is done, nobody knows whether the disk has room for the others.
        most = 2 * self._executor.workers if self.done else 1
        return next(coming, None) if waiting < most else None

    def _batches(self) -> Iterator[Batch]:
        jobs: list[Job] = []
        base = -1
        for run in self._set.runs(cached_sha256):
            if self._done_before[run.number]:
                continue
            if run.error:
                self._put(failed(run, run.error))
                continue
            if jobs and (run.base != base or len(jobs) >= self._size()):
                yield self._batch(base, jobs)
                jobs = []
            base = run.base
            jobs.append(Job(run.number, run.name, dict(run.values), run.seed, run.recipe))
        if jobs:
            yield self._batch(base, jobs)

    def _batch(self, base: int, jobs: list[Job]) -> Batch:
        return batch_of(self._set, base, self._bases[base], self._store.directory, tuple(jobs))

    def _size(self) -> int:
        """Return how many runs make a batch, from what those before took."""
        if not self.done:
            return 1
        need = self._need()
        by_time = TARGET / max(need.seconds, 1e-6)
        by_size = MOST_BYTES / max(need.size, 1.0)
        fair = self.total / (4 * self._executor.workers)  # all workers have something at the end
        return int(max(1, min(by_time, by_size, fair, MOST_JOBS)))

    def _need(self) -> Need:
        return Need(self._seconds / max(self.done, 1), self._bytes / max(self.done, 1))

    def _take(self, future: Future[list[Outcome]], batch: Batch) -> None:
        try:
            outcomes = future.result()
        except WorkerDied:
            self._lost(batch)
            return
        for outcome in outcomes:
            self._put(outcome)

    def _lost(self, batch: Batch) -> None:
        for job in batch.jobs:
            if self._alone:
                self._deaths[job.name] += self._executor.deaths_per_loss
            if self._deaths[job.name] < MOST_DEATHS:
                self._suspects.append(replace(batch, jobs=(job,)))
                continue
            told = (
                f"the run ended its worker {MOST_DEATHS} times, as a process does that takes more "
                "memory than there is; shorten it, or run it alone: frontend-sim run"
            )
            seed, recipe = job.seed, job.recipe
            self._put(Outcome.failed(job.number, job.name, recipe, seed, told, lasting=False))

    def _put(self, outcome: Outcome) -> None:
        self._bytes += self._store.put(outcome)
        self._seconds += outcome.seconds
        self.counts[outcome.verdict] += 1
        if self.done == 1:
            refuse_small_disk(self._store.directory, self._need(), self.total - 1)

    def _tell(self) -> None:
        if self._report is None:
            return
        passed = max(time.monotonic() - self._begun, 1e-9)
        left = (self.total - self.done) * passed / self.done if self.done else None
        fails, errors = self.counts["fails"], self.counts["error"]
        rate = self.done / passed
        self._report(Progress(self.done, self.total, self.kept, fails, errors, rate, left))


def batch_of(
    prepared: PreparedSet, base: int, pickled: bytes, directory: Path, jobs: tuple[Job, ...]
) -> Batch:
    """Return some runs of one scenario of a set as a worker gets them.

    Parameters
    ----------
    base, pickled : number of the scenario, and the scenario itself
    directory : that the set is replayed into
    """
    scenario = prepared.bases[base].scenario
    files = set(() if scenario is None else scenario.files())
    for job in jobs:
        files |= {Path(job.values[key]) for key in prepared.file_keys & job.values.keys()}
    known = {}
    for file in files:
        with suppress(OSError):  # the run tells
            known[str(file)] = cached_sha256(file)
    return Batch(
        pickled, str(prepared.directory), str((directory / RECORDS).absolute()), prepared.keep,
        jobs, prepared.around, known, prepared.versions,
    )  # fmt: skip


def failed(run: PlannedRun, error: str) -> Outcome:
    """Return the outcome of a run that cannot even be begun."""
    return Outcome.failed(run.number, run.name, run.recipe, run.seed, error, lasting=True)


def pending(prepared: PreparedSet, store: Store) -> tuple[bytearray, int]:
    """Return a flag for each run that is done already, and their number."""
    flags = bytearray(prepared.count)
    for run in prepared.runs(cached_sha256):
        flags[run.number] = store.is_done(run)
    return flags, sum(flags)
