"""Quotes in text tables: cells that they enclose are read, stray ones are named with their line."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.recording.cells import well_quoted
from frontend_sim.stimulus.recording.recording import Recording


def read(folder: Path, row: str) -> np.ndarray:
    """Return the points of a table whose fourth row is given."""
    rows = [f"{k / 1000},{k},pipe" for k in range(8)]
    rows[3] = row
    file = folder / "table.csv"
    file.write_text("t,v,where\n" + "\n".join(rows) + "\n")
    recording = Recording.model_validate({"file": str(file), "time": "t", "column": "v"})
    return recording.drives((0,))[0].values(np.arange(8) / 1000)


@pytest.mark.parametrize(
    "row",
    [
        '"0.003","3","pipe"', '0.003, "3" ,pipe', '0.003,3,"a pipe, bent"', '0.003,3,pipe of 2"',
        '0.003,3,"the ""old"" pipe"',
    ],
)  # fmt: skip
def test_quoted_cells_and_inches_are_read(tmp_path, row):
    """A quote that closes at the end of its cell encloses it; one inside of words is an inch."""
    np.testing.assert_array_equal(read(tmp_path, row), np.arange(8.0))


@pytest.mark.parametrize(
    "row", ['0.003,"3,pipe', '0.003,""3,pipe', '0.003,"3"5,pipe', '"0.003,3,pipe', '0.003,3,"pipe']
)
def test_stray_quotes_are_named_with_their_line(tmp_path, row):
    """No number is made of what a stray quote leaves; the message has file, line and cure."""
    with pytest.raises(RecordingError, match=r"table\.csv, line 5.*mend or remove the line"):
        read(tmp_path, row)


def test_blanks_between_cells():
    """The same where blanks part the cells."""
    assert well_quoted('1.0 "2.0"\t"two words"', None)
    assert not well_quoted('1.0 "2.0', None)
    assert not well_quoted('1.0 "2"0', None)
