"""The file of a set: one row for each run, read back as it was written."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from datetime import UTC, datetime
from pathlib import Path

import h5py
import numpy as np
import pytest

from frontend_sim.archive import Result
from frontend_sim.archive.set_table import is_set, open_set
from frontend_sim.archive.set_writer import WIDEST, SetHead, SetRow, Shape, write_set
from frontend_sim.errors import RecordError

CREATED = datetime(2026, 1, 2, 3, 4, 5, tzinfo=UTC)


def head(**changes: object) -> SetHead:
    """Return the head of an invented set."""
    values: dict[str, object] = {
        "title": "Invented: ü",
        "seed": 2**62,
        "created": CREATED,
        "digest": "ab" * 32,
        "verdict": "fails",
        "complete": True,
        "planned": 3,
        "text": "base = 'x.toml'",
        "versions": {"frontend-sim": "1"},
        "bases": (("x", "text", {"a": 1}),),
    }
    return SetHead(**{**values, **changes})  # type: ignore[arg-type]  # the fields as above


def written(path: Path, head: SetHead, rows: Callable[[], Iterator[SetRow]]) -> None:
    """Write rows as a set."""
    write_set(path, head, Shape.of(rows(), {"chain[1].resistance": "ohm"}), rows())


def rows() -> Iterator[SetRow]:
    """Return three runs: one that holds, one that fails, one without a result."""
    for place, verdict in enumerate(("holds", "fails")):
        check = Result("noise", 1.0 + place, "LSB", 1.5, 0.5 - place, verdict, "m", "at most")  # type: ignore[arg-type]
        yield SetRow(
            {"name": f"run {place} ü", "verdict": verdict, "seed": 2**62 + place, "seconds": 0.5},
            {"chain[1].resistance": 1e4 + place, "adc.code_format": "offset"},
            (check, Result("noise: rms", 0.25, "LSB")),
        )
    yield SetRow({"name": "run 2", "verdict": "error", "error": "why"}, {})


def test_a_set_is_read_as_it_was_written(tmp_path: Path) -> None:
    """Columns, numbers, texts and head come back; what a run does not have is NaN or empty."""
    written(tmp_path / "set.h5", head(), rows)
    table = open_set(tmp_path)
    assert (table.title, table.seed, table.created) == ("Invented: ü", 2**62, CREATED)
    assert table.complete
    assert table.names == ("run 0 ü", "run 1 ü", "run 2")
    assert table.verdicts.tolist() == ["holds", "fails", "error"]
    assert table.runs["seed"].tolist() == [2**62, 2**62 + 1, 0]
    np.testing.assert_array_equal(
        np.asarray(table.parameters["chain[1].resistance"]), [1e4, 10001.0, math.nan]
    )
    assert table.parameters["adc.code_format"].tolist() == ["offset", "offset", ""]
    (check,) = table.checks
    assert (check.name, check.unit, check.bound) == ("noise", "LSB", "at most")
    np.testing.assert_array_equal(check.value, [1.0, 2.0, math.nan])
    np.testing.assert_array_equal(check.margin, [0.5, -0.5, math.nan])
    np.testing.assert_array_equal(check.limit, [1.5, 1.5, math.nan])
    assert check.verdict.tolist() == ["holds", "fails", ""]
    np.testing.assert_array_equal(table.measures["noise: rms"], [0.25, 0.25, math.nan])
    assert table.base_names == ("x",)
    assert table.base_values == ({"a": 1},)
    units = {column.name: column.unit for column in table.columns}
    assert units["chain[1].resistance"] == "ohm"
    assert table.record_path("run 2") is None
    assert is_set(tmp_path)


def test_a_general_reader_gets_the_table_in_one_call(tmp_path: Path) -> None:
    """The runs are one compound dataset with named columns."""
    written(tmp_path / "set.h5", head(), rows)
    with h5py.File(tmp_path / "set.h5") as file:
        runs = file["runs"][:]
    assert runs.dtype.names[:3] == ("name", "base", "verdict")
    assert runs["noise margin"].tolist()[:2] == [0.5, -0.5]


def test_names_of_checks_never_hide_other_columns(tmp_path: Path) -> None:
    """A check that is called like a column of every run has a column of its own."""

    def named() -> Iterator[SetRow]:
        results = (Result("verdict", 1.0, "V", 2.0, 1.0, "holds", "", "at most"),)
        yield SetRow({"name": "a", "verdict": "holds"}, {}, results)

    written(tmp_path / "set.h5", head(), named)
    table = open_set(tmp_path)
    assert table.verdicts.tolist() == ["holds"]
    assert table.checks[0].value.tolist() == [1.0]
    assert len({column.name for column in table.columns}) == len(table.columns)


def test_a_wide_set_has_several_tables_that_read_as_one(tmp_path: Path) -> None:
    """HDF5 cannot describe a row of any width; the parts are put side by side again."""
    keys = [f"chain[{k}].a parameter with a long name" for k in range(3 * WIDEST)]

    def wide() -> Iterator[SetRow]:
        for run in range(2):
            values: dict[str, float | str] = {key: float(run + k) for k, key in enumerate(keys)}
            yield SetRow({"name": f"run {run}"}, values)

    written(tmp_path / "set.h5", head(), wide)
    table = open_set(tmp_path)
    assert len(table.parameters) == len(keys)
    assert np.asarray(table.parameters[keys[-1]]).tolist() == [899.0, 900.0]


def test_a_set_without_runs_can_be_read(tmp_path: Path) -> None:
    """A night that was stopped before its first run leaves a table that is empty."""
    written(tmp_path / "set.h5", head(complete=False), lambda: iter(()))
    table = open_set(tmp_path)
    assert (len(table.runs), table.complete, table.checks) == (0, False, ())


def test_damage_and_foreign_files_are_told(tmp_path: Path) -> None:
    """No table is read from a file that is none, or that has changed since it was written."""
    path = tmp_path / "set.h5"
    with pytest.raises(RecordError, match="written by 'frontend-sim replay"):
        open_set(path)
    path.write_bytes(b"text")
    with pytest.raises(RecordError, match="not an HDF5 file"):
        open_set(path)
    written(path, head(), rows)
    with h5py.File(path, "r+") as file:
        file.attrs["title"] = "another"
    with pytest.raises(RecordError, match="differ from what was written"):
        open_set(path)
    with h5py.File(path, "r+") as file:
        file.attrs["format"] = "something"
    with pytest.raises(RecordError, match="no set of this program"):
        open_set(path)
    with h5py.File(path, "r+") as file:
        file.attrs["format"], file.attrs["format_version"] = "frontend_sim set", 9
    with pytest.raises(RecordError, match="install a newer one"):
        open_set(path)
    assert not is_set(tmp_path / "no")
