"""The rows of a text table become numbers, block by block."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import RecordingError
from frontend_sim.quantities.counting import counted
from frontend_sim.stimulus.recording.cells import (
    dates_at_once,
    kind,
    nanoseconds,
    number,
    split,
    well_quoted,
)
from frontend_sim.stimulus.recording.columns import label
from frontend_sim.stimulus.recording.layout import Layout
from frontend_sim.stimulus.recording.printed_digits import PrintedDigits
from frontend_sim.stimulus.recording.series import Real, Series
from frontend_sim.stimulus.recording.store import Stored

CHUNK = 1 << 22
"""Characters that are parsed at once."""


@dataclass
class Rows:
    """Parses the rows in order, and remembers in which line each stood."""

    file: Path
    layout: Layout
    signal: int
    time: int | None
    digits: PrintedDigits = field(default_factory=PrintedDigits)
    instants: bool = False
    reference: int | None = None
    comments: int = 0
    _starts: list[int] = field(default_factory=list)
    _lines: list[NDArray[np.int64]] = field(default_factory=list)

    def series(self, column: int, stored: Stored) -> Series:
        """Return a parsed column."""
        instants = column == self.time and self.instants
        return Series(
            label(self.layout.names, column),
            "s" if instants else self.layout.units[column],
            stored.count,
            stored.read,
            self.digits.half_step,
            lambda position: f"line {self._line(position)}",
            absolute=instants,
        )

    def _line(self, position: int) -> int:
        block = bisect_right(self._starts, position) - 1
        lines, offset = self._lines[block], position - self._starts[block]
        # A block without gaps keeps only the line of its first row.
        return int(lines[offset]) if len(lines) > 1 else int(lines[0]) + offset

    def blocks(self) -> Iterator[tuple[Real, ...]]:
        """Parse the table and return blocks of signal and time."""
        count, line = 0, self.layout.first_line
        with self.file.open(encoding=self.layout.encoding, errors="replace") as stream:
            for _ in range(line - 1):
                stream.readline()
            while text := stream.read(CHUNK):
                if not text.endswith("\n"):
                    text += stream.readline()
                ends = text.count("\n") + (not text.endswith("\n"))
                text = text.rstrip("\n")
                lines = text.split("\n")
                if not count:
                    self._look_at(lines[0])
                self._learn(lines, 500 if not count else 50)
                parsed = self._at_once(text, lines)
                if parsed is None:
                    parsed, at = self._one_by_one(lines, line)
                else:
                    at = np.array([line])
                self._starts.append(count)
                self._lines.append(at)
                count += len(parsed[0])
                line += ends
                yield parsed

    def _look_at(self, first: str) -> None:
        """Learn from the first row whether the time is an instant or a number."""
        if self.time is not None:
            cell = split(first, self.layout.delimiter)[self.time]
            self.instants = kind(cell, self.layout.decimal) in ("date", "clock")
            self.reference = nanoseconds(cell)

    def _learn(self, lines: list[str], most: int) -> None:
        if self.time is None:
            return
        step = max(len(lines) // most, 1)
        rows = (split(row, self.layout.delimiter) for row in (*lines[::step], lines[-1]))
        cells = (row[self.time] for row in rows if len(row) > self.time)
        plain = self.instants or self.layout.decimal == "."
        self.digits.see(cell if plain else cell.replace(",", ".") for cell in cells)

    def _at_once(self, text: str, lines: list[str]) -> tuple[Real, ...] | None:
        """Parse a block in compiled code; None if any row of it is out of the ordinary."""
        layout = self.layout
        if layout.decimal == "," and (layout.delimiter == "," or "." in text):
            return None
        if not _is_regular(text, len(lines), layout):
            return None
        if '"' in text and not all(
            well_quoted(line, layout.delimiter, inner=False) for line in lines if '"' in line
        ):
            return None
        if layout.decimal == ",":
            lines = text.replace(",", ".").split("\n")
        picks = [self.signal] if self.time is None else [self.signal, self.time]
        kinds = [("0", np.float64), ("1", "U40" if self.instants else np.float64)][: len(picks)]
        try:
            table = np.loadtxt(
                lines, kinds, delimiter=layout.delimiter, usecols=picks, comments=None,
                quotechar='"' if '"' in text else None, ndmin=1,
            )  # fmt: skip
            if len(table) != len(lines):
                return None
            columns = [table[name] for name, _ in kinds]
            if self.instants:
                columns[1] = self._seconds(dates_at_once(columns[1]))
        except ValueError:
            return None
        return tuple(columns)

    def _seconds(self, instants: NDArray[np.int64]) -> Real:
        return np.asarray((instants - (self.reference or 0)) / 1e9)

    def _one_by_one(
        self, lines: list[str], first: int
    ) -> tuple[tuple[Real, ...], NDArray[np.int64]]:
        """Parse a block row by row, and return the line of each row as well."""
        at, values, times = [], [], []
        for line, text in enumerate(lines, first):
            bare = text.strip()
            if not bare or bare.startswith("#"):
                self.comments += bool(bare)
                continue
            if '"' in text and not well_quoted(text, self.layout.delimiter):
                raise RecordingError(
                    f"{self.file}, line {line}: a quote opens a cell that no quote closes at its "
                    f"end: {_shown(bare)}; mend or remove the line"
                )
            row = split(text, self.layout.delimiter)
            if len(row) < self.layout.columns or any(row[self.layout.columns :]):
                raise RecordingError(
                    f"{self.file}, line {line}: has {counted(len(row), 'cell')}, but the rows "
                    f"before have {self.layout.columns}: {_shown(bare)}; mend or remove the line"
                )
            at.append(line)
            values.append(self._number(row, self.signal, line))
            if self.time is not None:
                times.append(self._time(row, self.time, line))
        columns = [np.array(values)] + ([] if self.time is None else [np.array(times)])
        if not at or at[-1] - at[0] == len(at) - 1:
            at = at[:1] or [first]
        return tuple(columns), np.array(at, dtype=np.int64)

    def _number(self, row: list[str], column: int, line: int) -> float:
        value = number(row[column], self.layout.decimal)
        if value is not None:
            return value
        where = f"{self.file}, line {line}, {label(self.layout.names, column)}"
        cure = "is it a decimal comma?" if "," in row[column] else "mend or remove the line"
        raise RecordingError(f"{where}: expected a number, given {_shown(row[column])}; {cure}")

    def _time(self, row: list[str], column: int, line: int) -> float:
        if not self.instants:
            return self._number(row, column, line)
        instant = nanoseconds(row[column])
        if instant is None:
            where = f"{self.file}, line {line}, {label(self.layout.names, column)}"
            raise RecordingError(
                f"{where}: expected an instant such as 2030-01-31T12:00:00.250, "
                f"given {_shown(row[column])}"
            )
        return (instant - (self.reference or 0)) / 1e9


def _shown(text: str) -> str:
    return repr(text if len(text) <= 40 else text[:37] + "...")


def _is_regular(text: str, lines: int, layout: Layout) -> bool:
    """Say whether every line of a block has the same number of cells, counted in compiled code."""
    if not text.strip():
        return False
    signs = np.frombuffer(text.encode("latin-1", "replace") + b"\n", np.uint8)
    end = signs == ord("\n")
    if layout.delimiter is None:
        blank = end | (signs == ord(" ")) | (signs == ord("\t"))
        marks = ~blank  # the first sign of each cell
        marks[1:] &= blank[:-1]
        each = layout.cells
    else:
        marks = signs == ord(layout.delimiter)
        each = layout.cells - 1
    ends, at = np.flatnonzero(end), np.flatnonzero(marks)
    if len(ends) != lines or len(at) != lines * each:
        return False
    if each == 0:
        return True
    # Right in number overall; so each line has its share if no mark belongs to another line.
    rows = at.reshape(lines, each)
    return bool(np.all(rows[:, -1] < ends) and np.all(rows[1:, 0] > ends[:-1]))
