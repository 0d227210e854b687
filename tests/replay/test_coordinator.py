"""What the coordinator of a night does when it does not go as it should."""

from __future__ import annotations

import errno
import os
import pickle
from collections.abc import Callable, Sequence
from concurrent.futures import Future
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from nights import BASE, DRAWS, RECORDED, base, made_set

from frontend_sim.archive.set_table import open_set
from frontend_sim.errors import RecordingError
from frontend_sim.replay import Progress, Replayed, default_directory, night, replay_set, work
from frontend_sim.replay import read_set as read
from frontend_sim.replay.executors import processes
from frontend_sim.replay.executors.in_process import InProcess
from frontend_sim.replay.night import Night
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.store import LOCK, Store
from frontend_sim.replay.work import Batch, run_batch
from frontend_sim.summary import summarize

GAINS = 'keep = "all"\n[[vary]]\nkey = "chain[2].gain"\nvalues = [{}]\n'


def here(
    source: Path, directory: Path, report: Callable[[Progress], None] | None = None
) -> Replayed:
    """Replay in this process."""
    return replay_set(source, directory, on="in-process", report=report)


def interrupt(progress: Progress) -> None:
    """Stop a night as soon as it tells anything."""
    raise KeyboardInterrupt


def test_damaged_records_are_left_until_they_are_made_again(tmp_path: Path) -> None:
    """A call that is stopped among them tells how many are left, and its table lacks them."""
    file, place = made_set(tmp_path, GAINS.format("1, 1.5, 2")), tmp_path / "night"
    whole = here(file, place)
    for record in (place / "records").iterdir():
        record.write_bytes(b"damaged")
    stopped = here(file, place, interrupt)
    assert (stopped.ran, stopped.left, stopped.tally.done) == (1, 2, 1)
    assert not stopped.complete
    table = open_set(place)
    assert table.names == ("gain=1",)
    assert not table.complete
    again = here(file, place)
    assert (again.ran, again.kept, again.left, again.digest) == (2, 1, 0, whole.digest)


def test_a_long_look_at_what_is_done_is_told_and_may_be_stopped(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Nobody knows then what is left, and the table stays as it is."""
    file, place = made_set(tmp_path, GAINS.format("1, 2")), tmp_path / "night"
    here(file, place)
    monkeypatch.setattr(night, "SILENCE", 0.0)
    notes: list[str] = []
    here(file, place, lambda progress: notes.append(progress.note))
    assert notes[0] == "it looks at what is done already"
    assert notes[-1] == ""
    before = (place / "set.h5").read_bytes()
    stopped = here(file, place, interrupt)
    assert (stopped.interrupted, stopped.left, stopped.tabled) == (True, None, False)
    assert (place / "set.h5").read_bytes() == before


class Watched(InProcess):
    """Works in this process as if it had several workers, and tells what it gets."""

    workers = 3

    def __init__(self, look: Callable[[Batch], None]) -> None:
        self.look = look

    def submit(self, batch: Batch) -> Future[list[Outcome]]:
        self.look(batch)
        return super().submit(batch)


def done_by(file: Path, store: Store, look: Callable[[Batch], None]) -> Night:
    """Do a whole set by an executor that is watched."""
    found = Night(store, Watched(look), None)
    found.look(read(file))
    found.run()
    return found


def test_what_is_done_is_stored_before_more_is_handed_in(tmp_path: Path) -> None:
    """A run may take hours, which the end of the process must not cost."""
    file = made_set(tmp_path, DRAWS.format(6))
    with Store(tmp_path / "night") as store:
        names: list[str] = []

        def look(batch: Batch) -> None:
            told = [entry["name"] for _, entry in store.journal.entries() if "name" in entry]
            assert told == names
            names.extend(job.name for job in batch.jobs)

        assert done_by(file, store, look).done == 6


def test_a_run_that_cannot_begin_tells_nothing_of_the_time_of_others(tmp_path: Path) -> None:
    """The first batch has one run, whatever was listed as failed before."""
    base(tmp_path, BASE.replace('rate = "20 kHz"', 'rate = "20 kV"'), "a.toml")
    base(tmp_path, BASE, "b.toml")
    sizes: list[int] = []
    text = 'scenarios = "?.toml"\nkeep = "nothing"\n[draws]\ncount = 30\n'
    file = made_set(tmp_path, text)
    with Store(tmp_path / "night") as store:
        found = done_by(file, store, lambda batch: sizes.append(len(batch.jobs)))
    assert found.counts["error"] == 1
    assert found.done == 31
    assert sizes[0] == 1


@pytest.mark.parametrize("limit", ["LONGEST", "MOST_BYTES"])
def test_a_batch_that_turns_out_long_or_large_ends_early(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, limit: str
) -> None:
    """It returns what it has, and the others are done like any: the same digest, none twice."""
    file = made_set(tmp_path, DRAWS.format(8).replace("nothing", "all"))
    whole = here(file, tmp_path / "whole")
    monkeypatch.setattr(work, limit, 0)
    monkeypatch.setattr(work, "together", lambda subjects: None)
    prepared = read(file)
    jobs = tuple(map(night.job_of, prepared.runs()))
    pickled = pickle.dumps(prepared.bases[0].scenario)
    batch = night.batch_of(prepared, 0, pickled, tmp_path, jobs)
    some = run_batch(batch)
    assert 1 <= len(some) < 8
    assert [outcome.name for outcome in some] == [job.name for job in jobs[: len(some)]]
    done = here(file, tmp_path / "night")
    assert (done.ran, done.digest) == (8, whole.digest)


def test_runs_that_cannot_go_side_by_side_are_done_one_by_one(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """No memory for all of them at once ends no night."""
    file = made_set(tmp_path, DRAWS.format(12))
    whole = here(file, tmp_path / "whole")

    def full(subjects: Sequence[Any]) -> None:
        raise MemoryError

    monkeypatch.setattr(work, "together", full)
    assert here(file, tmp_path / "night").digest == whole.digest


def test_a_recording_that_could_not_be_read_is_tried_again(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A disk in the network that was away for a moment costs one night, not all that follow."""
    file = made_set(tmp_path, DRAWS.format(2))
    whole = work.subject_of

    def away(scenario: Any) -> Any:
        try:
            raise OSError(errno.EIO, os.strerror(errno.EIO))
        except OSError:
            raise RecordingError("recorded.csv: cannot be read: Input/output error") from None

    monkeypatch.setattr(work, "subject_of", away)
    assert here(file, tmp_path / "night").tally.counts == {"error": 2}
    monkeypatch.setattr(work, "subject_of", whole)
    again = here(file, tmp_path / "night")
    assert (again.ran, again.complete) == (2, True)


@pytest.mark.parametrize("gone", [False, True])
def test_a_recording_that_changes_during_the_night_is_told(tmp_path: Path, gone: bool) -> None:
    """What is left fails with the reason; the next call takes the recording as it is then."""
    recording = tmp_path / "recorded.csv"
    np.savetxt(recording, np.linspace(0.0, 1.0, 500), header="v", comments="")
    file = made_set(tmp_path, DRAWS.format(5), scenario=RECORDED)

    def change(progress: Progress) -> None:
        if gone:
            recording.unlink(missing_ok=True)
        else:
            recording.write_text("v\n" + "2\n" * 500)

    done = here(file, tmp_path / "night", change)
    table = done.table()
    assert done.tally.counts == {"none": 1, "error": 4}
    reason = "is not there" if gone else "has another content than when the set was read"
    assert all(reason in error for error in table.texts("error")[1:])
    recording.write_text("v\n" + "2\n" * 500)
    again = here(file, tmp_path / "night")
    assert (again.ran, again.complete) == (5, True)


@pytest.mark.parametrize("gone", [False, True])
def test_measured_values_that_change_during_the_night_change_the_next_one(
    tmp_path: Path, gone: bool
) -> None:
    """A night draws from its table as it was when the set was read, to its end."""
    rule = '[[draws.part]]\nkey = "chain[1].resistance"\nfile = "lot.csv"\ncolumn = "r"\n'
    file, table = made_set(tmp_path, DRAWS.format(4) + rule), tmp_path / "lot.csv"
    table.write_text("r\n9900\n10100\n10200\n")
    whole = here(file, tmp_path / "whole")

    def change(progress: Progress) -> None:
        if gone:
            table.unlink(missing_ok=True)
        else:
            table.write_text("r\n9000\n9100\n9200\n")

    done = here(file, tmp_path / "night", change)
    assert (done.complete, done.digest) == (True, whole.digest)
    table.write_text("r\n9000\n9100\n9200\n")
    assert here(file, tmp_path / "night").ran == 4


def test_a_block_of_draws_looks_at_its_own_draws_alone(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Every draw is looked at once, and one that had an accident is left to the next call."""
    rules = '[draws.until]\nyield = "25 %"\nblock = 40\n'
    file = made_set(tmp_path, DRAWS.format(2000) + rules)
    looked: list[str] = []
    is_done = Store.is_done

    def watched(store: Store, run: Any) -> bool:
        looked.append(run.name)
        return is_done(store, run)

    monkeypatch.setattr(Store, "is_done", watched)
    tried: list[int] = []
    whole = work.subject_of

    def unlucky(scenario: Any) -> Any:
        tried.append(scenario.seed)
        if scenario.seed == tried[0]:
            raise MemoryError
        return whole(scenario)

    monkeypatch.setattr(work, "subject_of", unlucky)
    done = here(file, tmp_path / "night")
    assert done.tally.planned >= 80
    assert looked == list(done.table().names)
    assert tried.count(tried[0]) == 1
    assert (done.ran, done.kept, done.tally.counts["error"]) == (done.tally.planned, 0, 1)


def test_a_night_of_blocks_that_is_stopped_does_not_know_what_is_left(tmp_path: Path) -> None:
    """How many more draws are needed shows when these are done; its table is not complete."""
    rules = '[draws.until]\nyield = "25 %"\nblock = 40\n'
    file = made_set(tmp_path, DRAWS.format(2000) + rules)

    def stop(progress: Progress) -> None:
        if progress.done == 40:
            raise KeyboardInterrupt

    stopped = here(file, tmp_path / "night", stop)
    assert (stopped.ran, stopped.left, stopped.complete) == (40, None, False)
    table = open_set(tmp_path / "night")
    assert not table.complete
    summary = summarize(table)
    assert summary.status == 3
    assert "stopped before it knew whether this is all" in summary.warnings[0]


def test_workers_that_cannot_be_replaced_end_the_night(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """It is no wrong input: what was done is in the table, and the next call goes on."""
    file = made_set(tmp_path, DRAWS.format(3))

    class Full:
        def __init__(self, *_: object) -> None:
            pass

        def submit(self, *_: object) -> None:
            raise OSError(errno.ENOMEM, os.strerror(errno.ENOMEM))

        def shutdown(self, **_: object) -> None:
            pass

    monkeypatch.setattr(processes, "ProcessPoolExecutor", Full)
    done = replay_set(file, tmp_path / "night", workers=1)
    assert "workers cannot be started: Cannot allocate memory; take fewer" in done.stopped
    assert (done.complete, done.left, done.tabled) == (False, 3, True)


def test_a_call_that_was_killed_at_its_beginning_is_no_obstacle(tmp_path: Path) -> None:
    """Nor does one that was killed while it wrote its table leave anything for ever."""
    (tmp_path / "night").mkdir()
    (tmp_path / "night" / LOCK).touch()
    with Store(tmp_path / "night"):
        pass
    (tmp_path / "night" / ".frontend-sim-0123.partial").touch()
    (tmp_path / "night" / "records" / ".0123.partial").touch()
    with Store(tmp_path / "night"):
        assert not list((tmp_path / "night").rglob("*.partial"))


@pytest.mark.parametrize(
    ("source", "name"),
    [
        ("pump.toml", "pump_runs"),
        ("night/*.toml", "night_runs"),
        ("night/pump_*.toml", "pump__runs"),
        ("night", "night_runs"),
        (["night/a.toml", "night/b.toml"], "a_runs"),
    ],
)
def test_a_night_goes_into_a_directory_called_after_it(source: Any, name: str) -> None:
    """Patterns in two folders are two nights."""
    assert default_directory(source) == Path(name)
