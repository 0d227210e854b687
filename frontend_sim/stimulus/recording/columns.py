"""Which column is meant: by name, by number counted from 1, or because there is only one."""

from __future__ import annotations

import re
from collections.abc import Sequence
from pathlib import Path

from frontend_sim.errors import RecordingError, nearest

_WITH_UNIT = re.compile(r"(.*?\S)\s*(?:\(([^()]*)\)|\[([^\[\]]*)\])\Z")


def split_unit(name: str) -> tuple[str, str]:
    """Split ``"pressure [mV]"`` or ``"pressure (mV)"`` into name and unit; the unit may be ""."""
    match = _WITH_UNIT.match(name)
    if match is None:
        return name, ""
    return match.group(1), (match.group(2) or match.group(3) or "").strip()


def listing(names: Sequence[str]) -> str:
    """Return the columns for a message, ``1 't', 2 'pressure'``; long lists are cut."""
    shown = [f"{i} {name!r}" if name else str(i) for i, name in enumerate(names[:24], 1)]
    return ", ".join(shown) + (f", ... {len(names)}" if len(names) > 24 else "")


def label(names: Sequence[str], index: int) -> str:
    """Return a column's name in messages, ``column 2 'pressure'``."""
    return f"column {index + 1}" + (f" {names[index]!r}" if names[index] else "")


def pick(file: Path, names: Sequence[str], wanted: int | str, key: str) -> int:
    """Return the position of a column.

    A name is taken as it stands in the header, or without the unit in brackets behind it.

    Raises
    ------
    RecordingError
        If there is no such column, or several of the name. The message lists those there are.
    """
    if isinstance(wanted, int):
        if 1 <= wanted <= len(names):
            return wanted - 1
        raise RecordingError(
            f"{file}: {key} = {wanted}, but the columns are {listing(names)} (counted from 1)"
        )
    if not any(names):
        raise RecordingError(
            f"{file}: {key} = {wanted!r}, but the columns have no names; "
            f"give a number from 1 to {len(names)}"
        )
    for known in (list(names), [split_unit(name)[0] for name in names]):
        found = [i for i, name in enumerate(known) if name == wanted]
        if len(found) == 1:
            return found[0]
        if found:
            numbers = " and ".join(str(i + 1) for i in found)
            raise RecordingError(
                f"{file}: {key} = {wanted!r}, but columns {numbers} have this name; give a number"
            )
    hint = f"; did you mean {key} = {wanted}, without quotes?" if wanted.isdecimal() else ""
    raise RecordingError(
        f"{file}: no column {wanted!r} for {key}"
        f"{hint or nearest(wanted, [name for name in names if name])}"
        f" (columns are {listing(names)})"
    )


def pick_signal(
    file: Path, names: Sequence[str], wanted: int | str | None, time: int | None
) -> int:
    """Return the position of the signal's column: the one asked for, or the only one.

    Raises RecordingError if none or several are left beside the time column, or if the time column
    itself is asked for.
    """
    if wanted is not None:
        index = pick(file, names, wanted, "column")
        if index == time:
            raise RecordingError(
                f"{file}: {label(names, index)} is given both as time and as column"
            )
        return index
    left = [i for i in range(len(names)) if i != time]
    if len(left) == 1:
        return left[0]
    if not left:
        raise RecordingError(
            f"{file}: the only column is the time; without a signal column nothing can be played"
        )
    raise RecordingError(
        f"{file}: several columns may be the signal; choose one with column = ..., a name or a "
        f"number: {listing(names)}"
        + ("" if time is not None else " (and name the time column with time = ...)")
    )
