"""What a call of ``replay_set`` would do, without doing it."""

from __future__ import annotations

import os
import pickle
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from frontend_sim.archive.room import free_bytes
from frontend_sim.replay.adaptive import until_of
from frontend_sim.replay.call import default_directory
from frontend_sim.replay.estimate import Need
from frontend_sim.replay.executors import cores
from frontend_sim.replay.night import batch_of, job_of
from frontend_sim.replay.reading import read_set
from frontend_sim.replay.runs import PlannedRun, PreparedSet
from frontend_sim.replay.set_model import Keep
from frontend_sim.replay.store import JOURNAL, Store
from frontend_sim.replay.work import Batch, run_batch

PROBES = 3
"""Runs that are tried: of those to be done, the first, the last, and one between."""
START = 3.0
"""How long workers take to start, about [s]."""

AnyPath = str | os.PathLike[str]


@dataclass(frozen=True)
class Preview:
    """What a call of ``replay_set`` would do.

    Parameters
    ----------
    directory : where it would go
    planned : runs of the set;  kept : of these, done already
    names : runs that would be done, in their order
    at_most : whether fewer may be enough, as draws go on until they are tight
    seconds : how long that takes, measured on some of them [s]
    size : bytes on disk that it takes
    """

    directory: Path
    planned: int
    kept: int
    names: tuple[str, ...]
    seconds: float
    size: int
    at_most: bool = False

    @property
    def free(self) -> int:
        """Bytes that the disk has left there."""
        return free_bytes(self.directory)


def preview_set(
    source: AnyPath | Sequence[AnyPath],
    directory: AnyPath | None = None,
    *,
    workers: int | None = None,
    keep: Keep | None = None,
    around: float | None = None,
) -> Preview:
    """Tell what ``replay_set`` would do, from a trial of a few runs; nothing is written.

    Raises InputError if the set is wrong.
    """
    prepared = read_set(source, keep, around)
    place = Path(directory) if directory is not None else default_directory(source)
    left = _left(prepared, place)
    count = len(left)
    chosen = {left[at] for at in (0, count // 2, count - 1)} if left else set()
    numbers, names, probes = set(left), [], []
    for run in prepared.runs():
        if run.number in numbers:
            names.append(run.name)
        if run.number in chosen and not run.error:
            probes.append(run)
    need = _measured(prepared, probes, place)
    seconds = need.time(count, min(workers or cores(), max(count, 1))) + (START if count else 0.0)
    return Preview(
        place, prepared.count, prepared.count - count, tuple(names), seconds, need.disk(count),
        until_of(prepared) is not None,
    )  # fmt: skip


def _left(prepared: PreparedSet, place: Path) -> list[int]:
    """Return the numbers of the runs that are left to do."""
    if not (place / JOURNAL).is_file():
        return list(range(prepared.count))
    with Store(place) as store:
        return [run.number for run in prepared.runs() if not store.is_done(run)]


def _measured(prepared: PreparedSet, probes: list[PlannedRun], place: Path) -> Need:
    if not probes:
        return Need(0.0, 0.0)
    seconds, size = 0.0, 0
    for number, run in enumerate(probes):
        batch = _batch(prepared, run, place)
        if number == 0:
            run_batch(batch)  # loads and compiles what the others find ready
        (outcome,) = run_batch(batch)
        seconds += outcome.seconds
        size += len(outcome.record or b"") + len(repr(outcome.entry()))
    return Need(seconds / len(probes), size / len(probes))


def _batch(prepared: PreparedSet, run: PlannedRun, place: Path) -> Batch:
    base = pickle.dumps(prepared.bases[run.base].scenario)
    return batch_of(prepared, run.base, base, place, (job_of(run),))
