"""What a worker does: it runs some runs of a set, and returns what they gave."""

from __future__ import annotations

import pickle
import tempfile
import time
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from functools import lru_cache, partial
from pathlib import Path
from typing import Any, TypeVar

from frontend_sim.archive.provenance import document, refuse_changed, source_files
from frontend_sim.errors import FrontendSimError, OutputError
from frontend_sim.measure.result import verdict_of
from frontend_sim.replay.outcome import Fingerprint, Outcome
from frontend_sim.replay.set_model import Keep
from frontend_sim.replay.subject import Part, Subject, subject_of, together
from frontend_sim.scenario import AnyScenario, ScanScenario, Scenario, check_scenario
from frontend_sim.scenario.model import sha256_of
from frontend_sim.scenario.vary import with_values


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
    """

    base: bytes
    directory: str
    records: str
    keep: Keep
    jobs: tuple[Job, ...]


def run_batch(batch: Batch) -> list[Outcome]:
    """Run all runs of a batch; one that fails gives an outcome that says why.

    Runs that differ in the parts of a linear chain take one pass over their recording.
    """
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
        # A worker's own disk may be full; that will not last.
        lasting, told = not isinstance(error, OutputError), str(error)
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
    check_scenario(scenario)
    subject = subject_of(scenario)
    return _Ready(scenario, subject, time.perf_counter() - begun)


def _run(job: Job, batch: Batch, ready: _Ready, share: float) -> Outcome:
    begun = time.perf_counter()
    subject, scenario, fingerprint = ready.subject, ready.scenario, Fingerprint()
    parts = fingerprint.watching(subject.parts())
    record = None
    if batch.keep == "all":
        record = _record(subject, parts, scenario, batch)
    else:
        kept = list(parts) if batch.keep == "failures" else _pass(parts)
        if batch.keep == "failures" and verdict_of(subject.results()) == "fails":
            record = _record(subject, kept, scenario, batch)
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


def _pass(parts: Iterable[Part]) -> list[Part]:
    """Let a run pass, and keep nothing of it."""
    for _ in parts:
        pass
    return []


def _record(subject: Subject, parts: Iterable[Part], scenario: AnyScenario, batch: Batch) -> bytes:
    """Return the record of a run; while it goes on it lies in a temporary folder."""
    files = source_files(scenario, cached_sha256)
    resolved = document(scenario, files, Path(batch.records), cached_sha256)
    with tempfile.TemporaryDirectory(prefix="frontend-sim-") as folder:
        file = Path(folder, "record.h5")
        subject.write(file, file, resolved, parts)
        refuse_changed(files)
        return file.read_bytes()
