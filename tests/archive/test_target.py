"""A record exists whole or not at all, and never takes the place of something else."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from archived import Cut, assert_same, made_run, scenario

from frontend_sim.archive import open_record, record_run, save_record
from frontend_sim.archive.sink import Sink
from frontend_sim.errors import InputError, OutputError, RecordingError
from frontend_sim.simulation import Run

RUN = made_run(scenario(), 200)
OTHER = made_run(scenario(title="another"), 100)

ENDLESS = """
import sys
from pathlib import Path
import h5py  # so that the first block comes soon
from archived import Cut, made_run, scenario
from frontend_sim.archive import record_run
from frontend_sim.errors import OutputError

class Endless(Cut):
    def blocks(self, progress=None):
        for number in range(500):  # bounded, should nobody stop it
            if number == 20:
                print("writing", flush=True)
            yield from super().blocks()

run = made_run(scenario(), 60_000)
try:
    record_run(Endless(run, 60_000), Path(sys.argv[1]) / "r.h5")
except KeyboardInterrupt:
    print("interrupted")
except OutputError as error:
    print(error)
"""


def endless(folder: Path, before: str = "") -> subprocess.Popen[str]:
    """Start a writer that goes on until it is stopped, and wait until it writes."""
    script = before + ENDLESS
    places = [str(Path(__file__).parents[1]), *sys.path]
    return subprocess.Popen(
        [sys.executable, "-c", script, str(folder)],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        env={**os.environ, "PYTHONPATH": os.pathsep.join(filter(None, places))},
    )


def test_an_existing_file_stays(tmp_path: Path) -> None:
    """Without being asked, nothing is overwritten; asked, the new record takes the place."""
    path = save_record(RUN, tmp_path / "r.h5")
    before = path.read_bytes()
    with pytest.raises(
        OutputError, match="exists; give another name, or overwrite it: --overwrite, in Python"
    ):
        save_record(OTHER, path)
    assert path.read_bytes() == before
    save_record(OTHER, path, overwrite=True)
    with open_record(path) as record:
        assert_same(record, OTHER)
    assert os.listdir(tmp_path) == ["r.h5"]


def test_what_is_no_record_is_never_overwritten(tmp_path: Path) -> None:
    """A wrong name on the command line costs nobody a scenario or a photograph."""
    path = tmp_path / "scenario.toml"
    path.write_text("seed = 1\n")
    with pytest.raises(OutputError, match="no whole record of this program"):
        save_record(RUN, path, overwrite=True)
    assert path.read_text() == "seed = 1\n"
    path.write_text("")
    save_record(RUN, path, overwrite=True)


@pytest.mark.parametrize("link", [None, Path.symlink_to, Path.hardlink_to])
def test_inputs_are_never_overwritten(
    tmp_path: Path, link: Callable[[Path, Path], None] | None
) -> None:
    """A record that is itself the recording of the run stays, by whatever name it is called."""
    recording = save_record(RUN, tmp_path / "signal.h5")
    stimulus = {"kind": "recording", "file": str(recording), "dataset": "adc/pin", "rate": 1e3}
    run = made_run(scenario(stimulus=stimulus), 10)
    target = recording
    if link is not None:
        target = tmp_path / "link.h5"
        link(target, recording)
    before = recording.read_bytes()
    with pytest.raises(OutputError, match="is an input of this run"):
        save_record(run, target, overwrite=True)
    with pytest.raises(OutputError, match="is an input of this run"):
        save_record(RUN, target, overwrite=True, inputs=[recording])
    assert recording.read_bytes() == before


@pytest.mark.parametrize(
    ("name", "message"),
    [
        ("missing/r.h5", "there is no directory .*missing; make it first"),
        ("", "is a directory; give the name of a file"),
        ("file/r.h5", "cannot be written: Not a directory"),
        ("x" * 300, "cannot be written: File name too long"),
        ("a\0b", "cannot be written: "),
    ],
)
def test_no_place_for_a_file(tmp_path: Path, name: str, message: str) -> None:
    """Each is told before the run starts, for a run may take long."""
    (tmp_path / "file").write_text("")
    blocks: list[int] = []
    with pytest.raises(OutputError, match=message):
        record_run(Cut(RUN, 10, between=blocks.append), tmp_path / name)
    assert blocks == []
    assert os.listdir(tmp_path) == ["file"]


@pytest.mark.skipif(os.name != "posix", reason="needs a device file")
def test_a_device_is_no_place() -> None:
    """A record cannot be written to what is no regular file."""
    with pytest.raises(OutputError, match="not a regular file"):
        save_record(RUN, "/dev/null", overwrite=True)


def test_a_folder_that_may_not_be_written(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The system's refusal is told; it is played here, since root may write everywhere."""

    def refuse(*_: object, **__: object) -> None:
        raise PermissionError(13, "Permission denied")

    blocks: list[int] = []
    with monkeypatch.context() as patch:
        patch.setattr(Path, "open", refuse)
        with pytest.raises(OutputError, match="Permission denied; choose another place"):
            record_run(Cut(RUN, 10, between=blocks.append), tmp_path / "r.h5")
    assert blocks == []
    assert os.listdir(tmp_path) == []


def test_a_link_is_followed(tmp_path: Path) -> None:
    """The record goes to where a link points, and the link stays one."""
    (tmp_path / "link.h5").symlink_to(tmp_path / "r.h5")
    assert save_record(RUN, tmp_path / "link.h5") == (tmp_path / "r.h5").resolve()
    assert (tmp_path / "link.h5").is_symlink()


@pytest.mark.parametrize(
    "error", [RecordingError("a gap"), ZeroDivisionError("a mistake"), OSError(5, "its own")]
)
def test_an_error_of_the_run_passes(tmp_path: Path, error: Exception) -> None:
    """What goes wrong in the run is told as it is, not as a failure to write; nothing is left."""

    def fail(number: int) -> None:
        if number == 3:
            raise error

    with pytest.raises(type(error)) as caught:
        record_run(Cut(RUN, 10, between=fail), tmp_path / "r.h5")
    assert caught.value is error
    assert os.listdir(tmp_path) == []


def test_a_target_that_appears_meanwhile_stays(tmp_path: Path) -> None:
    """Two runs to one name: the second to finish does not replace the first."""
    path = tmp_path / "r.h5"
    source = Cut(RUN, 10, between=lambda number: path.write_text("mine"))
    with pytest.raises(OutputError, match="appeared while the run went on"):
        record_run(source, path)
    assert path.read_text() == "mine"
    assert os.listdir(tmp_path) == ["r.h5"]


def test_without_hard_links(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """On a file system that knows one name per file the record is renamed, with the same care."""

    def refuse(*_: object) -> None:
        raise PermissionError(1, "Operation not permitted")

    monkeypatch.setattr(os, "link", refuse)
    path = tmp_path / "r.h5"
    save_record(RUN, path)
    assert os.listdir(tmp_path) == ["r.h5"]
    path.unlink()
    source = Cut(RUN, 10, between=lambda number: path.write_text("mine"))
    with pytest.raises(OutputError, match="appeared while the run went on"):
        record_run(source, path)
    assert path.read_text() == "mine"


@pytest.mark.parametrize("change", [lambda data: bytes([data[0] ^ 1]) + data[1:], lambda data: b""])
def test_what_does_not_read_back_is_no_record(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, change: Callable[[bytes], bytes]
) -> None:
    """A disk that spoils or loses one write, and says nothing, is noticed before the rename."""
    write, sizes = Sink.write, []

    def spoil(sink: Sink, data: memoryview) -> int:
        sizes.append(len(data))
        write(sink, memoryview(change(bytes(data)) if len(data) > 1000 else data))
        return len(data)

    monkeypatch.setattr(Sink, "write", spoil)
    with pytest.raises(OutputError, match="was written but does not read back"):
        save_record(RUN, tmp_path / "r.h5")
    assert max(sizes) > 1000
    assert os.listdir(tmp_path) == []


def test_codes_of_another_converter_are_refused(tmp_path: Path) -> None:
    """HDF5 would clip them without a word."""
    run = Run(**{**vars(RUN), "codes": np.full(200, 70_000)})
    with pytest.raises(OutputError, match="do not belong to the converter"):
        save_record(run, tmp_path / "r.h5")
    assert os.listdir(tmp_path) == []


def test_a_recording_that_changes_during_the_run(tmp_path: Path) -> None:
    """No record is made of a run whose input nobody can name."""
    recording = tmp_path / "s.csv"
    recording.write_text("0\n1\n")
    stimulus = {"kind": "recording", "file": str(recording), "rate": 1e3}
    run = made_run(scenario(stimulus=stimulus), 100)
    source = Cut(run, 50, between=lambda number: recording.write_text(f"0\n1\n{number}\n"))
    with pytest.raises(RecordingError, match="changed while the run was reading it"):
        record_run(source, tmp_path / "r.h5")
    assert os.listdir(tmp_path) == ["s.csv"]


def test_a_recording_that_is_not_there(tmp_path: Path) -> None:
    """A missing input is an error of the input, not of the output."""
    stimulus = {"kind": "recording", "file": str(tmp_path / "no.csv"), "rate": 1e3}
    with pytest.raises(InputError, match="cannot be read: No such file"):
        save_record(made_run(scenario(stimulus=stimulus), 10), tmp_path / "r.h5")


@pytest.mark.skipif(os.name != "posix", reason="needs limits of the system")
@pytest.mark.parametrize("limit", [0, 700, 5_000, 100_000, 3_000_000])
def test_a_full_disk(tmp_path: Path, limit: int) -> None:
    """Wherever the disk ends: one message, nothing left, and the process ends well.

    A limit on the size of files stands for the full disk; to HDF5 both are a write that fails.
    """
    before = f"import resource; resource.setrlimit(resource.RLIMIT_FSIZE, ({limit}, -1))\n"
    writer = endless(tmp_path, before)
    out, err = writer.communicate(timeout=120)
    assert out.splitlines()[-1] == (
        f"{tmp_path / 'r.h5'} cannot be written: File too large; free some space or choose another "
        "place, nothing was left behind"
    )
    assert (writer.returncode, err) == (0, "")
    assert os.listdir(tmp_path) == []


@pytest.mark.skipif(os.name != "posix", reason="needs signals")
def test_ctrl_c(tmp_path: Path) -> None:
    """An interrupted run leaves nothing, wherever in HDF5 the interruption arrives."""
    writer = endless(tmp_path)
    assert writer.stdout is not None
    assert writer.stdout.readline() == "writing\n"
    writer.send_signal(signal.SIGINT)
    out, err = writer.communicate(timeout=120)
    assert (writer.returncode, out, err) == (0, "interrupted\n", "")
    assert os.listdir(tmp_path) == []


@pytest.mark.skipif(os.name != "posix", reason="needs signals")
def test_a_killed_writer(tmp_path: Path) -> None:
    """What a killed process leaves has a name that says so, and the next run is not in its way."""
    writer = endless(tmp_path)
    assert writer.stdout is not None
    assert writer.stdout.readline() == "writing\n"
    writer.kill()
    writer.communicate(timeout=120)
    (left,) = os.listdir(tmp_path)
    assert left.startswith(".frontend-sim-")
    assert left.endswith(".partial")
    save_record(RUN, tmp_path / "r.h5")
    assert sorted(os.listdir(tmp_path)) == [left, "r.h5"]
