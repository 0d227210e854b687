"""A night that is stopped, by whatever, is taken up where it was."""

from __future__ import annotations

import io
import os
import subprocess
import sys
from pathlib import Path

import h5py
import pytest
from nights import BASE, DRAWS, base, made_set
from rich.console import Console

from frontend_sim.archive import open_record
from frontend_sim.archive.set_table import open_set
from frontend_sim.errors import OutputError
from frontend_sim.present.replay_table import replay_tables
from frontend_sim.replay import Replayed, estimate, replay_set, work
from frontend_sim.replay.estimate import Need, refuse_small_disk

ONE_THREAD = {**os.environ, "OPENBLAS_NUM_THREADS": "1"}


def here(source: Path, directory: Path) -> Replayed:
    """Replay in this process."""
    return replay_set(source, directory, on="in-process")


def test_unchanged_runs_are_kept_and_changed_ones_run_again(tmp_path: Path) -> None:
    """A second call does nothing; another value in the set does its own runs alone."""
    text = 'keep = "all"\n[[vary]]\nkey = "chain[2].gain"\nvalues = [{}]\n'
    file = made_set(tmp_path, text.format("1, 2"))
    first = here(file, tmp_path / "night")
    assert (first.ran, first.kept, first.complete) == (2, 0, True)
    again = here(file, tmp_path / "night")
    assert (again.ran, again.kept, again.digest) == (0, 2, first.digest)
    made_set(tmp_path, text.format("1, 2, 1.5"))
    more = here(file, tmp_path / "night")
    assert (more.ran, more.kept) == (1, 2)
    base(tmp_path, BASE.replace("4.7 nF", "4.8 nF"))
    changed = here(file, tmp_path / "night")
    assert (changed.ran, changed.kept) == (3, 0)
    assert changed.digest != more.digest


def test_a_record_that_no_longer_belongs_to_its_run_is_removed(tmp_path: Path) -> None:
    """A run that failed and holds after a change leaves no record of what it was."""
    file = made_set(tmp_path, 'keep = "failures"\n[[vary]]\nkey = "chain[2].gain"\nvalues = [1]\n')
    here(file, tmp_path / "night")
    assert len(list((tmp_path / "night" / "records").iterdir())) == 1
    base(tmp_path, BASE.replace("1.76 V", "0.5 V"))
    assert here(file, tmp_path / "night").tally.counts == {"holds": 1}
    assert list((tmp_path / "night" / "records").iterdir()) == []


def test_a_title_changes_nothing(tmp_path: Path) -> None:
    """What plays no part in the results does not make a run anew."""
    file = made_set(tmp_path, DRAWS.format(3))
    here(file, tmp_path / "night")
    base(tmp_path, BASE.replace("Invented", "Also invented"))
    assert here(file, tmp_path / "night").kept == 3


@pytest.mark.parametrize("damage", ["changed", "cut", "removed", "other"])
def test_a_record_that_is_damaged_is_made_again(tmp_path: Path, damage: str) -> None:
    """No file counts for being there: its checksum does."""
    file = made_set(tmp_path, 'keep = "all"\n[[vary]]\nkey = "chain[2].gain"\nvalues = [1, 2]\n')
    first = here(file, tmp_path / "night")
    path = first.table().record_path("gain=2")
    other = first.table().record_path("gain=1")
    assert path is not None
    assert other is not None
    content = path.read_bytes()
    if damage == "changed":
        path.write_bytes(content[:9000] + bytes([content[9000] ^ 1]) + content[9001:])
    elif damage == "cut":
        path.write_bytes(content[:-100])
    elif damage == "removed":
        path.unlink()
    else:
        path.write_bytes(other.read_bytes())
    again = here(file, tmp_path / "night")
    assert (again.ran, again.kept, again.digest) == (1, 1, first.digest)
    with open_record(path) as record:
        record.verify()
        assert record.scenario.chain[1].gain == 2


def test_a_damaged_journal_costs_the_runs_of_its_damaged_lines(tmp_path: Path) -> None:
    """A wrong byte in one line makes that run again."""
    file = made_set(tmp_path, DRAWS.format(5))
    first = here(file, tmp_path / "night")
    journal = tmp_path / "night" / "night.journal"
    lines = journal.read_bytes().split(b"\n")
    lines[2] = lines[2].replace(b"holds", b"fails") + b" "
    journal.write_bytes(b"\n".join(lines))
    again = here(file, tmp_path / "night")
    assert (again.ran, again.kept, again.digest) == (1, 4, first.digest)


def test_a_damaged_table_is_written_anew(tmp_path: Path) -> None:
    """The table is made from the journal, by every call."""
    file = made_set(tmp_path, DRAWS.format(2))
    first = here(file, tmp_path / "night")
    (tmp_path / "night" / "set.h5").write_bytes(b"nothing")
    here(file, tmp_path / "night")
    assert open_set(tmp_path / "night").digest == first.digest


def test_one_failing_run_never_stops_the_night(tmp_path: Path) -> None:
    """A combination that is no scenario is listed with its reason; the others are done."""
    text = (
        'keep = "nothing"\n[[vary]]\nkey = "adc.high"\nvalues = ["3.3 V", "1 V"]\n'
        '[[vary]]\nkey = "adc.low"\nvalues = ["0 V", "2 V"]\n'
    )
    done = here(made_set(tmp_path, text), tmp_path / "night")
    assert done.tally.done == 4
    assert done.tally.counts["error"] == 1
    assert not done.complete
    table = done.table()
    assert table.verdicts[3] == "error"
    assert "low" in table.texts("error")[3]
    # It would fail again, so that it is kept like the others.
    assert here(tmp_path / "set.toml", tmp_path / "night").ran == 0


def test_an_error_of_the_program_is_listed_and_tried_again(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """What nobody foresaw stops one run, and the next call tries it again."""
    file = made_set(tmp_path, DRAWS.format(3))
    whole = work.subject_of

    def broken(scenario: object) -> object:
        raise RuntimeError("nobody foresaw this")

    monkeypatch.setattr(work, "subject_of", broken)
    done = here(file, tmp_path / "night")
    assert done.tally.counts == {"error": 3}
    assert "RuntimeError: nobody foresaw this" in done.table().texts("error")[0]
    monkeypatch.setattr(work, "subject_of", whole)
    assert here(file, tmp_path / "night").ran == 3


def test_ctrl_c_leaves_a_table_and_the_next_call_goes_on(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """What was done before the interruption is kept."""
    file = made_set(tmp_path, DRAWS.format(6))
    undisturbed = here(file, tmp_path / "whole")

    def interrupt(progress: object) -> None:
        raise KeyboardInterrupt

    done = replay_set(file, tmp_path / "night", on="in-process", report=interrupt)
    assert done.interrupted
    assert 0 < done.tally.done < 6
    assert not open_set(tmp_path / "night").complete
    again = here(file, tmp_path / "night")
    assert again.kept == done.tally.done
    assert again.digest == undisturbed.digest


def test_a_disk_that_is_too_small_is_refused_before_the_night(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The first run shows how much the others need; the message says how much there is."""
    with pytest.raises(OutputError, match=r"1,000,000,000,000 runs .* need about .* keep less"):
        refuse_small_disk(tmp_path, Need(1.0, 30_000.0), 10**12)
    refuse_small_disk(tmp_path, Need(1.0, 1.0), 1)
    monkeypatch.setattr(estimate, "free_bytes", lambda directory: 10_000)
    done = here(made_set(tmp_path, DRAWS.format(4)), tmp_path / "night")
    assert done.ran == 1
    assert "free some space" in done.stopped
    stream = io.StringIO()
    Console(file=stream).print(*replay_tables(done.table()))
    assert "all checks hold in 1 of 4 runs" in stream.getvalue()
    monkeypatch.undo()
    assert here(tmp_path / "set.toml", tmp_path / "night").complete


FULL = """
import resource, sys
from frontend_sim.cli import main
resource.setrlimit(resource.RLIMIT_FSIZE, (int(sys.argv[1]), int(sys.argv[1])))
sys.exit(main(sys.argv[2:]))
"""


@pytest.mark.parametrize(("keep", "limit"), [("nothing", 8_000), ("all", 8_000)])
def test_a_full_disk_ends_in_a_clear_state(tmp_path: Path, keep: str, limit: int) -> None:
    """Exit status 3, a message that says what to do, and the next call goes on."""
    file = made_set(tmp_path, DRAWS.format(30))
    arguments = ["replay", str(file), "-o", str(tmp_path / "night"), "--on", "in-process"]
    command = [sys.executable, "-c", FULL, str(limit), *arguments, "--keep", keep]
    done = subprocess.run(command, capture_output=True, text=True, env=ONE_THREAD, check=False)
    assert done.returncode == 3, done.stderr
    assert "Traceback" not in done.stderr
    if keep == "nothing":
        assert "cannot be written" in done.stderr
        assert "free some space" in done.stderr
        assert "the same call goes on from here" in done.stderr
    kept = replay_set(file, tmp_path / "night", on="in-process", keep=keep)  # type: ignore[arg-type]
    whole = replay_set(file, tmp_path / "whole", on="in-process", keep=keep)  # type: ignore[arg-type]
    assert kept.complete
    assert kept.digest == whole.digest
    if keep == "nothing":
        assert kept.kept > 0


KILLED = """
import os, random, signal, sys, time
from pathlib import Path
from frontend_sim.replay import replay_set

file, night, whole, kills = Path(sys.argv[1]), sys.argv[2], sys.argv[3], int(sys.argv[4])
begun = time.monotonic()
reference = replay_set(file, whole, on="in-process")
lasting = time.monotonic() - begun
random.seed(sys.argv[5])
for _ in range(kills):
    child = os.fork()
    if child == 0:
        replay_set(file, night, on="in-process")
        os._exit(0)
    time.sleep(random.uniform(0.0, 2.5 * lasting / kills))
    os.kill(child, signal.SIGKILL)
    os.waitpid(child, 0)
done = replay_set(file, night, on="in-process")
assert done.complete and done.digest == reference.digest, (done, reference)
print(done.kept, done.ran)
"""


def killed(tmp_path: Path, kills: int, runs: int) -> tuple[int, int]:
    """Kill a night at random moments, end it, and return what was kept and what was left."""
    file = made_set(tmp_path, DRAWS.format(runs).replace("nothing", "failures"))
    places = [str(tmp_path / name) for name in ("night", "whole")]
    command = [sys.executable, "-c", KILLED, str(file), *places, str(kills), "17"]
    done = subprocess.run(command, capture_output=True, text=True, env=ONE_THREAD, check=False)
    assert done.returncode == 0, done.stderr
    kept, ran = map(int, done.stdout.split())
    return kept, ran


def whole_and_single(directory: Path, runs: int) -> None:
    """Make sure that no run is lost or doubled, and that no file is left that cannot be read."""
    table = open_set(directory)
    assert len(table.runs) == len(set(table.names)) == runs
    linked = {table.record_path(name) for name in table.names} - {None}
    assert linked == set((directory / "records").iterdir())
    with h5py.File(table.path) as file:
        for name in file["record"]:
            assert file["record"][name].attrs["verdict"] == "fails"
    for path in linked:
        assert path is not None
        with open_record(path) as record:
            record.verify()


@pytest.mark.skipif(not hasattr(os, "fork"), reason="kills a fork of a warm process")
def test_killed_at_random_moments_it_ends_as_an_undisturbed_night(tmp_path: Path) -> None:
    """SIGKILL five times, then to the end: the same digest, nothing lost, nothing doubled."""
    kept, ran = killed(tmp_path, kills=5, runs=60)
    assert kept + ran == 60
    whole_and_single(tmp_path / "night", 60)


@pytest.mark.slow
@pytest.mark.skipif(not hasattr(os, "fork"), reason="kills a fork of a warm process")
def test_killed_at_fifty_random_moments_it_ends_as_an_undisturbed_night(tmp_path: Path) -> None:
    """The same with fifty kills."""
    kept, ran = killed(tmp_path, kills=50, runs=150)
    assert kept + ran == 150
    whole_and_single(tmp_path / "night", 150)
