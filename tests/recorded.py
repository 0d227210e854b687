"""Recordings for tests: made from keys, written as real files, and read back as numbers."""

from __future__ import annotations

import struct
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.stimulus.drive import UniformDrive
from frontend_sim.stimulus.recording import Recording, prepare

Real = NDArray[np.float64]


def recording(file: Path, **keys: Any) -> Recording:
    """Return a recording as a scenario would make it."""
    return Recording.model_validate({"file": str(file), **keys})


def forget() -> None:
    """Let every recording be opened anew."""
    prepare._prepared.cache_clear()


def values(stimulus: Recording, times: Real) -> Real:
    """Return the whole signal at some times, all drives added [V]."""
    return np.sum([drive.values(np.asarray(times)) for drive in stimulus.drives((1,))], axis=0)


def points(stimulus: Recording) -> Real:
    """Return all points of a recording with a constant rate [V]."""
    (drive,) = stimulus.drives((1,))
    assert isinstance(drive, UniformDrive)
    length = stimulus.known_length()
    assert length is not None
    return drive.points(0, round(length * drive.rate))


def rate(stimulus: Recording) -> float:
    """Return the rate of a recording on a grid [Hz]."""
    drive = stimulus.drives((1,))[0]
    assert isinstance(drive, UniformDrive)
    return drive.rate


def write(file: Path, text: str, encoding: str = "utf-8", newline: str = "\n") -> Path:
    """Write a text file with the given line ends."""
    file.write_bytes(text.replace("\n", newline).encode(encoding))
    return file


def wav(
    data: bytes, codec: int = 1, channels: int = 1, bits: int = 16, rate: int = 8000,
    extensible: bool = False, before: bytes = b"", promised: int | None = None,
) -> bytes:  # fmt: skip
    """Return a WAV file built by hand.

    ``before`` stands between the header and the data; ``promised`` is the length that the data
    chunk claims to have.
    """
    align = channels * ((bits + 7) // 8)
    code = 0xFFFE if extensible else codec
    form = struct.pack("<HHIIHH", code, channels, rate, rate * align, align, bits)
    if extensible:
        tail = bytes.fromhex("000000001000800000aa00389b71")
        form += struct.pack("<HHIH", 22, bits, 0, codec) + tail
    length = len(data) if promised is None else promised
    body = b"WAVE" + b"fmt " + struct.pack("<I", len(form)) + form + before
    body += b"data" + struct.pack("<I", length) + data
    return b"RIFF" + struct.pack("<I", len(body)) + body
