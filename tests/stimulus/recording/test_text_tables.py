"""Text tables: every dialect that loggers write, and errors that name the line."""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from recorded import forget, points, rate, recording, write

from frontend_sim.errors import RecordingError
from frontend_sim.stimulus.recording import rows
from frontend_sim.stimulus.recording.layout import find_layout

NUMBERS = np.array([0.5, -1.25, 3.0, 0.125])

SAME = {
    "comma": "t,x\n0,0.5\n1,-1.25\n2,3\n3,0.125\n",
    "no line end at the end": "t,x\n0,0.5\n1,-1.25\n2,3\n3,0.125",
    "blank lines at the end": "t,x\n0,0.5\n1,-1.25\n2,3\n3,0.125\n\n\n",
    "blank lines inside": "t,x\n\n0,0.5\n1,-1.25\n\n2,3\n3,0.125\n",
    "semicolon": "t;x\n0;0.5\n1;-1.25\n2;3\n3;0.125\n",
    "semicolon and decimal comma": "t;x\n0;0,5\n1;-1,25\n2;3\n3;0,125\n",
    "tab": "t\tx\n0\t0.5\n1\t-1.25\n2\t3\n3\t0.125\n",
    "tab and decimal comma": "t\tx\n0\t0,5\n1\t-1,25\n2\t3,0\n3\t0,125\n",
    "blanks": "t   x\n0   0.5\n1  -1.25\n2   3\n3   0.125\n",
    "blanks in front": " t   x\n 0   0.5\n 1  -1.25\n 2   3\n 3   0.125\n",
    "blanks and decimal comma": "t x\n0 0,5\n1 -1,25\n2 3,0\n3 0,125\n",
    "bar": "t|x\n0|0.5\n1|-1.25\n2|3\n3|0.125\n",
    "comma and blanks": "t, x\n0, 0.5\n1, -1.25\n2, 3\n3, 0.125\n",
    "quotes": '"t","x"\n"0","0.5"\n"1","-1.25"\n"2","3"\n"3","0.125"\n',
    "quoted decimal comma": '"t","x"\n"0","0,5"\n"1","-1,25"\n"2","3,0"\n"3","0,125"\n',
    "delimiter at the end": "t;x;\n0;0.5;\n1;-1.25;\n2;3;\n3;0.125;\n",
    "delimiter at the end of rows only": "t;x\n0;0.5;\n1;-1.25;\n2;3;\n3;0.125;\n",
    "delimiter at the end of some": "t;x\n0;0.5;\n1;-1.25\n2;3;\n3;0.125;\n",
    "preamble": "Logger 7\nSerial,123\nStart: noon, local\n\nt,x\n0,0.5\n1,-1.25\n2,3\n3,0.125\n",
    "commented header": "# bench 3\n# t,x\n0,0.5\n1,-1.25\n2,3\n3,0.125\n",
    "comments inside": "t,x\n0,0.5\n# valve opens\n1,-1.25\n2,3\n3,0.125\n",
    "units row": "t,x\ns,V\n0,0.5\n1,-1.25\n2,3\n3,0.125\n",
    "units row in brackets": "t,x\n(s),(V)\n0,0.5\n1,-1.25\n2,3\n3,0.125\n",
    "units in the names": "t [s],x (V)\n0,0.5\n1,-1.25\n2,3\n3,0.125\n",
    "exponents": "t,x\n0,5e-1\n1,-12.5E-1\n2,+3\n3,1.25e-01\n",
    "text column": "t,x,state\n0,0.5,OK\n1,-1.25,OK\n2,3,\n3,0.125,late\n",
    "text column with an early word": "t,x,mark\n0,0.5,START\n1,-1.25,\n2,3,\n3,0.125,\n",
}


@pytest.mark.parametrize("text", SAME.values(), ids=SAME.keys())
@pytest.mark.parametrize("newline", ["\n", "\r\n", "\r"])
def test_every_dialect_gives_the_same_numbers(tmp_path: Path, text: str, newline: str) -> None:
    """The same table in each dialect, with each kind of line end, reads alike, names included."""
    file = write(tmp_path / "log.csv", text, newline=newline)
    stimulus = recording(file, time="t", column="x")
    assert np.array_equal(points(stimulus), NUMBERS)
    assert rate(stimulus) == 1.0


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be"])
def test_encodings(tmp_path: Path, encoding: str) -> None:
    """A byte order mark, and two bytes per sign, do not get into names or numbers."""
    file = write(tmp_path / "log.txt", SAME["semicolon and decimal comma"], encoding)
    assert np.array_equal(points(recording(file, time="t", column="x")), NUMBERS)


def test_older_encoding_of_a_unit(tmp_path: Path) -> None:
    """A micro sign in the encoding of old loggers still makes the unit microvolts."""
    file = write(tmp_path / "log.csv", "t [ms];x [µV]\n0;1\n1;2\n", "cp1252")
    stimulus = recording(file, time="t")
    assert np.allclose(points(stimulus), [1e-6, 2e-6], rtol=1e-15, atol=0.0)
    assert rate(stimulus) == 1000.0


def test_no_header_and_numbers_as_columns(tmp_path: Path) -> None:
    """Columns of a table without header are known by number, from 1."""
    file = write(tmp_path / "log.csv", "0,0.5,9\n1,-1.25,9\n2,3,9\n3,0.125,9\n")
    assert np.array_equal(points(recording(file, time=1, column=2)), NUMBERS)


def test_only_column_needs_no_name(tmp_path: Path) -> None:
    """One column and a rate are a whole recording."""
    file = write(tmp_path / "log.txt", "0.5\n-1.25\n3\n0.125\n")
    stimulus = recording(file, rate="2 kHz")
    assert np.array_equal(points(stimulus), NUMBERS)
    assert stimulus.known_length() == 0.002


def test_unit_of_the_file_is_used_and_told(tmp_path: Path) -> None:
    """Units row: ms and mV are honoured without being asked for, and the notes say so."""
    file = write(tmp_path / "log.csv", "t,x\nms,mV\n0,500\n1,-1250\n")
    stimulus = recording(file, time="t")
    assert np.array_equal(points(stimulus), [0.5, -1.25])
    assert rate(stimulus) == 1000.0
    notes = "\n".join(stimulus.notes())
    assert "'x': read in mV" in notes
    assert "'t': read in ms" in notes


@pytest.mark.parametrize("keys", [{"unit": "V"}, {"scale": 0.5, "offset": 1.0}])
def test_a_unit_of_another_quantity_needs_a_word(tmp_path: Path, keys: dict[str, Any]) -> None:
    """What the file's bars are in volts is said by unit or by scale; unknown units are counts."""
    file = write(tmp_path / "log.csv", "t,x\ns,bar\n0,2\n1,4\n")
    wanted = [2.0, 4.0] if "unit" in keys else [2.0, 3.0]
    assert np.array_equal(points(recording(file, time="t", **keys)), wanted)
    file = write(tmp_path / "log.csv", "t [ticks],x [adu]\n0,2\n1,4\n")
    stimulus = recording(file, time="t")
    assert np.array_equal(points(stimulus), [2.0, 4.0])
    notes = "\n".join(stimulus.notes())
    assert "unit 'adu', which is no voltage; its numbers are taken in V after scale" in notes
    assert "unit 'ticks', which is no time; its numbers are taken in s" in notes


def test_unit_asked_for_wins_over_the_file(tmp_path: Path) -> None:
    """A unit that is given is taken whatever the file says; scale and offset come on top."""
    file = write(tmp_path / "log.csv", "t,x\nms,mV\n0,500\n1,-1250\n")
    stimulus = recording(file, time="t", unit="V", time_unit="s", scale=2, offset="1 V")
    assert np.array_equal(points(stimulus), [1001.0, -2499.0])
    assert rate(stimulus) == 1.0


def test_unit_that_is_no_voltage_is_told(tmp_path: Path) -> None:
    """A column in bar keeps its numbers, and the notes say that they are taken as volts."""
    file = write(tmp_path / "log.csv", "t,p\ns,bar\n0,1\n1,2\n")
    stimulus = recording(file, time="t", scale=0.5)
    assert np.array_equal(points(stimulus), [0.5, 1.0])
    assert any("'bar'" in note and "no voltage" in note for note in stimulus.notes())


def test_a_row_of_numbers_above_the_table_is_told(tmp_path: Path) -> None:
    """A first row with a word where numbers are expected is left out, but never in silence."""
    file = write(tmp_path / "log.csv", "t,x\n0,start\n1,1\n2,2\n3,3\n")
    stimulus = recording(file, time=1, column=2)
    assert np.array_equal(points(stimulus), [1.0, 2.0, 3.0])
    assert any("line 2 above the table was left out" in note for note in stimulus.notes())


def test_dates_become_seconds(tmp_path: Path) -> None:
    """ISO date-times, with zones and fractions, are seconds after the first."""
    rows = "2030-01-31T23:59:59.500Z,1\n2030-02-01T00:00:00.000Z,2\n2030-02-01T00:00:00.500Z,4\n"
    plain = write(tmp_path / "plain.csv", "when,x\n" + rows)
    zoned = write(
        tmp_path / "zoned.csv",
        "when;x\n2030-02-01 00:59:59,5+01:00;1\n2030-02-01 01:00:00,0+01:00;2\n"
        "2030-02-01 01:00:00,5+01:00;4\n",
    )
    clock = write(tmp_path / "clock.csv", "when;x\n10:00:59.5;1\n10:01:00.0;2\n10:01:00.5;4\n")
    for file in (plain, zoned, clock):
        stimulus = recording(file, time="when", column="x")
        assert rate(stimulus) == 2.0
        assert np.array_equal(points(stimulus), [1.0, 2.0, 4.0])


def test_digits_are_read_to_the_nearest_double(tmp_path: Path) -> None:
    """Numbers printed in full come back bit for bit, in compiled code and row by row."""
    numbers = np.random.default_rng(1).standard_normal(500) * 10.0 ** np.linspace(-250.0, 11.0, 500)
    text = "\n".join(repr(float(number)) for number in numbers)
    fast = write(tmp_path / "fast.txt", text)
    slow = write(tmp_path / "slow.txt", "# a comment\n" + text.replace("\n", "\n# again\n"))
    for file in (fast, slow):
        assert np.array_equal(points(recording(file, rate=1.0)), numbers)


def test_blocks_never_show(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A table parsed in tiny blocks, regular and irregular ones, is the same table."""
    lines = [f"{i / 100:.2f},{i % 7}" for i in range(300)]
    lines[50], lines[170] = "", "# comment"
    file = write(tmp_path / "log.csv", "t,x\n" + "\n".join(lines))
    whole = points(recording(file, time="t", timestamps="uniform"))
    monkeypatch.setattr(rows, "CHUNK", 64)
    forget()
    again = points(recording(file, time="t", timestamps="uniform"))
    assert len(whole) == 298
    assert np.array_equal(whole, again)


@pytest.mark.parametrize("chunk", [32, 1 << 22])
def test_the_line_of_an_error_is_the_line_of_the_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, chunk: int
) -> None:
    """The line is counted over preamble, blank lines and comments, in small and large blocks."""
    monkeypatch.setattr(rows, "CHUNK", chunk)
    text = "made by hand\nt,x\n0,1\n1,2\n\n# pause\n2,3\n3,4\n4,oops\n5,6\n"
    file = write(tmp_path / "log.csv", text)
    with pytest.raises(RecordingError, match=r"line 9, column 2 'x': .* given 'oops'"):
        recording(file, time="t").known_length()


def test_line_of_a_duplicate_is_known_without_parsing_again(tmp_path: Path) -> None:
    """Time stamps that repeat are told by line, counted over skipped lines."""
    file = write(tmp_path / "log.csv", "t,x\n0,1\n\n1,2\n# pause\n1,3\n2,4\n")
    with pytest.raises(RecordingError, match=r"1 point repeats .*\(line 6\)"):
        recording(file, time="t").known_length()


@settings(max_examples=150, deadline=None)
@given(
    numbers=st.lists(st.floats(-1e12, 1e12, width=64), min_size=2, max_size=30),
    delimiter=st.sampled_from([",", ";", "\t", " "]),
    decimal=st.sampled_from([".", ","]),
    trailing=st.booleans(),
    quoted=st.booleans(),
    header=st.booleans(),
    preamble=st.lists(st.sampled_from(["", "a note", "Device: X", "# x"]), max_size=3),
    newline=st.sampled_from(["\n", "\r\n"]),
)
def test_tables_round_trip(
    numbers: list[float], delimiter: str, decimal: str, trailing: bool, quoted: bool,
    header: bool, preamble: list[str], newline: str,
) -> None:  # fmt: skip
    """Whatever the dialect, what was written is what is read, bit for bit."""
    if decimal == "," and delimiter == ",":
        quoted = True
    if delimiter == " ":
        trailing = False

    def cell(text: str) -> str:
        return f'"{text}"' if quoted else text

    def row(cells: list[str]) -> str:
        return delimiter.join(map(cell, cells)) + (delimiter if trailing else "")

    body = [row([str(i), repr(number).replace(".", decimal)]) for i, number in enumerate(numbers)]
    lines = [*preamble, *([row(["t", "x"])] if header else []), *body]
    keys = {"time": "t", "column": "x"} if header else {"time": 1, "column": 2}
    with tempfile.TemporaryDirectory() as folder:
        file = write(Path(folder, "log.csv"), "\n".join(lines) + "\n", newline=newline)
        read = points(recording(file, **keys))
    assert np.array_equal(read, numbers)


def test_a_table_of_one_column_has_no_delimiter(tmp_path: Path) -> None:
    """None is told where none is."""
    assert find_layout(write(tmp_path / "log.csv", "x\n1.5\n2.5\n")).notes == (
        "text table: one column, names in line 1, numbers from line 2 on",
    )
