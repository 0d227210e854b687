"""A Dask cluster that somebody else runs: a scheduler and workers with folders of their own."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

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


@dataclass
class Cluster:
    """A scheduler and two workers, which see nothing of each other but sockets."""

    address: str
    scheduler: subprocess.Popen[str]
    workers: list[subprocess.Popen[str]]
    folders: list[Path]


def started(module: str, *arguments: str, folder: Path) -> subprocess.Popen[str]:
    """Start a part of the cluster in a folder of its own, temporary files included."""
    folder.mkdir()
    paths = os.pathsep.join(filter(None, (str(Path.cwd()), os.environ.get("PYTHONPATH"))))
    return subprocess.Popen(
        [sys.executable, "-m", f"distributed.cli.{module}", *arguments],
        cwd=folder,
        env={**os.environ, "TMPDIR": str(folder), "PYTHONPATH": paths},
        stderr=subprocess.PIPE,
        text=True,
    )


@pytest.fixture(scope="module")
def remote(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Cluster]:
    """Start a cluster on TCP; the last tests of this file break it, part by part."""
    pytest.importorskip("distributed")
    above = tmp_path_factory.mktemp("cluster")
    where = ("--host", "127.0.0.1", "--port", "0", "--no-dashboard")
    scheduler = started("dask_scheduler", *where, folder=above / "scheduler")
    assert scheduler.stderr is not None
    address = next(line.split()[-1] for line in scheduler.stderr if "Scheduler at:" in line)
    alone = ("--nthreads", "1", "--no-nanny", "--no-dashboard", "--local-directory", "space")
    folders = [above / "first", above / "second"]
    workers = [started("dask_worker", address, *alone, folder=each) for each in folders]
    yield Cluster(address, scheduler, workers, folders)
    for process in (*workers, scheduler):
        process.kill()
        process.communicate()


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
        if progress.done:
            remote.workers[0].kill()

    done = replayed(file, tmp_path / "night", remote, kill)
    assert remote.workers[0].wait() != 0
    assert done.complete
    assert done.digest == whole.digest


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
            remote.scheduler.kill()

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
