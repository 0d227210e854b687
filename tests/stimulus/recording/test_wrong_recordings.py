"""Wrong files and wrong keys: one error that names the file, the place, and the cure."""

from __future__ import annotations

import os
import pickle
import struct
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from recorded import recording, values, wav, write
from scipy.io import savemat

from frontend_sim.errors import RecordingError, ScenarioError
from frontend_sim.stimulus.recording import READERS, Recording

X = np.arange(6.0)
Case = tuple[str, str | bytes | Callable[[Path], object], dict[str, Any], str]


def _hdf5(content: dict[str, object]) -> Callable[[Path], object]:
    def make(file: Path) -> None:
        with h5py.File(file, "w") as out:
            for name, value in content.items():
                out[name] = value

    return make


def _npy(array: object) -> Callable[[Path], object]:
    return lambda file: np.save(file, np.asarray(array), allow_pickle=True)


def _npz(**arrays: object) -> Callable[[Path], object]:
    return lambda file: np.savez(file, **{k: np.asarray(v) for k, v in arrays.items()})


def _cut(make: Callable[[Path], object], share: float) -> Callable[[Path], object]:
    def cut(file: Path) -> None:
        make(file)
        content = file.read_bytes()
        file.write_bytes(content[: int(len(content) * share)])

    return cut


TABLE = "t,pressure,flow\n0,1,2\n1,2,3\n2,3,4\n"
HEADER = wav(b"")[:36]

CASES: list[Case] = [
    ("a.csv", "", {"rate": 1}, "is empty"),
    ("a.csv", "\n\n \n", {"rate": 1}, "is empty"),
    ("a.csv", "t,x\n", {"rate": 1}, "no row of numbers in its first 2 lines; is it more"),
    ("a.csv", "words\nmore words\n", {"rate": 1}, "no row of numbers"),
    ("a.csv", bytes(range(256)), {"rate": 1}, "binary data"),
    ("a.csv", TABLE, {}, "several columns may be the signal.* 2 'pressure', 3 'flow'"),
    ("a.csv", TABLE, {"column": "flow"}, "neither time nor rate .* are 1 't', 2 'pressure'"),
    ("a.csv", TABLE, {"column": "presure", "rate": 1}, "'presure'.*did you mean 'pressure'"),
    ("a.csv", TABLE, {"column": 4, "rate": 1}, r"column = 4, but .* \(counted from 1\)"),
    ("a.csv", TABLE, {"column": "3", "rate": 1}, "did you mean column = 3, without quotes"),
    ("a.csv", TABLE, {"column": "flow", "time": "time"}, "no column 'time' for time"),
    ("a.csv", TABLE, {"column": "t", "time": "t"}, "both as time and as column"),
    ("a.csv", TABLE, {"column": "flow", "rate": 1, "dataset": "x"}, "a text table has no datasets"),
    ("a.csv", "1,2\n3,4\n", {"column": "x", "rate": 1}, "have no names; give a number from 1 to 2"),
    ("a.csv", "t,x,x\n0,1,2\n1,2,3\n", {"column": "x", "time": "t"}, "columns 2 and 3 have"),
    ("a.csv", "t\n0\n1\n", {"time": "t"}, "only column is the time"),
    ("a.csv", "t,x\n0,1\n1,two\n2,3\n", {"time": "t"}, "line 3, column 2 'x': .* given 'two'"),
    ("a.csv", "t,x\n0,1\nsoon,2\n2,3\n", {"time": "t"}, "line 3, column 1 't': .* given 'soon'"),
    ("a.csv", "t,x\n0,1\n1\n2,3\n", {"time": "t"}, "line 3: has 1 cell, but .* have 2"),
    ("a.csv", "t,x\n0,1\n1,2,3\n2,3\n", {"time": "t"}, "line 3: has 3 cells"),
    ("a.csv", "t;x\n0;1.5\n1;2,5\n2;3.5\n", {"time": "t"}, "given '2,5'; is it a decimal comma"),
    ("a.csv", "t,x\n0,1\n1,2\nthe end\n", {"time": "t"}, "line 4: has 1 cell,"),
    ("a.csv", "t,x\n0,1\n", {"time": "t"}, "single point with a time has no length"),
    ("a.csv", "t,x\n5,1\n5,2\n", {"time": "t", "timestamps": "uniform"}, "all .* equal"),
    ("a.csv", "t,x\n0,1\n2,2\n1,3\n", {"time": "t"}, "line 4: time goes back from 2 to 1"),
    ("a.csv", "t,x\n23:59:59,1\n00:00:01,2\n", {"time": "t"}, "midnight need a date"),
    ("a.csv", "t,x\n0,1\n0,2\n1,3\n", {"time": "t"}, r"1 point repeats .*\(line 3\); set dupl"),
    ("a.csv", "t,x\n0,1\n1,\n2,3\n", {"time": "t"}, r"1 of 3 .* no value \(line 3\); set missing"),
    ("a.csv", "t,x\n10:00:00,1\n10:61:xx,2\n", {"time": "t"}, "line 3, .*expected an instant"),
    ("a.csv", "t,x\n2030-01-01 10:00,1\n2030-13-01 10:00,2\n", {"time": "t"}, "line 3.*an instant"),
    ("a.csv", "t,x\n10:00:00,1\n10:00:01,2\n", {"time": "t", "time_unit": "ms"}, "leave out"),
    ("a.csv", "t,x\n0,1\n1,1e300\n2,3\n", {"time": "t"}, "line 3: .*reaches 1e.300.*no voltage"),
    ("a.csv", "t,x\n0,1\n1e300,2\n", {"time": "t"}, "which is no time of a recording"),
    ("a.csv", "t,x [mA]\n0,1\n1,2\n", {"time": "t"},
     "unit 'mA', which is no voltage; give unit, \"V\" if .*, or scale, which says what 1 mA is"),
    ("a.csv", "t [m],x\n0,1\n1,2\n", {"time": "t"}, "unit 'm', which is no time; give time_unit"),
    ("a.csv", "t,x [m/s^2]\n0,1\n1,2\n", {"time": "t"}, "unit 'm/s.2', which is no voltage"),
    ("a.csv", "t,x\ns,%\n0,1\n1,2\n", {"time": "t"}, "unit '%', which is no voltage"),
    ("a.csv", b"\x93NUMPY\x01\x00", {"rate": 1}, "is an NPY file, not what .csv .* rename"),
    ("a.csv", b"PK\x03\x04rest of it", {"rate": 1}, "is a ZIP archive .*spreadsheet"),
    ("a.csv", b"\x1f\x8brest", {"rate": 1}, r"compressed file \(gzip\)"),
    ("a.xlsx", b"PK\x03\x04", {"rate": 1}, "suffix '.xlsx' is not known; known are .csv"),
    ("noname", "1\n2\n", {"rate": 1}, "suffix '' is not known"),
    ("a.wav", HEADER[:20], {}, "cut off"),
    ("a.wav", HEADER, {}, "holds no data"),
    ("a.wav", b"text, not sound", {}, "is no WAV file"),
    ("a.wav", b"", {}, "is empty"),
    ("a.wav", wav(b""), {}, "holds no frame"),
    ("a.wav", wav(bytes(10), promised=2000), {}, "truncated: .*1,000 frames, there: 5"),
    ("a.wav", wav(bytes(8), codec=85), {}, r"compressed \(MPEG layer 3\)"),
    ("a.wav", wav(bytes(8), codec=0x1234), {}, r"compressed \(code 0x1234\)"),
    ("a.wav", wav(bytes(8), bits=64), {}, "64 bits.* cannot be read"),
    ("a.wav", wav(bytes(8), codec=3, bits=16), {}, "cannot be read"),
    ("a.wav", wav(bytes(8), channels=0), {}, "0 channels"),
    ("a.wav", wav(bytes(8), rate=0), {}, "0 Hz cannot be read"),
    ("a.wav", wav(bytes(8), channels=2), {}, "several channels, choose one with channel = 1 to 2"),
    ("a.wav", wav(bytes(8)), {"channel": 2}, "no channel 2"),
    ("a.wav", wav(bytes(8)), {"column": "left"}, "no channel 'left'"),
    ("a.wav", wav(bytes(8)), {"time": 1}, "leave out dataset and time"),
    ("a.wav", b"RIFX" + wav(bytes(8))[4:], {}, "form b'RIFX'"),
    ("a.wav", wav(b"", before=b"data" + struct.pack("<I", 0)), {}, "no frame"),
    ("a.npy", _npy(np.array([{"a": 1}], dtype=object)), {"rate": 1}, "pickle.*refused"),
    ("a.npy", pickle.dumps([1.0, 2.0]), {"rate": 1}, "is no NPY file"),
    ("a.npy", _npy([1j, 2j]), {"rate": 1}, "is complex"),
    ("a.npy", _npy(np.zeros((2, 2, 2))), {"rate": 1}, "has 3 dimensions"),
    ("a.npy", _npy(3.0), {"rate": 1}, "has 0 dimensions"),
    ("a.npy", _npy(["a", "b"]), {"rate": 1}, "holds no numbers"),
    ("a.npy", _npy(np.empty(0)), {"rate": 1}, "is empty|cut off after"),
    ("a.npy", _cut(_npy(np.arange(1000.0)), 0.5), {"rate": 1}, "is damaged, or cut off after"),
    ("a.npy", b"\x93NUMPY\x01\x00", {"rate": 1}, "is damaged, or cut off after"),
    ("a.npy", _npy(X), {"rate": 1, "dataset": "x"}, "leave out dataset"),
    ("a.npy", _npy(X), {}, "neither time nor rate"),
    ("a.npy", _npy(np.zeros((9, 3))), {"rate": 1}, "several columns.*1, 2, 3"),
    ("a.npy", _npy([1.0, np.nan]), {"rate": 1}, r"no value \(index 1\)"),
    ("a.npz", _npz(t=X, x=X), {"rate": 1}, "several arrays may be the signal"),
    ("a.npz", _npz(x=X), {"dataset": "y", "rate": 1}, "no array 'y' for dataset; known are x"),
    ("a.npz", _npz(x=X), {"column": "x", "time": "t"}, "'t'.* time; known are x|no column 't'"),
    ("a.npz", _npz(x=np.array([None])), {"rate": 1}, "pickle"),
    ("a.npz", _npz(), {"rate": 1}, "empty ZIP|no array of numbers"),
    ("a.npz", _cut(_npz(x=np.arange(500.0)), 0.6), {"rate": 1}, "damaged NPZ"),
    ("a.npz", _npz(t=X[:3], x=X), {"column": "x", "time": "t"}, "has 6 points, but .* has 3"),
    ("a.npz", _npz(t=np.zeros((6, 2)), x=X), {"column": "x", "time": "t"}, "several columns"),
    ("a.h5", "not HDF5 at all\n" * 40, {"rate": 1}, "is no HDF5 file"),
    ("a.h5", _cut(_hdf5({"x": np.arange(5000.0)}), 0.7), {"rate": 1}, "damaged one: .*truncated"),
    ("a.h5", _hdf5({"run/x": X}), {"dataset": "run/y", "rate": 1}, "did you mean 'run/x'"),
    ("a.h5", _hdf5({"run/x": X}), {"dataset": "run", "rate": 1}, "is a group.*holds run/x"),
    ("a.h5", _hdf5({"run/x": X, "run/y": X}), {"rate": 1}, "several arrays.*'run/x'"),
    ("a.h5", _hdf5({"x": "a word"}), {"rate": 1}, "holds no|objects"),
    ("a.h5", _hdf5({}), {"rate": 1}, "holds no array of numbers"),
    ("a.h5", _hdf5({"x": np.zeros((2, 3, 4))}), {"dataset": "x", "rate": 1}, "3 dimensions"),
    ("a.mat", "nothing of the kind" * 20, {"rate": 1}, "is no MAT file"),
    ("a.mat", lambda f: savemat(f, {"x": X, "y": X}), {"rate": 1}, "several arrays"),
    ("a.mat", lambda f: savemat(f, {"x": X * 1j}), {"rate": 1}, "is complex"),
    ("a.mat", lambda f: savemat(f, {"x": "word"}), {"rate": 1}, "is of class char"),
    ("a.mat", lambda f: savemat(f, {"x": X}), {"dataset": "z", "rate": 1}, "no array 'z'"),
    ("a.mat", _cut(lambda f: savemat(f, {"x": np.ones(900)}), 0.5), {"rate": 1}, "read|no MAT"),
]  # fmt: skip


@pytest.mark.parametrize(
    ("name", "content", "keys", "message"), CASES, ids=[f"{i}-{c[0]}" for i, c in enumerate(CASES)]
)
def test_one_message(
    tmp_path: Path, name: str, content: Any, keys: dict[str, Any], message: str
) -> None:
    """Each wrong file gives one RecordingError on one line, with the file's name and the fault."""
    file = tmp_path / name
    if callable(content):
        content(file)
    else:
        file.write_bytes(content.encode() if isinstance(content, str) else content)
    stimulus = recording(file, **keys)
    with pytest.raises(RecordingError, match=message) as raised:
        values(stimulus, np.array([0.0, 1.0]))
    assert str(file) in str(raised.value)
    assert "\n" not in str(raised.value)
    assert raised.value.__suppress_context__ or raised.value.__context__ is None


@pytest.mark.parametrize(
    ("keys", "message"),
    [
        ({"time": "t", "rate": 1}, "time and rate are both given"),
        ({"rate": 0}, "above 0 Hz"),
        ({"rate": -5}, "above 0 Hz"),
        ({"rate": "5 V"}, "frequency"),
        ({"rate": 1, "column": 0}, "counted from 1"),
        ({"rate": 1, "column": True}, "counted from 1"),
        ({"rate": 1, "column": ""}, "counted from 1"),
        ({"rate": 1, "channel": 0}, "greater than or equal to 1"),
        ({"rate": 1, "column": 1, "channel": 1}, "both given; they mean the same"),
        ({"rate": 1, "unit": "furlongs"}, "not a unit of"),
        ({"time": "t", "time_unit": "mV"}, "not a unit of time"),
        ({"rate": 1, "time_unit": "ms"}, "time_unit means nothing without a time column"),
        ({"rate": 1, "duplicates": "first"}, "duplicates means nothing without"),
        ({"rate": 1, "timestamps": "uniform"}, "timestamps means nothing without"),
        ({"rate": 1, "scale": 0}, "scale of 0"),
        ({"rate": 1, "speed": 0}, "above 0"),
        ({"rate": 1, "start": 2, "end": 1}, "end, 1 s, must be after start, 2 s"),
        ({"rate": 1, "between": "spline"}, "'hold' or 'line'"),
        ({"rate": 1, "missing": "guess"}, "missing"),
        ({"rate": 1, "package": "no_such_package"}, "no package 'no_such_package' is installed"),
        ({"rate": 1, "package": "../up"}, "no package"),
        ({"rate": 1, "colum": 2}, "colum"),
    ],
)
def test_wrong_keys(tmp_path: Path, keys: dict[str, Any], message: str) -> None:
    """Keys that contradict each other or lie outside of their limits never make a recording."""
    with pytest.raises(ScenarioError, match=message):
        recording(tmp_path / "a.csv", **keys)


def test_no_such_file_names_the_nearest(tmp_path: Path) -> None:
    """A file that is not there is told with the nearest name beside it, or its folder."""
    write(tmp_path / "valve_slam.csv", TABLE)
    with pytest.raises(RecordingError, match=r"no such file; did you mean 'valve_slam.csv'"):
        recording(tmp_path / "valve-slam.csv", rate=1).notes()
    with pytest.raises(RecordingError, match=r"no such file; the folder .* cannot be read"):
        recording(tmp_path / "nowhere" / "a.csv", rate=1).notes()


def test_what_is_no_file(tmp_path: Path) -> None:
    """Directories, devices and impossible names are refused before anything is read."""
    with pytest.raises(RecordingError, match="is a directory"):
        recording(tmp_path, rate=1).notes()
    with pytest.raises(RecordingError, match="cannot be a file"):
        recording(Path("a\0b.csv"), rate=1).notes()
    if hasattr(os, "mkfifo"):
        os.mkfifo(tmp_path / "a.csv")
        with pytest.raises(RecordingError, match="is no regular file"):
            recording(tmp_path / "a.csv", rate=1).notes()


def test_a_file_that_may_not_be_read(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Missing permission is told as such (simulated: an administrator may read everything)."""

    def refuse(*_: object, **__: object) -> None:
        raise PermissionError(13, "Permission denied")

    file = write(tmp_path / "a.csv", TABLE)
    stimulus = recording(file, column=2, rate=1)
    monkeypatch.setattr(Path, "open", refuse)
    with pytest.raises(RecordingError, match="may not be read"):
        stimulus.notes()


@settings(max_examples=300, deadline=None)
@given(
    # Damaged MAT files are left out: the library that reads them can crash the interpreter.
    suffix=st.sampled_from(sorted(set(READERS) - {".mat"})),
    content=st.one_of(
        st.binary(max_size=300),
        st.text(st.sampled_from('0123456789.,;-eE \t\n"#:TxZ'), max_size=200).map(str.encode),
        st.binary(max_size=200).map(lambda tail: b"\x93NUMPY\x01\x00" + tail),
        st.binary(max_size=200).map(lambda tail: HEADER + tail),
        st.binary(max_size=200).map(lambda tail: b"RIFF0000WAVEfmt " + tail),
        st.binary(max_size=200).map(lambda tail: b"PK\x03\x04" + tail),
        st.binary(max_size=200).map(lambda tail: b"\x89HDF\r\n\x1a\n" + tail),
    ),
    keys=st.sampled_from(
        [
            {"rate": 1},
            {"time": 1},
            {"time": 1, "column": 2, "duplicates": "mean", "missing": "line"},
        ]
    ),
)
def test_any_content_gives_a_signal_or_one_error(
    suffix: str, content: bytes, keys: dict[str, Any]
) -> None:
    """Whatever bytes a file holds, it is read or refused; no other error ever comes out."""
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder, "a" + suffix)
        file.write_bytes(content)
        found = _outcome(recording(file, **keys))
    if isinstance(found, str):
        assert "\n" not in found
    else:
        assert np.all(np.isfinite(found))


def _outcome(stimulus: Recording) -> str | NDArray[np.float64]:
    """Return the signal at two instants, or the message of the one error that may come."""
    try:
        return values(stimulus, np.array([0.0, 0.5]))
    except RecordingError as error:
        return str(error)
