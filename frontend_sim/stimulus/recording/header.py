"""The header of a text table: names and units above the first row of numbers."""

from __future__ import annotations

import re

from frontend_sim.stimulus.recording.cells import kind, split
from frontend_sim.stimulus.recording.columns import split_unit

_UNITS = """
    s sec ms us µs μs ns min h hz khz mhz v mv uv µv μv nv kv a ma ua µa μa na pa hpa kpa mpa
    bar mbar psi n kn nm m mm um µm μm cm km g mg m/s m/s2 m/s^2 m/s² m/s**2 rad deg ° °c degc
    c k °f % %rh ppm db w mw ohm kohm ω kω f pf nf uf c/v v/v mv/v l/min 1 - lsb counts
"""
UNITS = frozenset(_UNITS.split())
"""Words that make the row under the header a row of units, in lower case."""

_COMMENT = re.compile(r"\s*(?:#|%|//|!)+\s*")


def find_header(
    preamble: list[str], delimiter: str | None, columns: int
) -> tuple[tuple[str, ...], tuple[str, ...], int | None]:
    """Return names, units, and the line of the names from 1, from the lines above a table."""
    nothing = ("",) * columns
    above = [i for i, line in enumerate(preamble) if line.strip()][-2:]
    rows = {i: _header_cells(preamble[i], delimiter, columns) for i in above}
    last = rows[above[-1]] if above else None
    if last is None:
        return nothing, nothing, None
    names, units, line = last, nothing, above[-1]
    before = rows[above[0]] if len(above) == 2 else None
    if before is not None and _hold_numbers(last) and not _hold_numbers(before):
        names, line = before, above[0]  # the row below is one of the table, with a fault
    elif before is not None and _are_units(last):
        names, units, line = before, tuple(cell.strip("()[] ") for cell in last), above[0]
    named = tuple(split_unit(name)[1] for name in names)
    return names, tuple(a or b for a, b in zip(units, named, strict=True)), line + 1


def _header_cells(line: str, delimiter: str | None, columns: int) -> tuple[str, ...] | None:
    """Return one name for each column, or None if the line cannot be a header.

    Headers of tables with blanks are often written with another delimiter, or with names of
    several words.
    """
    line = _COMMENT.sub("", line, count=1) if _COMMENT.match(line) else line
    candidates = [split(line, delimiter)]
    if delimiter is None:
        candidates += [split(line, other) for other in (",", ";", "\t")]
        candidates += [re.split(r"\s{2,}|\t", line.strip())]
    for cells in candidates:
        while len(cells) > columns and not cells[-1]:
            cells.pop()
        if len(cells) == columns and any(kind(cell, ".") == "text" for cell in cells):
            return tuple(cells)
    return None


def _hold_numbers(cells: tuple[str, ...]) -> bool:
    return any(kind(cell, ".") == "number" for cell in cells)


def _are_units(cells: tuple[str, ...]) -> bool:
    written = [cell for cell in cells if cell]
    bare = [cell.strip("()[] ").lower() for cell in written]
    return bool(written) and all(
        word in UNITS or cell[0] + cell[-1] in ("()", "[]")
        for word, cell in zip(bare, written, strict=True)
    )
