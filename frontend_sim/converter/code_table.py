"""A file with one number for every code of a converter."""

from __future__ import annotations

from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import ScenarioError

Real = NDArray[np.float64]

LARGEST = 64 << 20
"""A table larger than this is something else [bytes]."""

SUFFIXES = (".csv", ".tsv", ".txt", ".npy")


def read_code_table(file: Path) -> Real:
    """Return the numbers of a table, shape (K,).

    A text has one number in a line, or the code and the number, where codes count up by one; a
    heading, empty lines and lines that begin with # are passed over. An NPY file holds one row of
    numbers.

    Raises
    ------
    ScenarioError
        If the file cannot be read, or is no such table.
    """
    if file.suffix.lower() not in SUFFIXES:
        raise ScenarioError(f"{file}: a table of codes is one of {', '.join(SUFFIXES)}")
    try:
        if file.stat().st_size > LARGEST:
            raise ScenarioError(f"{file}: larger than {LARGEST >> 20} MiB; this is no table")
        numbers = _array(file) if file.suffix.lower() == ".npy" else _text(file)
    except FileNotFoundError:
        raise ScenarioError(f"{file}: there is no such file") from None
    except IsADirectoryError:
        raise ScenarioError(f"{file}: this is a directory; give a file") from None
    except OSError as error:
        raise ScenarioError(f"{file}: cannot be read: {error.strerror or error}") from None
    if len(numbers) == 0:
        raise ScenarioError(f"{file}: holds no number")
    wrong = np.flatnonzero(~np.isfinite(numbers))
    if len(wrong):
        raise ScenarioError(f"{file}: number {wrong[0] + 1} is not finite; give one for every code")
    return numbers


def _array(file: Path) -> Real:
    try:
        with file.open("rb") as stream:
            row = np.lib.format.read_array(stream, allow_pickle=False)
    # A damaged header may tell any shape.
    except (ValueError, EOFError, OverflowError, MemoryError):
        raise ScenarioError(f"{file}: is damaged, or no NPY file of plain numbers") from None
    if row.ndim != 1 or row.dtype.kind not in "iuf":
        raise ScenarioError(f"{file}: expected one row of real numbers")
    return np.asarray(row, dtype=np.float64)


def _text(file: Path) -> Real:
    try:
        text = file.read_text(encoding="utf-8-sig")
    except UnicodeDecodeError:
        raise ScenarioError(f"{file}: is no text in UTF-8") from None
    numbers: list[float] = []
    first: int | None = None
    for line, row in enumerate(text.splitlines(), 1):
        cells = row.replace(";", " ").replace(",", " ").split()
        if not cells or cells[0].startswith("#"):
            continue
        try:
            found = [float(cell) for cell in cells]
        except ValueError:
            if not numbers and first is None and not _has_number(cells):
                continue
            raise _wrong(file, line, "expected a number, or a code and a number", row) from None
        if len(found) > 2:
            raise _wrong(file, line, "expected one number, or a code and a number", row)
        if numbers and (len(found) == 2) is (first is None):
            raise _wrong(file, line, "has not as many numbers as the lines before", row)
        if len(found) == 2:
            first = int(found[0]) if first is None and found[0].is_integer() else first
            if first is None or found[0] != first + len(numbers):
                raise _wrong(file, line, "codes must be whole numbers that count up by one", row)
        numbers.append(found[-1])
    return np.array(numbers)


def _has_number(cells: list[str]) -> bool:
    return any(cell.lstrip("+-.")[:1].isdigit() for cell in cells)


def _wrong(file: Path, line: int, text: str, row: str) -> ScenarioError:
    shown = row.strip() if len(row.strip()) <= 40 else row.strip()[:37] + "..."
    return ScenarioError(f"{file}, line {line}: {text}, given {shown!r}")
