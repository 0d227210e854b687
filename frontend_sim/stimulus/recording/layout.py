"""How a text table is laid out: encoding, delimiter, decimal sign, preamble, header, units."""

from __future__ import annotations

import codecs
import re
from collections import Counter
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from frontend_sim.errors import RecordingError
from frontend_sim.quantities.counting import counted
from frontend_sim.stimulus.recording.cells import Kind, kind, split
from frontend_sim.stimulus.recording.header import find_header

SAMPLE = 1 << 18
"""Characters from the start of the file that the layout is found in."""
LINES = 1000
"""Lines of the sample that are looked at."""

DIALECTS: tuple[tuple[str | None, str], ...] = (
    (";", "."), ("\t", "."), (",", "."), ("|", "."), (None, "."),
    (";", ","), ("\t", ","), ("|", ","), (None, ","), (",", ","),
)  # fmt: skip
"""Delimiter (None: blanks) and decimal sign; of equals the first wins."""


@dataclass(frozen=True)
class Layout:
    """What was found out about a text table.

    Parameters
    ----------
    encoding : as Python names it
    delimiter : one character, or None for blanks
    decimal : "." or ","
    first_line : line of the first row of numbers, counted from 1
    columns : number of columns; further cells of a row must be empty
    cells : usual number of cells of a row, with those behind a trailing delimiter
    names, units : one for each column, "" where there is none
    notes : what was decided, for the log
    """

    encoding: str
    delimiter: str | None
    decimal: str
    first_line: int
    columns: int
    cells: int
    names: tuple[str, ...]
    units: tuple[str, ...]
    notes: tuple[str, ...]


def find_layout(file: Path) -> Layout:
    """Find out how a text table is laid out.

    Raises
    ------
    RecordingError
        If the file is empty, is no text, or has no row of numbers near its start.
    """
    encoding = _encoding(file)
    with file.open(encoding=encoding, errors="replace") as stream:
        text = stream.read(SAMPLE)
        if text and not text.endswith("\n"):
            text += stream.readline()
    lines = text.split("\n")[:LINES]
    if not text.strip():
        raise RecordingError(f"{file}: is empty; expected rows of numbers")
    # The last lines are those of the table, whatever stands above it.
    typical = lines[-200:]
    delimiter, decimal = max(DIALECTS, key=lambda dialect: _score(typical, *dialect))
    rows = [split(line, delimiter) for line in lines]
    kinds = [[kind(cell, decimal) for cell in row] for row in rows]
    first, cells = _first_row(kinds)
    if first is None:
        raise RecordingError(
            f"{file}: has no row of numbers in its first {counted(len(lines), 'line')}"
            + ("; is it more than a header?" if len(lines) < LINES else "")
        )
    first = _with_missing_points(lines, kinds, first)
    if decimal == "." and delimiter != "," and _only_commas(text):
        decimal = ","
    columns = cells
    names, units, header = find_header(lines[:first], delimiter, cells)
    if not names[-1]:
        columns = _columns(rows[first:], cells)
        names, units, header = find_header(lines[:first], delimiter, columns)
    return Layout(
        encoding, delimiter, decimal, first + 1, columns, cells, names, units,
        _notes(lines[:first], delimiter if cells > 1 else "", decimal, encoding, header)
        + _left_out(kinds[:first], cells, header),
    )  # fmt: skip


def _encoding(file: Path) -> str:
    with file.open("rb") as stream:
        head = stream.read(1 << 16)
    if head.startswith(codecs.BOM_UTF8):
        return "utf-8-sig"
    if head.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        return "utf-16"
    zeros = np.flatnonzero(np.frombuffer(head, np.uint8) == 0)
    if len(zeros) > 0.3 * len(head) and len(np.unique(zeros % 2)) == 1:
        return "utf-16-le" if zeros[0] % 2 else "utf-16-be"
    if len(zeros):
        raise RecordingError(f"{file}: is not a text table; it holds binary data")
    try:
        codecs.getincrementaldecoder("utf-8")().decode(head)
    except UnicodeDecodeError:
        return "cp1252"
    return "utf-8"


def _score(lines: list[str], delimiter: str | None, decimal: str) -> int:
    """Return how well a dialect fits: numbers less words, over the rows that have numbers."""
    rows = [[kind(cell, decimal) for cell in split(line, delimiter)] for line in lines]
    _, cells = _first_row(rows)
    alike = [row for row in rows if len(row) == cells and _holds_numbers(row)]
    words = sum(row.count("text") for row in alike)
    return sum(sum(map(_is_value, row)) for row in alike) - words


def _is_value(cell: Kind) -> bool:
    return cell in ("number", "date", "clock")


def _holds_numbers(row: list[Kind]) -> bool:
    return any(map(_is_value, row))


def _first_row(kinds: list[list[Kind]]) -> tuple[int | None, int]:
    """Return the first row of the table and its number of cells.

    It is the first row of the usual length that has no words in the columns which nearly always
    hold numbers.
    """
    lengths = Counter(len(row) for row in kinds if _holds_numbers(row))
    if not lengths:
        return None, 0
    most = max(lengths.values())
    cells = max(length for length, count in lengths.items() if count == most)
    alike = [i for i, row in enumerate(kinds) if len(row) == cells and _holds_numbers(row)]
    table = np.array([[cell == "text" for cell in kinds[i]] for i in alike])
    values = np.array([[_is_value(cell) for cell in kinds[i]] for i in alike])
    # In a short table the lines of a preamble weigh more.
    rare = 0.1 if len(alike) >= 20 else 0.5
    numeric = (table.mean(axis=0) < rare) & values.any(axis=0)
    if not numeric.any():  # few rows, and words in them: the last of them is taken as typical
        numeric = values[-1]
    clean = ~np.any(table[:, numeric], axis=1)
    return (alike[int(np.argmax(clean))] if clean.any() else None), cells


def _with_missing_points(lines: list[str], kinds: list[list[Kind]], first: int) -> int:
    """Return the first row, the rows right above that hold nothing but missing points counted in.

    Each of them is a point in time where the file has a rate. Dashes and empty cells alone may be a
    rule under the header, and beside dates a row without one is none of the table.
    """
    if not {"date", "clock"}.isdisjoint(kinds[first]):
        return first
    missing: list[Kind] = ["missing"] * len(kinds[first])
    while first and kinds[first - 1] == missing and re.search(r"[^\W_]", lines[first - 1]):
        first -= 1
    return first


def _left_out(kinds: list[list[Kind]], cells: int, header: int | None) -> tuple[str, ...]:
    """Tell of rows above the table that hold numbers, and words where the table has numbers."""
    lines = [
        str(line)
        for line, row in enumerate(kinds, 1)
        if line != header and len(row) == cells and _holds_numbers(row)
    ]
    if not lines:
        return ()
    return (f"line {', '.join(lines[:5])} above the table was left out, though it holds numbers",)


def _only_commas(text: str) -> bool:
    """Say whether whole numbers at the start hide that the decimal sign is a comma."""
    return bool(re.search(r"\d,\d", text)) and not re.search(r"\d\.\d", text)


def _columns(rows: list[list[str]], cells: int) -> int:
    """Return the number of columns, without empty ones behind a trailing delimiter."""
    alike = [row for row in rows if len(row) == cells]
    while cells > 1 and not any(row[cells - 1] for row in alike):
        cells -= 1
    return cells


def _notes(
    preamble: list[str], delimiter: str | None, decimal: str, encoding: str, header: int | None
) -> tuple[str, ...]:
    signs = {None: "blanks", "\t": "tab", ";": "semicolon", ",": "comma", "|": "bar"}
    parts = ["one column" if delimiter == "" else f"delimiter {signs[delimiter]}"]
    parts += ["decimal comma"] if decimal == "," else []
    parts += [f"names in line {header}"] if header else ["no header"]
    if preamble:
        parts += [f"numbers from line {len(preamble) + 1} on"]
    parts += [f"encoding {encoding}"] if encoding not in ("utf-8", "utf-8-sig") else []
    return ("text table: " + ", ".join(parts),)
