"""A Dask cluster that somebody else runs: a scheduler and workers with folders of their own."""

from __future__ import annotations

import json
import os
import re
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import suppress
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

import nights
import numpy as np
import pytest
from nights import RECORDED, made_set

from frontend_sim.archive import open_record
from frontend_sim.errors import ScenarioError
from frontend_sim.replay import Progress, Replayed, night, read_set, replay_set
from frontend_sim.replay.executors import cluster, executor
from frontend_sim.replay.work import CannotGoOn, run_batch

pytestmark = [
    pytest.mark.filterwarnings("default"),
    pytest.mark.skipif(not Path("/proc/self").is_dir(), reason="looks at processes in /proc"),
]

SET = 'seed = 3\nkeep = "all"\n[draws]\ncount = 6\n'


NURSERY = """
import json, os, signal, sys
from pathlib import Path
from distributed.cli import dask_scheduler, dask_worker
import frontend_sim
import nights
frontend_sim.simulate(frontend_sim.parse_scenario(nights.BASE))
signal.signal(signal.SIGCHLD, signal.SIG_IGN)
for line in sys.stdin:
    module, folder, *arguments = json.loads(line)
    child = os.fork()
    if child == 0:
        signal.signal(signal.SIGCHLD, signal.SIG_DFL)
        os.chdir(folder)
        os.environ["TMPDIR"] = folder
        os.dup2(os.open(f"{folder}.log", os.O_WRONLY | os.O_CREAT), 2)
        {"scheduler": dask_scheduler, "worker": dask_worker}[module].main(arguments)
    print(child, flush=True)
"""
"""Forks parts of a cluster from a process that has its libraries loaded already."""


@dataclass
class Cluster:
    """A scheduler and two workers, which see nothing of each other but sockets."""

    nursery: subprocess.Popen[str]
    above: Path
    folders: list[Path] = field(default_factory=list)
    workers: list[int] = field(default_factory=list)
    scheduler: int = 0
    address: str = ""

    def begin(self) -> None:
        """Start all of it on TCP."""
        where = ("--host", "127.0.0.1", "--port", "0", "--no-dashboard")
        self.scheduler = self._started("scheduler", "scheduler", *where)
        log = self.above / "scheduler.log"
        while "Scheduler at:" not in log.read_text():
            time.sleep(0.02)
        self.address = next(
            line.split()[-1] for line in log.read_text().splitlines() if "Scheduler at:" in line
        )
        self.add_worker("first")
        self.add_worker("second")

    def add_worker(self, name: str) -> None:
        """Start a worker in a folder of its own, temporary files included."""
        alone = ("--nthreads", "1", "--no-nanny", "--no-dashboard", "--local-directory", "space")
        self.workers.append(self._started("worker", name, self.address, *alone))
        self.folders.append(self.above / name)

    def kill_workers(self) -> None:
        """End all workers that are left."""
        while self.workers:
            with suppress(ProcessLookupError):  # some end with their scheduler
                os.kill(self.workers.pop(), signal.SIGKILL)

    def _started(self, module: str, name: str, *arguments: str) -> int:
        folder = self.above / name
        folder.mkdir()
        Path(f"{folder}.log").touch()
        assert self.nursery.stdin is not None
        assert self.nursery.stdout is not None
        print(json.dumps([module, str(folder), *arguments]), file=self.nursery.stdin, flush=True)
        return int(self.nursery.stdout.readline())


@pytest.fixture(scope="module")
def remote(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Cluster]:
    """Start a cluster; the last tests of this file break it, part by part."""
    pytest.importorskip("distributed")
    above = tmp_path_factory.mktemp("cluster")
    places = (str(Path.cwd()), str(Path(nights.__file__).parent), os.environ.get("PYTHONPATH"))
    with subprocess.Popen(
        [sys.executable, "-c", NURSERY],
        env={**os.environ, "PYTHONPATH": os.pathsep.join(filter(None, places))},
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
    ) as nursery:
        made = Cluster(nursery, above)
        try:
            made.begin()
            yield made
        finally:
            made.kill_workers()
            with suppress(ProcessLookupError):
                os.kill(made.scheduler, signal.SIGKILL)
            nursery.kill()


@pytest.fixture(scope="module")
def reference(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, Replayed]:
    """A set over a recording, replayed in this process."""
    folder = tmp_path_factory.mktemp("reference")
    points = np.random.default_rng(2).standard_normal(5000)
    np.savetxt(folder / "recorded.csv", points, header="v", comments="")
    file = made_set(folder, SET, scenario=RECORDED)
    return file, replay_set(file, folder / "night", on="in-process")


def replayed(file: Path, directory: Path, remote: Cluster, report: Any = None) -> Replayed:
    """Replay a set on the cluster."""
    return replay_set(file, directory, on="dask", scheduler=remote.address, report=report)


def test_records_are_those_of_one_machine(
    reference: tuple[Path, Replayed], remote: Cluster
) -> None:
    """Bit by bit; and the workers leave no file behind, here or where they are."""
    file, whole = reference
    done = replayed(file, file.parent / "cluster", remote)
    assert done.complete
    assert done.digest == whole.digest
    for name in whole.table().names:
        paths = [table.record_path(name) for table in (whole.table(), done.table())]
        assert paths[0] is not None
        assert paths[1] is not None
        with open_record(paths[0]) as one, open_record(paths[1]) as other:
            for field in ("time", "pin", "codes", "voltage", "overrange"):
                assert getattr(one, field).tobytes() == getattr(other, field).tobytes()
            assert one.results == other.results
            assert one.resolved == other.resolved
            assert one.scenario_text == other.scenario_text
    for folder in remote.folders:
        assert {each.name for each in folder.iterdir()} == {"space"}


@pytest.mark.parametrize(
    ("content", "message"), [(None, "is not there on"), ("v\n0\n1\n", "has another content than")]
)
def test_a_recording_that_a_worker_lacks_is_told(
    reference: tuple[Path, Replayed],
    remote: Cluster,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    content: str | None,
    message: str,
) -> None:
    """A path that leads every process to its own folder; no run of it counts as done."""
    file, _ = reference
    monkeypatch.chdir(file.parent)
    for folder in remote.folders if content else ():
        (folder / "recorded.csv").write_text(content or "")
    done = replayed(Path("/proc/self/cwd", file.name), tmp_path / "night", remote)
    errors = set(done.table().texts("error").tolist())
    assert len(errors) == 1
    told = errors.pop()
    assert told.startswith("/proc/self/cwd/recorded.csv ")
    assert message in told
    assert not done.complete
    # The worker may have it tomorrow.
    again = replay_set("/proc/self/cwd/set.toml", tmp_path / "night", on="in-process")
    assert (again.ran, again.kept) == (done.tally.planned, 0)
    assert again.complete


def test_a_killed_worker_is_survived(
    reference: tuple[Path, Replayed], remote: Cluster, tmp_path: Path
) -> None:
    """One of two goes away in the middle, and nobody replaces it: the other does the rest."""
    file, whole = reference

    def kill(progress: Progress) -> None:
        if progress.done and len(remote.workers) == 2:
            os.kill(remote.workers.pop(), signal.SIGKILL)

    done = replayed(file, tmp_path / "night", remote, kill)
    assert len(remote.workers) == 1
    assert done.complete
    assert done.digest == whole.digest


def test_a_night_without_workers_waits_for_one_and_says_so(
    reference: tuple[Path, Replayed],
    remote: Cluster,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """All of them go away: it is told since when, and what to do; with another one it goes on."""
    file, whole = reference
    monkeypatch.setattr(cluster, "LOOK", 0.1)
    monkeypatch.setattr(night, "MOST_JOBS", 1)
    notes: list[str] = []

    def lose(progress: Progress) -> None:
        if progress.done:
            if not notes:
                remote.kill_workers()
            notes.append(progress.note)
        if progress.note and not remote.workers:
            remote.add_worker("third")

    done = replayed(file, tmp_path / "night", remote, lose)
    assert done.complete
    assert done.digest == whole.digest
    where = re.escape(remote.address)
    (told,) = set(notes) - {""}
    assert re.fullmatch(
        rf"the scheduler at {where} has no worker since \d\d:\d\d, and the night waits for one; "
        rf"start some: dask worker {where}",
        told,
    )
    assert notes[-1] == ""


def test_a_night_does_not_wait_for_ever(
    reference: tuple[Path, Replayed],
    remote: Cluster,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """A scheduler of nights meets an end, with what was done in the table."""
    file, _ = reference
    monkeypatch.setattr(cluster, "LOOK", 0.1)
    monkeypatch.setattr(cluster, "LONGEST", 0.2)
    monkeypatch.setattr(night, "MOST_JOBS", 1)

    def lose(progress: Progress) -> None:
        if progress.done:
            remote.kill_workers()

    done = replayed(file, tmp_path / "night", remote, lose)
    remote.add_worker("fourth")
    assert "has no worker since" in done.stopped
    assert done.left == done.tally.planned - done.ran > 0
    assert len(done.table().runs) == done.ran >= 1


def test_a_scheduler_that_goes_away_ends_the_night_and_the_next_goes_on(
    reference: tuple[Path, Replayed],
    remote: Cluster,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capfd: pytest.CaptureFixture[str],
) -> None:
    """What was done is stored, one sentence tells what happened, and no traceback comes up."""
    file, whole = reference
    monkeypatch.setattr(night, "MOST_JOBS", 1)

    def kill(progress: Progress) -> None:
        if progress.done:
            with suppress(ProcessLookupError):
                os.kill(remote.scheduler, signal.SIGKILL)

    done = replayed(file, tmp_path / "night", remote, kill)
    assert (
        done.stopped
        == f"the scheduler at {remote.address} does not answer any more; start it again"
    )
    assert not done.complete
    assert 1 <= done.ran < done.tally.planned
    assert "Traceback" not in capfd.readouterr().err
    again = replay_set(file, tmp_path / "night", on="in-process")
    assert (again.kept, again.digest) == (done.ran, whole.digest)


@pytest.mark.parametrize(
    ("address", "message"),
    [
        ("tcp://127.0.0.1:1", "Connection refused"),
        ("tcp://127.0.0.1", "missing port number"),
        ("a word", "missing port number"),
    ],
)
def test_a_wrong_address_is_told(
    address: str, message: str, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    """With what was given, and what an address looks like; nothing else is said."""
    pytest.importorskip("distributed")
    monkeypatch.setattr(cluster, "PATIENCE", 0.3)
    with pytest.raises(ScenarioError, match=rf"answers at '{address}': .*{message}.*such as tcp:"):
        executor("dask", None, address)
    assert capfd.readouterr().err == ""


def test_a_worker_with_other_versions_does_nothing(reference: tuple[Path, Replayed]) -> None:
    """Numbers of another library would count as those of this one."""
    prepared = read_set(reference[0])
    batch = night.batch_of(prepared, 0, b"", Path(), ())
    other = replace(batch, versions={**batch.versions, "numpy": "0.1"})
    with pytest.raises(
        CannotGoOn, match=r"has numpy \d.*, and the set was read with 0\.1; install"
    ):
        run_batch(other)
