"""NPY, NPZ, HDF5 and MAT: signal and time found in any shape, type and order."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import pytest
from recorded import points, rate, recording
from scipy.io import savemat

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.recording import npz

X = np.array([0.5, -1.25, 3.0, 0.125, 7.0])
T = np.arange(5) / 250.0


@pytest.mark.parametrize("dtype", ["f2", "f4", "<f8", ">f8", "i2", ">i4", "u1", "?", "i8"])
def test_npy_of_any_type(tmp_path: Path, dtype: str) -> None:
    """Numbers of every type and byte order are the same numbers in double precision."""
    data = np.array([0, 1, 1, 0, 1]).astype(dtype)
    np.save(tmp_path / "a.npy", data)
    assert np.array_equal(points(recording(tmp_path / "a.npy", rate=100)), data.astype(float))


@pytest.mark.parametrize("order", ["C", "F"])
@pytest.mark.parametrize("turned", [False, True])
def test_npy_of_several_channels(tmp_path: Path, order: Any, turned: bool) -> None:
    """Time runs along the longer axis in either memory order; columns are counted from 1."""
    table = np.column_stack([T, X, -X])
    np.save(tmp_path / "a.npy", np.array(table.T if turned else table, order=order))
    stimulus = recording(tmp_path / "a.npy", time=1, column=3)
    assert np.array_equal(points(stimulus), -X)
    assert rate(stimulus) == 250.0
    assert any("second axis" in note for note in stimulus.notes()) == turned
    assert np.array_equal(points(recording(tmp_path / "a.npy", rate=1, channel=2)), X)


@pytest.mark.parametrize("shape", [(5,), (1, 5), (5, 1)])
def test_a_row_or_a_column_is_one_signal(tmp_path: Path, shape: tuple[int, ...]) -> None:
    """Arrays of one channel need no choice, whichever way they lie."""
    np.save(tmp_path / "a.npy", X.reshape(shape))
    assert np.array_equal(points(recording(tmp_path / "a.npy", rate=1)), X)


def test_named_fields(tmp_path: Path) -> None:
    """A structured array is a table with names."""
    table = np.zeros(5, [("t", "f8"), ("x", "f4"), ("note", "U3")])
    table["t"], table["x"] = T, X
    np.save(tmp_path / "a.npy", table)
    stimulus = recording(tmp_path / "a.npy", time="t", column="x")
    assert np.array_equal(points(stimulus), X)
    with pytest.raises(RecordingError, match="holds no numbers"):
        recording(tmp_path / "a.npy", time="t", column="note").notes()


@pytest.mark.parametrize("save", [np.savez, np.savez_compressed])
@pytest.mark.parametrize("limit", [1 << 25, 16])
def test_npz(tmp_path: Path, save: Any, limit: int, monkeypatch: pytest.MonkeyPatch) -> None:
    """Members by name, compressed or not, held in memory or unpacked to a file."""
    monkeypatch.setattr(npz, "IN_MEMORY", limit)
    save(tmp_path / "a.npz", t=T, x=X, wide=np.column_stack([X, -X]))
    file = tmp_path / "a.npz"
    for keys in ({"column": "x"}, {"dataset": "x"}, {"dataset": "wide", "column": 1}):
        stimulus = recording(file, time="t", **keys)
        assert np.array_equal(points(stimulus), X)
        assert rate(stimulus) == 250.0
    with pytest.raises(RecordingError, match=r"several arrays .* 't' .* 'x' .* 'wide'"):
        recording(file, rate=1).notes()


@pytest.mark.skipif(os.name != "posix", reason="elsewhere a temporary file has a name")
def test_what_is_unpacked_of_an_npz_has_no_name(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A process that is killed leaves nothing: no name is there, not even while it is read."""
    scratch = tmp_path / "scratch"
    scratch.mkdir()
    monkeypatch.setattr(npz, "IN_MEMORY", 16)
    monkeypatch.setattr(tempfile, "tempdir", str(scratch))
    np.savez(tmp_path / "a.npz", x=X)
    opened, unpacked = tempfile.TemporaryFile, []

    def watched(**keys: Any) -> Any:
        unpacked.append(opened(**keys))
        return unpacked[-1]

    monkeypatch.setattr(tempfile, "TemporaryFile", watched)
    stimulus = recording(tmp_path / "a.npz", rate=250, column="x")
    assert np.array_equal(points(stimulus), X)
    assert unpacked
    assert list(scratch.iterdir()) == []


def test_npz_of_one_array_and_its_time(tmp_path: Path) -> None:
    """The only array beside the time needs no name."""
    np.savez(tmp_path / "a.npz", t=T, x=X)
    assert np.array_equal(points(recording(tmp_path / "a.npz", time="t")), X)


@pytest.mark.parametrize("unit", [np.array(["mV"], "S2"), np.array(["mV"], object)])
def test_an_hdf5_unit_may_be_an_array_of_one(tmp_path: Path, unit: Any) -> None:
    """A unit written as an array of one word is the word."""
    with h5py.File(tmp_path / "a.h5", "w") as out:
        out["x"] = X * 1e3
        out["x"].attrs["units"] = unit
    assert np.array_equal(points(recording(tmp_path / "a.h5", rate=1)), X)


def test_packed_hdf5_numbers_are_told_of(tmp_path: Path) -> None:
    """Numbers with a scale of their own in the file are played as they are, and the log says so."""
    with h5py.File(tmp_path / "a.h5", "w") as out:
        out["plain"], out["packed"] = X, X
        out["packed"].attrs["scale_factor"] = 0.5
    packed, plain = (recording(tmp_path / "a.h5", dataset=d, rate=1) for d in ("packed", "plain"))
    assert np.array_equal(points(packed), X)
    assert any("scale_factor" in note for note in packed.notes())
    assert not any("scale_factor" in note for note in plain.notes())


def test_hdf5(tmp_path: Path) -> None:
    """Datasets by path, chunked and compressed, of one or two dimensions, with their units."""
    with h5py.File(tmp_path / "a.h5", "w") as out:
        out["run/time"] = T * 1e3
        out["run/time"].attrs["units"] = "ms"
        out.create_dataset("run/x", data=X * 1e3, chunks=(2,), compression="gzip")
        out["run/x"].attrs["units"] = "mV"
        out["run/wide"] = np.column_stack([X, -X])
        out["alias"] = h5py.SoftLink("/run/x")
        out["run/note"] = "a word"
    for name in ("run/x", "/run/x", "alias"):
        stimulus = recording(tmp_path / "a.h5", dataset=name, time="run/time")
        assert np.array_equal(points(stimulus), X)
        assert rate(stimulus) == 250.0
    stimulus = recording(tmp_path / "a.h5", dataset="run/wide", channel=2, time="/run/time")
    assert np.array_equal(points(stimulus), -X)


@pytest.mark.parametrize("compressed", [False, True])
def test_mat(tmp_path: Path, compressed: bool) -> None:
    """Rows, columns and tables in a MAT v5 file, beside variables that hold no numbers."""
    content = {"t": T, "x": X, "wide": np.column_stack([X, -X]), "who": "me", "s": {"a": 1.0}}
    savemat(tmp_path / "a.mat", content, do_compression=compressed)
    for keys in ({"column": "x"}, {"dataset": "x"}, {"dataset": "wide", "column": 1}):
        assert np.array_equal(points(recording(tmp_path / "a.mat", time="t", **keys)), X)
    with pytest.raises(RecordingError, match="'s' is of class struct"):
        recording(tmp_path / "a.mat", dataset="s", rate=1).notes()


def test_mat_of_version_7_3_is_read_as_the_hdf5_that_it_is(tmp_path: Path) -> None:
    """A MAT file with an HDF5 mark after its text header is read as HDF5."""
    with h5py.File(tmp_path / "a.mat", "w", userblock_size=512) as out:
        out["x"] = X.reshape(1, 5)
    assert np.array_equal(points(recording(tmp_path / "a.mat", rate=1)), X)


def test_integer_ticks_as_time(tmp_path: Path) -> None:
    """Ticks of a timer in microseconds, far from zero, keep their exact rate."""
    ticks = 10**15 + 4000 * np.arange(5, dtype=np.int64)
    np.savez(tmp_path / "a.npz", t=ticks, x=X)
    assert rate(recording(tmp_path / "a.npz", time="t", time_unit="us")) == 250.0


def test_lengths_must_agree(tmp_path: Path) -> None:
    """A time of another length than the signal is an error with both lengths."""
    np.savez(tmp_path / "a.npz", t=T[:4], x=X)
    with pytest.raises(RecordingError, match="has 5 points, but array 't', the time, has 4"):
        recording(tmp_path / "a.npz", time="t", column="x").notes()
