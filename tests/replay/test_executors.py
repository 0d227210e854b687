"""Executors: the same records from all of them, and no run lost with a worker."""

from __future__ import annotations

import errno
import multiprocessing
import os
import signal
import subprocess
import sys
import time
from collections.abc import Sequence
from concurrent.futures import Future
from pathlib import Path

import numpy as np
import pytest
from nights import DRAWS, RECORDED, made_set

from frontend_sim import Simulation
from frontend_sim.archive import open_record
from frontend_sim.errors import ScenarioError
from frontend_sim.replay import Progress, Replayed, night, read_set, replay_set, subject
from frontend_sim.replay.executors import executor, processes
from frontend_sim.replay.executors.base import WorkerDied
from frontend_sim.replay.executors.processes import Processes
from frontend_sim.replay.night import Night
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.store import Store
from frontend_sim.replay.work import Batch, run_batch
from frontend_sim.simulation.together import together

RUNS = 12


@pytest.fixture(scope="module")
def reference(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, Replayed]:
    """A set, replayed in this process with every record kept."""
    folder = tmp_path_factory.mktemp("reference")
    file = made_set(folder, DRAWS.format(RUNS).replace("nothing", "all"))
    return file, replay_set(file, folder / "night", on="in-process")


def same_records(first: Replayed, second: Replayed) -> None:
    """Compare tables and records of two nights, column by column and array by array."""
    tables = first.table(), second.table()
    assert first.digest == second.digest
    for column in tables[0].columns:
        if column.name != "seconds":
            values = [table.runs[column.name] for table in tables]
            assert values[0].tobytes() == values[1].tobytes(), column.name
    for name in tables[0].names:
        paths = [table.record_path(name) for table in tables]
        assert paths[0] is not None
        assert paths[1] is not None
        with open_record(paths[0]) as one, open_record(paths[1]) as other:
            for field in ("time", "pin", "codes", "voltage", "overrange"):
                assert getattr(one, field).tobytes() == getattr(other, field).tobytes()
            assert one.results == other.results
            assert one.scenario_digest == other.scenario_digest


@pytest.mark.parametrize("workers", [1, 2, 4])
def test_processes_give_the_same_records(
    reference: tuple[Path, Replayed], tmp_path: Path, workers: int
) -> None:
    """Any number of workers, bit by bit."""
    file, whole = reference
    same_records(whole, replay_set(file, tmp_path / "night", workers=workers))


@pytest.mark.filterwarnings("default")
def test_dask_gives_the_same_records(reference: tuple[Path, Replayed], tmp_path: Path) -> None:
    """A cluster on this machine, bit by bit; workers send their records back."""
    file, whole = reference
    same_records(whole, replay_set(file, tmp_path / "night", on="dask", workers=2))


@pytest.mark.filterwarnings("default")
@pytest.mark.parametrize("on", ["processes", "dask"])
def test_a_killed_worker_is_replaced_and_loses_nothing(
    reference: tuple[Path, Replayed], tmp_path: Path, on: str
) -> None:
    """SIGKILL to a worker in the middle: all runs are done, with the same digest."""
    file, whole = reference
    killed: list[int] = []

    def kill_one(progress: Progress) -> None:
        workers = multiprocessing.active_children()
        if progress.done >= 1 and workers and not killed:
            pid = workers[0].pid
            assert pid is not None
            os.kill(pid, signal.SIGKILL)
            killed.append(pid)

    done = replay_set(file, tmp_path / "night", on=on, workers=2, report=kill_one)
    assert killed
    assert done.complete
    assert (done.ran, done.digest) == (RUNS, whole.digest)


def test_draws_over_a_recording_are_the_same_in_any_batch(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Side by side in a batch, or each by itself: the same digest."""
    points = np.random.default_rng(2).standard_normal(60_000)
    np.savetxt(tmp_path / "recorded.csv", points, header="v", comments="")
    file = made_set(tmp_path, DRAWS.format(20), scenario=RECORDED)
    taken: list[int] = []

    def watched(simulations: Sequence[Simulation]) -> int:
        taken.append(together(simulations))
        return taken[-1]

    monkeypatch.setattr(subject, "side_by_side", watched)
    batched = replay_set(file, tmp_path / "batched", on="in-process")
    assert max(taken) > 1
    monkeypatch.setattr(night, "MOST_JOBS", 1)
    taken.clear()
    single = replay_set(file, tmp_path / "single", on="in-process")
    assert max(taken) == 0
    assert batched.complete
    assert batched.digest == single.digest


class Deadly:
    """An executor whose workers die of some runs, and now and then of none."""

    workers = 3
    deaths_per_loss = 1

    def __init__(self, deadly: set[str], accidents: int) -> None:
        self.deadly, self.accidents = deadly, accidents
        self.deaths: list[str] = []

    def submit(self, batch: Batch) -> Future[list[Outcome]]:
        future: Future[list[Outcome]] = Future()
        names = {job.name for job in batch.jobs}
        if self.accidents or names & self.deadly:
            self.accidents -= bool(self.accidents)
            self.deaths.extend(names & self.deadly)
            future.set_exception(WorkerDied("a worker died"))
        else:
            future.set_result(run_batch(batch))
        return future

    def waits_for(self) -> str:
        return ""

    def close(self, now: bool) -> None:
        pass


def test_a_run_that_kills_its_worker_is_listed_and_the_others_are_done(
    reference: tuple[Path, Replayed], tmp_path: Path
) -> None:
    """Three workers are given to it, found out one by one; accidents of others cost nothing."""
    file, whole = reference
    hands = Deadly({"draw 0005"}, accidents=2)
    prepared = read_set(file)
    with Store(tmp_path / "night") as store:
        done = Night(store, hands, None)
        done.look(prepared)
        done.run()
    assert done.counts.total() == RUNS
    assert done.counts["error"] == 1
    assert 3 <= hands.deaths.count("draw 0005") <= 4
    again = replay_set(file, tmp_path / "night", on="in-process")
    assert (again.ran, again.kept, again.digest) == (1, RUNS - 1, whole.digest)


ORPHANS = """
import sys
from frontend_sim.replay import replay_set
if __name__ == "__main__":
    replay_set(sys.argv[1], sys.argv[2], workers=2, keep="nothing",
           report=lambda progress: print(progress.done, flush=True))
"""


@pytest.mark.skipif(not Path("/proc").is_dir(), reason="looks for processes in /proc")
def test_workers_end_with_the_call_that_started_them(tmp_path: Path) -> None:
    """SIGKILL to the coordinator leaves no process behind, and the next call goes on."""
    file = made_set(tmp_path, DRAWS.format(4000))
    script = tmp_path / "script.py"
    script.write_text(ORPHANS)
    command = [sys.executable, str(script), str(file), str(tmp_path / "night")]
    with subprocess.Popen(command, stdout=subprocess.PIPE, text=True) as process:
        assert process.stdout is not None
        while int(process.stdout.readline()) < 2:
            pass
        children = children_of(process.pid)
        assert len(children) >= 2
        process.kill()
    until = time.monotonic() + 20.0
    while any(map(running, children)) and time.monotonic() < until:
        time.sleep(0.05)
    assert not any(map(running, children))
    with Store(tmp_path / "night"):
        pass


@pytest.mark.skipif(not Path("/proc").is_dir(), reason="looks at a process in /proc")
def test_a_worker_that_starts_does_not_hear_ctrl_c() -> None:
    """It is held back from the first moment: its imports would end with a traceback."""
    hands = Processes(1)
    try:
        hands.submit(Batch(b"", "", "", "nothing", ()))
        (worker,) = multiprocessing.active_children()
        status = Path(f"/proc/{worker.pid}/status").read_text()
        blocked = int(status.partition("SigBlk:")[2].split()[0], 16)
        assert blocked >> (signal.SIGINT - 1) & 1
    finally:
        hands.close(now=True)
    assert signal.SIGINT not in signal.pthread_sigmask(signal.SIG_BLOCK, [])


def test_workers_that_cannot_be_started_are_told(monkeypatch: pytest.MonkeyPatch) -> None:
    """The command would take an error of the operating system for one of its own output."""

    def full(*_: object) -> None:
        raise OSError(errno.EMFILE, os.strerror(errno.EMFILE))

    monkeypatch.setattr(processes, "ProcessPoolExecutor", full)
    with pytest.raises(ScenarioError, match="cannot be started: Too many open files; take"):
        executor("processes")


def children_of(parent: int) -> list[int]:
    """Return the processes that a process started."""
    return [
        int(entry.name)
        for entry in Path("/proc").iterdir()
        if entry.name.isdigit() and stat_of(int(entry.name))[1] == str(parent)
    ]


def running(process: int) -> bool:
    """Return whether a process is there, and not merely waiting to be forgotten."""
    return stat_of(process)[0] not in ("", "Z", "X")


def stat_of(process: int) -> tuple[str, str]:
    """Return state and parent of a process."""
    try:
        fields = Path(f"/proc/{process}/stat").read_text().rpartition(")")[2].split()
    except OSError:
        return "", ""
    return fields[0], fields[1]


@pytest.mark.parametrize(
    ("name", "workers", "scheduler", "message"),
    [
        ("proceses", None, None, "did you mean 'processes'"),
        ("processes", 0, None, "at least one"),
        ("processes", None, "tcp://127.0.0.1:1", "for the executor dask only"),
    ],
)
def test_executors_that_cannot_be_had_are_refused(
    name: str, workers: int | None, scheduler: str | None, message: str
) -> None:
    """The message says what is known."""
    with pytest.raises(ScenarioError, match=message):
        executor(name, workers, scheduler)


def test_without_dask_the_message_says_what_to_install(monkeypatch: pytest.MonkeyPatch) -> None:
    """The package is optional."""
    monkeypatch.setitem(sys.modules, "distributed", None)
    with pytest.raises(ScenarioError, match="not installed: pip install distributed"):
        executor("dask")
