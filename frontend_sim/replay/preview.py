"""What a call of ``replay_set`` would do, without doing it."""

from __future__ import annotations

import os
import pickle
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from frontend_sim.replay.call import default_directory
from frontend_sim.replay.estimate import Need
from frontend_sim.replay.executors import cores
from frontend_sim.replay.night import batch_of, pending
from frontend_sim.replay.reading import read_set
from frontend_sim.replay.runs import PlannedRun, PreparedSet
from frontend_sim.replay.set_model import Keep
from frontend_sim.replay.store import JOURNAL, Store
from frontend_sim.replay.work import Batch, Job, cached_sha256, run_batch

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
    seconds : how long that takes, measured on some of them [s]
    size : bytes on disk that it takes
    """

    directory: Path
    planned: int
    kept: int
    names: tuple[str, ...]
    seconds: float
    size: int


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
    done = bytearray(prepared.count)
    if (place / JOURNAL).is_file():
        with Store(place) as store:
            done, _ = pending(prepared, store)
    left = [run for run in prepared.runs(cached_sha256) if not done[run.number]]
    chosen = sorted({0, len(left) // 2, len(left) - 1}) if left else []
    probes = [left[place] for place in chosen if not left[place].error]
    need = _measured(prepared, probes, place)
    count = len(left)
    seconds = need.time(count, min(workers or cores(), max(count, 1))) + (START if count else 0.0)
    names = tuple(run.name for run in left)
    return Preview(place, prepared.count, prepared.count - count, names, seconds, need.disk(count))


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
    job = Job(run.number, run.name, dict(run.values), run.seed, run.recipe)
    base = pickle.dumps(prepared.bases[run.base].scenario)
    return batch_of(prepared, run.base, base, place, (job,))
