"""Records of every format version stay readable."""

from __future__ import annotations

import shutil
from pathlib import Path

import h5py
import numpy as np
import pytest
from archived import made_run, scenario

from frontend_sim.archive import (
    Record,
    Result,
    ScanRecord,
    open_record,
    opening,
    rerun,
    save_record,
)
from frontend_sim.errors import RecordError

DATA = Path(__file__).parent / "data"
"""A record of each version, made by a program that wrote it: a step of 3 V through 10 kohm and
100 nF, 8 bits. They are never made anew; whoever changes the layout keeps a reader for them."""

VERSION_1 = DATA / "version_1.h5"


def test_version_1_is_read() -> None:
    """A record of version 1 gives what its circuit gives: 3 V (1 - exp(-(t - 1 ms)/RC))."""
    with open_record(VERSION_1) as record:
        record.verify()
        assert record.format_version == 1
        assert record.title == "Invented: a step through a low pass"
        assert (record.seed, record.verdict, record.count) == (11, "holds", 40)
        pin = step(record.time)
        np.testing.assert_allclose(record.pin, pin, rtol=0.0, atol=1e-9 * 3.3)
        np.testing.assert_array_equal(record.codes, np.floor(pin / (3.3 / 256) + 0.5))
        np.testing.assert_array_equal(record.voltage, record.codes * (3.3 / 256))
        assert not record.overrange.any()
        assert list(record.waveform) == ["stimulus", "in/out"]
        np.testing.assert_array_equal(
            record.waveform["stimulus"], np.where(record.waveform_time < 1e-3, 0.0, 3.0)
        )
        assert record.notes == ("a note",)
        assert record.results == (
            Result("largest code", 233.0),
            Result("final value", 3.0, "V", 2.9, 0.1, "holds", "last conversion"),
        )
        assert record.scenario.adc.bits == 8
        assert record.scenario_text.startswith("format = 1")


def test_version_1_runs_again() -> None:
    """Today's program computes the codes of the old record."""
    with open_record(VERSION_1) as record:
        np.testing.assert_array_equal(rerun(record).codes, record.codes)


def step(time: np.ndarray) -> np.ndarray:
    """Return 3 V (1 - exp(-(t - 1 ms)/RC)), what all of the records have at the pin."""
    since = time - 1e-3
    return np.where(since < 0.0, 0.0, -3.0 * np.expm1(-np.maximum(since, 0.0) / 1e-3))


def assert_step(record: Record, numbers: np.ndarray, rate: float) -> None:
    """Conversions with these numbers, and none else, are those of the step and of the codes."""
    np.testing.assert_array_equal(record.numbers, numbers)
    np.testing.assert_allclose(record.time, numbers / rate, rtol=0.0, atol=1e-12)
    pin = step(numbers / rate)
    np.testing.assert_allclose(record.pin, pin, rtol=0.0, atol=1e-9 * 3.3)
    np.testing.assert_array_equal(record.codes, np.floor(pin / (3.3 / 256) + 0.5))


def test_version_2_is_read() -> None:
    """A scan of version 2 has the step in one channel and 1.5 V in the other."""
    with open_record(DATA / "version_2.h5") as record:
        assert isinstance(record, ScanRecord)
        record.verify()
        assert (record.format_version, record.seed, record.verdict) == (2, 11, "fails")
        moving, resting = record.channels["moving"], record.channels["resting"]
        assert_step(moving, np.arange(50), 5e3)
        np.testing.assert_array_equal(resting.pin, np.full(50, 1.5))
        assert moving.stretches is None
        assert [row.name for row in record.results] == ["skew of moving", "skew of resting"]
        again = rerun(record)
        for name, channel in record.channels.items():
            np.testing.assert_array_equal(again.channels[name].codes, channel.codes)


def test_version_3_is_read() -> None:
    """A part of version 3 has 1 ms before and behind the instant, 5 ms, at which a level fails."""
    with open_record(DATA / "version_3.h5") as record:
        assert isinstance(record, Record)
        record.verify()
        assert (record.format_version, record.seed, record.verdict) == (3, 11, "fails")
        assert_step(record, np.arange(40, 61), 10e3)
        assert (record.count, record.whole_count) == (21, 100)
        assert record.stretches is not None
        np.testing.assert_allclose(record.stretches.spans, [[4e-3, 6e-3]], rtol=1e-12, atol=0.0)
        assert record.stretches.around == 1e-3
        assert list(record.waveform) == ["stimulus", "in"]
        time = record.waveform_time
        np.testing.assert_allclose(time, np.arange(80, 121) / 20e3, rtol=1e-12, atol=0.0)
        np.testing.assert_allclose(record.waveform["in"], step(time), rtol=0.0, atol=1e-9 * 3.3)
        level = record.results[0]
        assert (level.name, level.verdict) == ("level", "fails")
        assert level.value == pytest.approx(float(step(np.array(5e-3))), abs=1e-9)
        assert len(rerun(record).codes) == 100


def test_version_4_is_read() -> None:
    """A part of a scan, version 4, has the same stretch of both channels."""
    with open_record(DATA / "version_4.h5") as record:
        assert isinstance(record, ScanRecord)
        record.verify()
        assert (record.format_version, record.seed, record.verdict) == (4, 11, "fails")
        moving, resting = record.channels["moving"], record.channels["resting"]
        assert_step(moving, np.arange(20, 31), 5e3)
        np.testing.assert_array_equal(resting.numbers, moving.numbers)
        np.testing.assert_array_equal(resting.pin, np.full(11, 1.5))
        assert (resting.count, resting.whole_count) == (11, 50)
        assert resting.stretches is not None
        np.testing.assert_allclose(resting.stretches.spans, [[4e-3, 6e-3]], rtol=1e-12, atol=0.0)


def test_each_version_has_a_record() -> None:
    """The table of readers and the records that are kept go together."""
    assert sorted(path.name for path in DATA.glob("version_*.h5")) == [
        f"version_{number}.h5" for number in sorted(opening.READERS)
    ]


class Record5(Record):
    """The reader of an imagined version 5, which knows something more."""

    @property
    def operator(self) -> str:
        """Return what version 1 did not have."""
        return str(self._file.attrs["operator"])


def test_a_new_version_gets_a_reader_of_its_own(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """With version 5 in the table, a record of each version finds its reader."""
    path = save_record(made_run(scenario(), 10), tmp_path / "r.h5")
    with h5py.File(path, "r+") as file:
        file.attrs["format_version"] = 5
        file.attrs["operator"] = "nobody"
    with pytest.raises(RecordError, match=r"version 5, .* reads versions up to 4: install a newer"):
        open_record(path)
    monkeypatch.setitem(opening.READERS, 5, Record5)
    with open_record(path) as record, open_record(VERSION_1) as old:
        assert isinstance(record, Record5)
        assert record.operator == "nobody"
        assert type(old) is Record
        assert old.count == 40


def test_a_record_from_a_read_only_place(tmp_path: Path) -> None:
    """Reading asks for no right to write."""
    path = tmp_path / "r.h5"
    shutil.copy(VERSION_1, path)
    path.chmod(0o444)
    with open_record(path) as record:
        record.verify()
