"""The coordinator of a night: hands out runs, stores what they give, and survives what happens."""

from __future__ import annotations

import pickle
import time
from collections import Counter, deque
from collections.abc import Callable, Iterator
from concurrent.futures import FIRST_COMPLETED, Future, wait
from dataclasses import dataclass, replace
from pathlib import Path

from frontend_sim.replay.estimate import Need, refuse_small_disk
from frontend_sim.replay.executors.base import Executor, WorkerDied
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.runs import PlannedRun, PreparedSet
from frontend_sim.replay.store import RECORDS, Store
from frontend_sim.replay.work import MOST_BYTES, Batch, Job

TARGET = 0.5
"""How long a batch should take [s]: long beside the cost of handing it out."""
MOST_JOBS = 64
TICK = 0.5
"""How often progress is told [s]."""
MOST_DEATHS = 3
"""Workers that a run may take with it before it is listed as failed."""
SILENCE = 3.0
"""How long the look at what is done may take before it is told [s]."""


@dataclass(frozen=True)
class Progress:
    """How far a night is.

    Parameters
    ----------
    done, total : runs of this call that are done, and that it has to do as far as is known
    kept : runs that were done before and are kept
    fails, errors : runs of this call of which a check fails, or that gave no result
    rate : runs per second;  left : time that is left [s], None where it is not yet known
    note : what the night waits for, where it does
    """

    done: int
    total: int
    kept: int
    fails: int
    errors: int
    rate: float
    left: float | None
    note: str = ""


Report = Callable[[Progress], None]


class Night:
    """What one call does, of a set, or of one part of it after the other; see ``replay_set``.

    Of each part, ``look`` finds out what is left to do, and ``run`` does it.
    """

    def __init__(self, store: Store, executor: Executor, report: Report | None) -> None:
        """Begin with nothing to do."""
        self._store, self._executor, self._report = store, executor, report
        self.total = self.kept = 0
        self.counts: Counter[str] = Counter()
        self._seconds, self._bytes = 0.0, 0
        self._again: deque[Batch] = deque()
        self._suspects: deque[Batch] = deque()
        self._deaths: Counter[str] = Counter()
        self._alone = False
        self._begun = time.monotonic()

    @property
    def done(self) -> int:
        """Runs of this call that are done."""
        return self.counts.total()

    @property
    def left(self) -> int:
        """Runs that this call still has to do, as far as it looked."""
        return self.total - self.done

    @property
    def _measured(self) -> int:
        """Runs of which it is known what they take; one that failed tells nothing."""
        return self.done - self.counts["error"]

    def look(self, prepared: PreparedSet) -> None:
        """Find out what of a part is left to do, by digest and checksum."""
        told = time.monotonic() + SILENCE
        done = bytearray(prepared.count)
        for run in prepared.runs():
            done[run.number] = self._store.is_done(run)
            if time.monotonic() > told:
                told += TICK
                self._tell("it looks at what is done already")
        self._set, self._done_before = prepared, done
        self.kept += sum(done)
        self.total += len(done) - sum(done)

    def run(self) -> None:
        """Do what is left to do of the part that was looked at.

        Raises
        ------
        OutputError
            If the disk is full, or is going to be.
        CannotGoOn
            If there is nobody who could do it.
        """
        coming = self._batches()
        waiting: dict[Future[list[Outcome]], Batch] = {}
        while True:
            batch = self._next(coming, len(waiting))
            if batch is not None:
                waiting[self._executor.submit(batch)] = batch
            elif not waiting:
                break
            # What is done is stored before more is handed in: a run may take hours.
            patience = TICK if batch is None else 0.0
            finished, _ = wait(waiting, patience, FIRST_COMPLETED)
            for future in finished:
                self._take(future, waiting.pop(future))
            self._tell(self._executor.waits_for())
        self._tell()

    def _next(self, coming: Iterator[Batch], waiting: int) -> Batch | None:
        """Return what is handed out next, None if nothing is at the moment.

        Runs whose worker died go alone, so that it shows which of them did it.
        """
        if self._suspects or (self._alone and waiting):
            self._alone = not waiting or self._alone
            return None if waiting else self._suspects.popleft()
        self._alone = False
        # Before a run is done, nobody knows whether the disk has room for the others.
        most = 2 * self._executor.workers if self.done else 1
        if waiting >= most:
            return None
        return self._again.popleft() if self._again else next(coming, None)

    def _batches(self) -> Iterator[Batch]:
        jobs: list[Job] = []
        prepared, base, pickled = self._set, -1, b""
        fair = self.left / (4 * self._executor.workers)  # all workers have something at the end
        for run in prepared.runs():
            if self._done_before[run.number]:
                continue
            if run.error:
                self._put(failed(run, run.error))
                continue
            if jobs and (run.base != base or len(jobs) >= self._size(fair)):
                yield self._batch(base, pickled, jobs)
                jobs = []
            if run.base != base:
                base, pickled = run.base, pickle.dumps(prepared.bases[run.base].scenario)
            jobs.append(job_of(run))
        if jobs:
            yield self._batch(base, pickled, jobs)

    def _batch(self, base: int, pickled: bytes, jobs: list[Job]) -> Batch:
        return batch_of(self._set, base, pickled, self._store.directory, tuple(jobs))

    def _size(self, fair: float) -> int:
        """Return how many runs make a batch, from what those before took."""
        if not self._measured:
            return 1
        need = self._need()
        by_time = TARGET / max(need.seconds, 1e-6)
        by_size = MOST_BYTES / max(need.size, 1.0)
        return int(max(1, min(by_time, by_size, fair, MOST_JOBS)))

    def _need(self) -> Need:
        return Need(self._seconds / max(self._measured, 1), self._bytes / max(self._measured, 1))

    def _take(self, future: Future[list[Outcome]], batch: Batch) -> None:
        try:
            outcomes = future.result()
        except (WorkerDied, MemoryError):
            self._lost(batch)
            return
        for outcome in outcomes:
            self._put(outcome)
        # Those that a batch did not come to, as it took longer than was foreseen.
        self._again.extend(replace(batch, jobs=(job,)) for job in batch.jobs[len(outcomes) :])

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
        size = self._store.put(outcome)
        self.counts[outcome.verdict] += 1
        if outcome.verdict == "error":
            return
        self._bytes += size
        self._seconds += outcome.seconds
        if self._measured == 1 and self.left:
            refuse_small_disk(self._store.directory, self._need(), self.left)

    def _tell(self, note: str = "") -> None:
        if self._report is None:
            return
        done, passed = self.done, max(time.monotonic() - self._begun, 1e-9)
        left = self.left * passed / done if done else None
        fails, errors = self.counts["fails"], self.counts["error"]
        self._report(
            Progress(done, self.total, self.kept, fails, errors, done / passed, left, note)
        )


def job_of(run: PlannedRun) -> Job:
    """Return a run as a worker gets it."""
    return Job(run.number, run.name, dict(run.values), run.seed, run.recipe)


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
    return Batch(
        pickled, str(prepared.directory), str((directory / RECORDS).absolute()), prepared.keep,
        jobs, prepared.around, prepared.contents.known(files), prepared.versions,
    )  # fmt: skip


def failed(run: PlannedRun, error: str) -> Outcome:
    """Return the outcome of a run that cannot even be begun."""
    return Outcome.failed(run.number, run.name, run.recipe, run.seed, error, lasting=True)
