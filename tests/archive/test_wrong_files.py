"""What is no record, or no whole one, is told in one message with its remedy."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import h5py
import numpy as np
import pytest
from archived import made_run, scenario
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.archive import open_record, save_record
from frontend_sim.errors import RecordError

LONG = 70_000


@pytest.fixture(scope="module")
def good_file(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a good record with several chunks."""
    run = made_run(scenario(), LONG, ("stimulus",), ("a note that is found again",))
    return save_record(run, tmp_path_factory.mktemp("good") / "r.h5")


@pytest.fixture(scope="module")
def good(good_file: Path) -> bytes:
    """Return the bytes of the good record."""
    return good_file.read_bytes()


def foreign(path: Path) -> None:
    """Write HDF5 that is no record."""
    with h5py.File(path, "w") as file:
        file["x"] = 1


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda path: None, "No such file or directory; check the name"),
        (Path.mkdir, "is a directory; give the name of a record"),
        (Path.touch, "is empty; run its scenario again"),
        (lambda path: path.write_text("time,code\n0,1\n"), "is not an HDF5 file"),
        (foreign, "is HDF5, but no record of this program"),
    ],
)
def test_no_record(tmp_path: Path, make: Callable[[Path], object], message: str) -> None:
    """Missing, a folder, empty, another format, another program's HDF5."""
    path = tmp_path / "r.h5"
    make(path)
    with pytest.raises(RecordError, match=message) as caught:
        open_record(path)
    assert str(path) in str(caught.value)


@pytest.mark.parametrize("name", ["a\0b", "x" * 300])
def test_no_name_of_a_file(tmp_path: Path, name: str) -> None:
    """A name that no file can have is a clear message too."""
    with pytest.raises(RecordError, match="cannot be opened"):
        open_record(tmp_path / name)


def change_attribute(name: str, value: object) -> Callable[[h5py.File], None]:
    """Return a change of one root attribute."""

    def change(file: h5py.File) -> None:
        file.attrs[name] = value

    return change


def remove(name: str) -> Callable[[h5py.File], None]:
    """Return a change that takes one object out."""

    def change(file: h5py.File) -> None:
        del file[name]

    return change


def shorten(file: h5py.File) -> None:
    """Take away the last code."""
    file["adc/code"].resize(LONG - 1, axis=0)


def scalar_group(file: h5py.File) -> None:
    """Put one number where the conversions are expected."""
    del file["adc"]
    file["adc"] = 1.0


@pytest.mark.parametrize(
    ("change", "message"),
    [
        (change_attribute("format_version", 99), "version 99, written by frontend-sim .* newer"),
        (change_attribute("format_version", 0), "version 0"),
        (change_attribute("format_version", "x"), "no valid format_version"),
        (change_attribute("format_version", [1, 2]), "no valid format_version"),
        (change_attribute("format", "something else"), "no record of this program"),
        (change_attribute("format", np.zeros((2, 2))), "no record of this program"),
        (change_attribute("created", "yesterday"), "its head cannot be read"),
        (lambda file: file.attrs.__delitem__("seed"), "its head cannot be read"),
        (remove("adc/pin"), "its content cannot be read"),
        (remove("scenario"), "its content cannot be read"),
        (remove("waveform/time"), "its content cannot be read"),
        (shorten, "differ in length"),
        (scalar_group, "its content cannot be read"),
    ],
)
def test_not_a_whole_record(
    tmp_path: Path, good: bytes, change: Callable[[h5py.File], None], message: str
) -> None:
    """A record of the future, or one that somebody took apart, is refused when it is opened."""
    path = tmp_path / "r.h5"
    path.write_bytes(good)
    with h5py.File(path, "r+") as file:
        change(file)
    with pytest.raises(RecordError, match=message):
        open_record(path)


@pytest.mark.parametrize("text", ["no JSON", "[]", "{}", '{"scenario": 1, "files": 1}'])
def test_resolved_values_that_are_none(tmp_path: Path, good: bytes, text: str) -> None:
    """The arrays of a record are read even where its scenario cannot be built again."""
    path = tmp_path / "r.h5"
    path.write_bytes(good)
    with h5py.File(path, "r+") as file:
        file["resolved"][()] = text
    with open_record(path) as record:
        assert len(record.codes) == LONG
        with pytest.raises(RecordError, match="resolved cannot be read"):
            _ = record.scenario


@given(share=st.floats(0.0, 1.0, exclude_max=True))
@settings(max_examples=30, deadline=None)
def test_cut_off(good_file: Path, share: float) -> None:
    """A record that ends early, at any place, is never taken for a whole one."""
    path = good_file.with_name("cut.h5")
    with good_file.open("rb") as stream:
        path.write_bytes(stream.read(int(share * good_file.stat().st_size)))
    with pytest.raises(RecordError, match=r"is cut off|is empty|is not an HDF5 file|damaged"):
        open_record(path)


def test_a_flipped_bit_in_any_chunk_is_found(tmp_path: Path, good: bytes) -> None:
    """Fletcher's checksum tells, when the dataset is read, which one is damaged."""
    path = tmp_path / "r.h5"
    path.write_bytes(good)
    places = {}
    with h5py.File(path) as file:
        for group in ("adc", "waveform"):
            for name in file[group]:
                chunk = file[group][name].id.get_chunk_info(1 if group == "waveform" else 0)
                places[f"{group}/{name}"] = chunk.byte_offset + chunk.size // 2
    assert len(places) == 7
    for name, place in places.items():
        path.write_bytes(good[:place] + bytes([good[place] ^ 1]) + good[place + 1 :])
        message = f"{name} cannot be read .*damaged"
        with open_record(path) as record, pytest.raises(RecordError, match=message):
            record.verify()


@pytest.mark.parametrize(
    "text", [b"a note that is found again", b"input filter", b"Invented: a step", b"generated"]
)
def test_a_flipped_bit_in_a_text_is_found(tmp_path: Path, good: bytes, text: bytes) -> None:
    """HDF5 does not guard strings; the inventory of the record does."""
    place = good.index(text)
    path = tmp_path / "r.h5"
    path.write_bytes(good[:place] + bytes([good[place] ^ 1]) + good[place + 1 :])
    message = "differ from what was written"
    with open_record(path) as record, pytest.raises(RecordError, match=message):
        record.verify()


def test_a_good_record_verifies(tmp_path: Path, good: bytes) -> None:
    """The same bytes, untouched and elsewhere, are in order."""
    path = tmp_path / "r.h5"
    path.write_bytes(good)
    with open_record(path) as record:
        record.verify()
