"""From a path to a record: what is no record is told, and each version has its reader."""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING

from frontend_sim.archive.layout import FORMAT
from frontend_sim.archive.reading import reading
from frontend_sim.archive.record import Record
from frontend_sim.archive.scan_record import ScanRecord
from frontend_sim.errors import RecordError, shortened
from frontend_sim.quantities.counting import counted

if TYPE_CHECKING:
    import h5py

READERS: dict[int, type[Record] | type[ScanRecord]] = {
    1: Record,
    2: ScanRecord,
    3: Record,
    4: ScanRecord,
}
"""Format version -> its reader. A new version adds a row; the old rows stay. Those of records that
keep a part of their run are versions of their own, so that a program that knows nothing of parts
does not take one for a whole."""


def open_record(path: str | os.PathLike[str]) -> Record | ScanRecord:
    """Open a record; nothing but its head is read yet. That of a scan has ``channels[name]``.

    Raises
    ------
    RecordError
        If there is no such file, if it is no HDF5, no record, damaged, or of a version that this
        program does not know.
    """
    place = Path(path)
    _refuse_no_hdf5(place)
    file = _open(place)
    try:
        return READERS[_version(place, file)](place, file)
    except BaseException:
        file.close()
        raise


def open_single_record(path: str | os.PathLike[str]) -> Record:
    """Open the record of one channel, for what knows no scans.

    Raises
    ------
    RecordError
        As ``open_record``, or if it is the record of a scan.
    """
    record = open_record(path)
    if isinstance(record, Record):
        return record
    record.close()
    raise RecordError(
        f"{path} is the record of a scan of {counted(len(record.channels), 'channel')}, and this "
        "takes the record of one channel; in Python, open_record(...).channels[name] is one"
    )


def _refuse_no_hdf5(path: Path) -> None:
    import h5py

    try:
        with path.open("rb") as stream:
            empty = not stream.read(1)
    except IsADirectoryError:
        raise RecordError(
            f"{path} is a directory; give the name of a record in it, or the directory of a set "
            "that replay has written set.h5 into"
        ) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or error
        raise RecordError(f"{shortened(path)} cannot be opened: {reason}; check the name") from None
    if empty:
        raise RecordError(f"{path} is empty; run its scenario again")
    if not h5py.is_hdf5(path):
        raise RecordError(
            f"{path} is not an HDF5 file; a record is what 'frontend-sim run SCENARIO -o FILE' "
            "writes"
        )


def _open(path: Path) -> h5py.File:
    import h5py

    try:
        return h5py.File(path, "r")
    except (OSError, RuntimeError) as error:
        if "truncated" in str(error):
            reason = "is cut off before its end; copy it again"
        elif "lock" in str(error):
            reason = "is being written by another program; wait for it"
        else:
            reason = f"is damaged ({str(error).partition(chr(10))[0]}); restore it from a copy"
        raise RecordError(f"{path} {reason}, or run its scenario again") from error


def _version(path: Path, file: h5py.File) -> int:
    with reading(path, "its head"):
        known = str(file.attrs.get("format", "")) == FORMAT
        version = file.attrs.get("format_version")
        writer = file.attrs.get("program_version", "unknown")
    if not known:
        raise RecordError(
            f"{path} is HDF5, but no record of this program: its root has no attribute "
            f"format = {FORMAT!r}"
        )
    try:
        number = int(version)
    except (TypeError, ValueError):
        raise RecordError(f"{path} has no valid format_version; run its scenario again") from None
    if number not in READERS:
        raise RecordError(
            f"{path} has format version {number}, written by frontend-sim {writer}; this program "
            f"reads versions up to {max(READERS)}: install a newer one"
        )
    return number
