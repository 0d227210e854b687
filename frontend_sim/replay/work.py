"""What a worker does: it runs some runs of a set, and returns what they gave."""

from __future__ import annotations

import pickle
import platform
import time
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from functools import lru_cache, partial
from pathlib import Path
from typing import Any, TypeVar

from frontend_sim.archive.provenance import document, refuse_changed, source_files, versions
from frontend_sim.errors import FrontendSimError, OutputError, RecordingError
from frontend_sim.measure.result import verdict_of
from frontend_sim.replay.outcome import Fingerprint, Outcome
from frontend_sim.replay.set_model import AROUND_FAILURES, Keep
from frontend_sim.replay.subject import Part, Subject, subject_of, together
from frontend_sim.scenario import AnyScenario, ScanScenario, Scenario, check_scenario
from frontend_sim.scenario.digest import sha256_of
from frontend_sim.scenario.vary import with_values
from frontend_sim.simulation.stretches import Stretches


class CannotGoOn(Exception):  # noqa: N818 - it is what happened; the night ends by it, and tells it
    """Where the runs are done, none of them can be: the message says why, and what to do."""


class WrongFileError(RecordingError):
    """A worker has not the recording that the set was read with."""


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
    """Run all runs of a batch; one that fails gives an outcome that says why.

    Runs that differ in the parts of a linear chain take one pass over their recording.

    Raises
    ------
    CannotGoOn
        If this worker has other versions than the coordinator, which may give other numbers.
    """
    _refuse_other_versions(batch.versions)
    ready: list[_Ready | Outcome | None] = []
    for job in batch.jobs:
        begun = time.perf_counter()
        ready.append(_guarded(job, begun, partial(_prepared, job, batch, begun)))
    begun = time.perf_counter()
    together([each.subject for each in ready if isinstance(each, _Ready)])
    share = (time.perf_counter() - begun) / len(batch.jobs)
    done = []
    for place, job in enumerate(batch.jobs):
        prepared, ready[place] = ready[place], None  # a run is forgotten when it is done
        if isinstance(prepared, _Ready):
            begun = time.perf_counter()
            prepared = _guarded(job, begun, partial(_run, job, batch, prepared, share))
        if prepared is not None:
            done.append(prepared)
    return done


@lru_cache(maxsize=8)
def _scenario(pickled: bytes) -> AnyScenario:
    scenario = pickle.loads(pickled)
    assert isinstance(scenario, Scenario | ScanScenario)
    return scenario


def cached_sha256(file: Path) -> str:
    """Return the SHA-256 of a file, read again only where the file was written to since."""
    about = file.stat()
    return _sha256(file, about.st_size, about.st_mtime_ns, about.st_ino)


@lru_cache(maxsize=4096)
def _sha256(file: Path, size: int, modified: int, inode: int) -> str:
    return sha256_of(file)


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


def _guarded(job: Job, begun: float, work: Callable[[], Answer]) -> Answer | Outcome:
    """Do a part of a run; where it fails, return the outcome that says why."""
    lasting, told = True, ""
    try:
        return work()
    except FrontendSimError as error:
        # A worker that has another file, or no room, may have it the next time.
        lasting, told = not isinstance(error, WrongFileError | OutputError), str(error)
    except MemoryError:
        lasting, told = False, "the run does not fit into memory; shorten it, or keep fewer points"
    except Exception as error:  # noqa: BLE001 - one run that fails never stops the night
        lasting, told = False, f"{type(error).__name__}: {error}"
    seconds = time.perf_counter() - begun
    return Outcome.failed(job.number, job.name, job.recipe, job.seed, told, lasting, seconds)


def _prepared(job: Job, batch: Batch, begun: float) -> _Ready:
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
        kept = list(parts) if wanted else _pass(parts)
        if wanted and verdict_of(subject.results()) == "fails":
            part = subject.failures(batch.around) if batch.keep == AROUND_FAILURES else None
            record = _record(job, batch, ready, kept, part)
    results, notes = subject.results(), subject.notes()
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
    record = ready.subject.record(job.name, resolved, parts, part)
    refuse_changed(files)
    return record
