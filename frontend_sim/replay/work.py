"""What a worker does: it runs some runs of a set, and returns what they gave."""

from __future__ import annotations

import pickle
import platform
import time
from collections import deque
from collections.abc import Callable, Iterable, Mapping
from contextlib import suppress
from dataclasses import dataclass, field
from functools import lru_cache, partial
from pathlib import Path
from typing import Any, TypeVar

from frontend_sim.archive.provenance import document, source_files, versions
from frontend_sim.archive.room import refuse_beyond_memory
from frontend_sim.errors import FrontendSimError, OutputError, RecordingError
from frontend_sim.measure.result import verdict_of
from frontend_sim.replay.contents import cached_sha256
from frontend_sim.replay.outcome import Fingerprint, Outcome
from frontend_sim.replay.set_model import AROUND_FAILURES, Keep
from frontend_sim.replay.subject import Part, Subject, subject_of, together
from frontend_sim.scenario import AnyScenario, ScanScenario, Scenario, check_scenario
from frontend_sim.scenario.vary import with_values
from frontend_sim.simulation.stretches import Stretches

MOST_BYTES = 16 << 20
"""Bytes of records that a batch returns, about."""
LONGEST = 5.0
"""How long a batch may take before it returns what it has [s]; a kill costs that much of it."""


class CannotGoOn(Exception):  # noqa: N818 - it is what happened; the night ends by it, and tells it
    """Where the runs are done, none of them can be: the message says why, and what to do."""


class WrongFileError(RecordingError):
    """A worker has not, or not any more, the recording that the set was read with."""


@dataclass(frozen=True)
class Job:
    """One run that a worker is to do; names as in ``PlannedRun``."""

    number: int
    name: str
    values: Mapping[str, Any]
    seed: int
    recipe: str


@dataclass(frozen=True)
class Batch:
    """Some runs of one scenario, done one after the other by one worker.

    Parameters
    ----------
    base : the scenario, pickled: a worker opens the same one only once
    directory : what files in values are relative to
    records : directory of the records; a record tells where its recording is as seen from there
    keep : of which runs the record is returned
    jobs : the runs
    around : how long before and behind a failure is kept [s]; None for some conversions
    files : recordings by the path that scenarios have, with the SHA-256 that the set was read with
    versions : of everything that the numbers depend on, where the set was read
    """

    base: bytes
    directory: str
    records: str
    keep: Keep
    jobs: tuple[Job, ...]
    around: float | None = None
    files: Mapping[str, str] = field(default_factory=dict)
    versions: Mapping[str, str] = field(default_factory=dict)


def run_batch(batch: Batch) -> list[Outcome]:
    """Run the runs of a batch; one that fails gives an outcome that says why.

    Runs that differ in the parts of a linear chain take one pass over their recording. A batch
    that turns out long or large ends early: the outcomes are those of its first runs then.

    Raises
    ------
    CannotGoOn
        If this worker has other versions than the coordinator, which may give other numbers.
    """
    _refuse_other_versions(batch.versions)
    begun = time.perf_counter()
    ready = deque(_guarded(job, partial(_prepared, job, batch)) for job in batch.jobs)
    passing = time.perf_counter()
    with suppress(Exception):  # what is wrong each run meets by itself, and tells
        together([each.subject for each in ready if isinstance(each, _Ready)])
    through = time.perf_counter()
    share = (through - passing) / max(len(batch.jobs), 1)
    # What was prepared for all of them is worth as much time as it took.
    longest = max(LONGEST, through - begun)
    done: list[Outcome] = []
    size = 0
    for job in batch.jobs:
        prepared = ready.popleft()  # a run is forgotten when it is done
        if isinstance(prepared, _Ready):
            prepared = _guarded(job, partial(_run, job, batch, prepared, share))
        done.append(prepared)
        size += len(prepared.record or b"")
        if size > MOST_BYTES or time.perf_counter() - through > longest:
            break
    return done


@lru_cache(maxsize=8)
def _scenario(pickled: bytes) -> AnyScenario:
    scenario = pickle.loads(pickled)
    assert isinstance(scenario, Scenario | ScanScenario)
    return scenario


@dataclass(frozen=True, eq=False)
class _Ready:
    """A run that is prepared.

    Parameters
    ----------
    seconds : that the preparation took
    """

    scenario: AnyScenario
    subject: Subject
    seconds: float


Answer = TypeVar("Answer")


def _guarded(job: Job, work: Callable[[], Answer]) -> Answer | Outcome:
    """Do a part of a run; where it fails, return the outcome that says why."""
    begun = time.perf_counter()
    try:
        return work()
    except FrontendSimError as error:
        lasting, told = not _accident(error), str(error)
    except MemoryError:
        lasting, told = False, "the run does not fit into memory; shorten it, or keep fewer points"
    except Exception as error:  # noqa: BLE001 - one run that fails never stops the night
        lasting, told = False, f"{type(error).__name__}: {error}"
    seconds = time.perf_counter() - begun
    return Outcome.failed(job.number, job.name, job.recipe, job.seed, told, lasting, seconds)


def _accident(error: BaseException | None) -> bool:
    """Return whether a run may succeed the next time: for want of a file, of room, of a disk."""
    while error is not None:
        if isinstance(error, WrongFileError | OutputError | OSError):
            return True
        error = error.__context__
    return False


def _prepared(job: Job, batch: Batch) -> _Ready:
    begun = time.perf_counter()
    base = _scenario(batch.base)
    changes = dict(job.values)
    if job.seed != base.seed:
        changes["seed"] = job.seed
    scenario = with_values(base, changes, batch.directory)
    _refuse_other_files(scenario, batch.files)
    check_scenario(scenario)
    subject = subject_of(scenario)
    return _Ready(scenario, subject, time.perf_counter() - begun)


def _run(job: Job, batch: Batch, ready: _Ready, share: float) -> Outcome:
    begun = time.perf_counter()
    subject, scenario, fingerprint = ready.subject, ready.scenario, Fingerprint()
    parts = fingerprint.watching(subject.parts())
    record = None
    if batch.keep == "all":
        record = _record(job, batch, ready, parts)
    else:
        wanted = batch.keep != "nothing"
        if wanted:
            refuse_beyond_memory(subject.room())
        kept = list(parts) if wanted else _pass(parts)
        if wanted and verdict_of(subject.results()) == "fails":
            part = subject.failures(batch.around) if batch.keep == AROUND_FAILURES else None
            record = _record(job, batch, ready, kept, part)
    results, notes = subject.results(), subject.notes()
    _refuse_other_files(scenario, batch.files)  # nor may it have changed on the way
    return Outcome(
        number=job.number,
        name=job.name,
        recipe=job.recipe,
        digest=scenario.digest(cached_sha256),
        outcome=fingerprint.digest(results, notes),
        seed=job.seed,
        verdict=verdict_of(results),
        results=results,
        notes=notes,
        seconds=ready.seconds + share + time.perf_counter() - begun,
        record=record,
    )


def _refuse_other_versions(wanted: Mapping[str, str]) -> None:
    here = versions()
    for name, version in wanted.items():
        if here.get(name) != version:
            raise CannotGoOn(
                f"the worker on {platform.node()} has {name} {here.get(name)}, and the set was "
                f"read with {version}; install the same versions on all workers"
            )


def _refuse_other_files(scenario: AnyScenario, wanted: Mapping[str, str]) -> None:
    """Raise WrongFileError where a recording is not the one that the set was read with."""
    for file in scenario.files():
        digest = wanted.get(str(file))
        if digest is None:
            continue
        if not file.is_file():
            raise WrongFileError(
                f"{file} is not there on {platform.node()}, whose worker had this run; every "
                "worker needs the recordings at the paths at which the set was read"
            )
        if cached_sha256(file) != digest:
            raise WrongFileError(
                f"{file} on {platform.node()}, whose worker had this run, has another content than "
                "when the set was read; give every worker the same recordings"
            )


def _pass(parts: Iterable[Part]) -> list[Part]:
    """Let a run pass, and keep nothing of it."""
    for _ in parts:
        pass
    return []


def _record(
    job: Job, batch: Batch, ready: _Ready, parts: Iterable[Part], part: Stretches | None = None
) -> bytes:
    """Return the record of a run, made in memory: a worker that is killed leaves nothing behind."""
    files = source_files(ready.scenario, cached_sha256)
    resolved = document(ready.scenario, files, Path(batch.records), cached_sha256)
    return ready.subject.record(job.name, resolved, parts, part)
