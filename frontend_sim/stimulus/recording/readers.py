"""The kind table of file formats, and the first look at a file."""

from __future__ import annotations

import os
import stat
from pathlib import Path

from frontend_sim.errors import RecordingError, nearest
from frontend_sim.stimulus.recording.hdf5 import read_hdf5
from frontend_sim.stimulus.recording.mat import read_mat
from frontend_sim.stimulus.recording.npy import read_npy
from frontend_sim.stimulus.recording.npz import read_npz
from frontend_sim.stimulus.recording.series import Reader, Source, Wanted
from frontend_sim.stimulus.recording.table import read_table
from frontend_sim.stimulus.recording.wav import read_wav

READERS: dict[str, Reader] = {
    ".csv": read_table,
    ".tsv": read_table,
    ".txt": read_table,
    ".wav": read_wav,
    ".npy": read_npy,
    ".npz": read_npz,
    ".h5": read_hdf5,
    ".hdf5": read_hdf5,
    ".mat": read_mat,
}
"""Suffix -> reader."""

_STARTS: tuple[tuple[bytes, str, frozenset[str]], ...] = (
    (b"\x89HDF\r\n\x1a\n", "an HDF5 file", frozenset([".h5", ".hdf5", ".mat"])),
    (b"\x93NUMPY", "an NPY file", frozenset([".npy"])),
    (b"PK\x03\x04", "a ZIP archive (NPZ, or a spreadsheet)", frozenset([".npz"])),
    (b"PK\x05\x06", "an empty ZIP archive", frozenset([".npz"])),
    (b"RIFF", "a RIFF file", frozenset([".wav"])),
    (b"RF64", "a WAV file of 64 bits", frozenset([".wav"])),
    (b"RIFX", "a big-endian WAV file", frozenset([".wav"])),
    (b"\x1f\x8b", "a compressed file (gzip)", frozenset()),
    (b"BZh", "a compressed file (bzip2)", frozenset()),
    (b"\xfd7zXZ", "a compressed file (xz)", frozenset()),
    (b"\xd0\xcf\x11\xe0", "an office document", frozenset()),
    (b"%PDF", "a PDF document", frozenset()),
)
"""How a file starts, what it then is, and the suffixes that fit."""

_MARKED = frozenset([".wav", ".npy", ".npz"])
"""Suffixes whose files always start with the mark of their format."""


def signature(file: Path) -> tuple[int, int, int]:
    """Return size, time of change and identity of a file, which tell when it is another one.

    Raises RecordingError if there is no such file, or it is none that can be read.
    """
    try:
        status = file.stat()
    except FileNotFoundError:
        raise RecordingError(f"{file}: no such file{_similar(file)}") from None
    except (OSError, ValueError) as error:
        raise RecordingError(f"{str(file)!r} cannot be a file: {error}") from None
    if stat.S_ISDIR(status.st_mode):
        raise RecordingError(f"{file}: is a directory; give the file of the recording")
    if not stat.S_ISREG(status.st_mode):
        raise RecordingError(f"{file}: is no regular file; store the recording in one")
    return status.st_size, status.st_mtime_ns, status.st_ino


def open_source(file: Path, wanted: Wanted) -> Source:
    """Open a recording with the reader of its suffix.

    Raises RecordingError if the suffix is unknown, the content does not fit it, or the reader
    finds fault.
    """
    suffix = file.suffix.lower()
    reader = READERS.get(suffix)
    if reader is None:
        raise RecordingError(
            f"{file}: the suffix {file.suffix!r} is not known; known are {', '.join(READERS)}"
        )
    try:
        with file.open("rb") as stream:
            head = stream.read(16)
        _refuse_other_content(file, suffix, head)
        return reader(file, wanted)
    except PermissionError:
        raise RecordingError(f"{file}: may not be read; change its permissions") from None
    except OSError as error:
        raise RecordingError(f"{file}: cannot be read: {error.strerror or error}") from None


def _refuse_other_content(file: Path, suffix: str, head: bytes) -> None:
    if not head:
        raise RecordingError(f"{file}: is empty")
    for start, what, suffixes in _STARTS:
        if head.startswith(start):
            if suffix not in suffixes:
                cure = (
                    f"rename it to {' or '.join(sorted(suffixes))}"
                    if suffixes
                    else ("unpack it, or export it as one of " + ", ".join(READERS))
                )
                raise RecordingError(f"{file}: is {what}, not what {suffix} says; {cure}")
            return
    if suffix in _MARKED:
        raise RecordingError(
            f"{file}: is no {suffix[1:].upper()} file, whatever its name says; it starts with "
            f"{head!r}"
        )


def _similar(file: Path) -> str:
    """Return a hint at a file of a similar name in the same folder."""
    try:
        names = [entry.name for entry in os.scandir(file.parent) if entry.is_file()]
    except OSError:
        return f"; the folder {file.parent} cannot be read"
    close = nearest(file.name, names)
    return close if close.startswith("; did you mean") else ""
