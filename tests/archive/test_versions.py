"""Records of every format version stay readable."""

from __future__ import annotations

import shutil
from pathlib import Path

import h5py
import numpy as np
import pytest
from archived import made_run, scenario

from frontend_sim.archive import Record, Result, open_record, opening, rerun, save_record
from frontend_sim.errors import RecordError

VERSION_1 = Path(__file__).parent / "data" / "version_1.h5"
"""Made by the program when version 1 was new: a step of 3 V through 10 kohm and 100 nF, 8 bits.
It is never made anew; whoever changes the layout keeps a reader for it."""


def test_version_1_is_read() -> None:
    """A record of version 1 gives what its circuit gives: 3 V (1 - exp(-(t - 1 ms)/RC))."""
    with open_record(VERSION_1) as record:
        record.verify()
        assert record.format_version == 1
        assert record.title == "Invented: a step through a low pass"
        assert (record.seed, record.verdict, record.count) == (11, "holds", 40)
        since = record.time - 1e-3
        pin = np.where(since < 0.0, 0.0, -3.0 * np.expm1(-np.maximum(since, 0.0) / 1e-3))
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
