"""One cell of a text table: a number, an instant, nothing, or words."""

from __future__ import annotations

import csv
import re
import warnings
from functools import lru_cache
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Kind = Literal["number", "date", "clock", "missing", "text"]

_MARKS = """
    nan -nan +nan na n/a #n/a null none missing - -- ---
    inf +inf -inf infinity -infinity ol overflow
"""
MISSING = frozenset(["", *_MARKS.split()])
"""What loggers write, in lower case, where they have no number; an overload is no number either."""

DATE = re.compile(
    r"(\d{4}-\d\d-\d\d(?:[T ]\d\d:\d\d(?::\d\d(?:[.,](\d{1,9}))?)?)?)\s*(Z|[+-]\d\d:?\d\d)?\Z"
)
CLOCK = re.compile(r"(\d{1,3}):(\d\d):(\d\d)(?:[.,](\d{1,9}))?\Z")
_COMMA = re.compile(r"[+-]?\d*,\d+(?:[eE][+-]?\d+)?\Z")


def split(line: str, delimiter: str | None) -> list[str]:
    """Split a line into its cells, without blanks and quotes around them."""
    if '"' in line:
        if delimiter is None:
            line = re.sub(r"[ \t]+", " ", line.strip())
        try:
            rows = list(csv.reader([line], delimiter=delimiter or " ", skipinitialspace=True))
        except csv.Error:
            rows = [line.split(delimiter)]
        return [cell.strip() for cell in rows[0]] if rows else []
    if delimiter is None:
        return line.split()
    return [cell.strip() for cell in line.split(delimiter)]


def well_quoted(line: str, delimiter: str | None, inner: bool = True) -> bool:
    """Return whether every cell of a line that begins with a quote ends with one.

    Parameters
    ----------
    inner : whether a quote inside of a cell that does not begin with one is let pass: an inch
    """
    return _quoting(delimiter, inner).fullmatch(line) is not None


@lru_cache(maxsize=32)
def _quoting(delimiter: str | None, inner: bool) -> re.Pattern[str]:
    end = r"[ \t]+" if delimiter is None else re.escape(delimiter)
    rest = r" \t" if delimiter is None else re.escape(delimiter)
    plain = rf'[^"{rest}][^{rest}]*' if inner else rf'[^"{rest}]+'
    cell = rf'[ \t]*(?:"(?:[^"]|"")*"[ \t]*|{plain}|)'
    if delimiter is None:
        cell = rf'(?:"(?:[^"]|"")*"|{plain}|)'
    return re.compile(rf"{cell}(?:{end}{cell})*\s*")


def number(cell: str, decimal: str) -> float | None:
    """Return the number in a cell; NaN if it is marked as missing, None if it is no number."""
    if decimal == ",":
        if "." in cell or ("," in cell and _COMMA.match(cell) is None):
            return None
        cell = cell.replace(",", ".")
    try:
        value = float(cell)
    except ValueError:
        return float("nan") if cell.lower() in MISSING else None
    return value if "_" not in cell else None


def kind(cell: str, decimal: str) -> Kind:
    """Return what a cell holds."""
    value = number(cell, decimal)
    if value is not None:
        return "number" if np.isfinite(value) else "missing"
    if DATE.match(cell):
        return "date"
    return "clock" if CLOCK.match(cell) else "text"


def nanoseconds(cell: str) -> int | None:
    """Return the instant of an ISO 8601 date-time or a time of day [ns], None where it is neither.

    A date-time without a zone is taken as it stands, so all of one file must be alike.
    """
    date = DATE.match(cell)
    if date:
        written, _, zone = date.groups()
        try:
            instant = int(np.datetime64(written.replace(",", "."), "ns").astype(np.int64))
        except ValueError:  # a 13th month, a 25th hour
            return None
        if zone and zone != "Z":
            sign = -1 if zone[0] == "-" else 1
            east = sign * (int(zone[1:3]) * 60 + int(zone[-2:]))
            instant -= east * 60_000_000_000
        return instant
    clock = CLOCK.match(cell)
    if clock:
        hours, minutes, seconds, fraction = clock.groups()
        total = (int(hours) * 60 + int(minutes)) * 60 + int(seconds)
        return total * 1_000_000_000 + int((fraction or "").ljust(9, "0"))
    return None


def dates_at_once(cells: NDArray[np.str_]) -> NDArray[np.int64]:
    """Return the instants of plain ISO 8601 date-times, of zone Z or none [ns].

    Raises ValueError if one of them is anything else.
    """
    array = cells
    zones = np.char.endswith(array, "Z")
    if zones.all():
        array = np.char.rstrip(array, "Z")
    elif zones.any():
        raise ValueError("mixed zones")
    if np.any(np.char.find(array, "+") >= 0) or np.any(np.char.count(array, "-") != 2):
        raise ValueError("a zone other than Z")
    with warnings.catch_warnings():
        warnings.simplefilter("error")  # NumPy warns of zones that it finds
        try:
            return array.astype("datetime64[ns]").astype(np.int64)
        except UserWarning as warning:
            raise ValueError(str(warning)) from None
