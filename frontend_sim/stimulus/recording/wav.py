"""Sampled sound, and anything else that is stored in WAV files.

Layout of the file: the multimedia programming interface and data specifications 1.0 (1991), with
the extensible format of the multiple-channel note (2001); both from memory.
"""

from __future__ import annotations

import struct
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import BinaryIO

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import RecordingError
from frontend_sim.quantities.counting import counted
from frontend_sim.stimulus.recording.series import Real, Series, Source, Wanted

PCM, FLOAT, EXTENSIBLE = 1, 3, 0xFFFE
_CODECS = {2: "ADPCM", 6: "A-law", 7: "mu-law", 17: "IMA ADPCM", 80: "MPEG", 85: "MPEG layer 3"}
_GUID_TAIL = bytes.fromhex("000000001000800000aa00389b71")
"""Bytes 2 to 15 of the identifier of a format whose first two bytes are its old code."""


@dataclass(frozen=True)
class _Format:
    """What the header says.

    Parameters
    ----------
    codec : PCM or FLOAT;  channels;  rate : frames per second [Hz]
    width : bytes of one channel in a frame;  offset : of frame 0 in the file [bytes]
    frames : number of frames
    """

    codec: int
    channels: int
    rate: float
    width: int
    offset: int = 0
    frames: int = 0


def read_wav(file: Path, wanted: Wanted) -> Source:
    """Read one channel, part by part; whole numbers are scaled so that full scale is 1.0.

    Eight bits are unsigned with zero at 128. All others are signed, and full scale is
    2^(bits - 1) counts, so the most negative code is -1.0 exactly.

    Raises RecordingError if the header is damaged, the data are cut off or compressed, or there is
    no such channel.
    """
    if wanted.dataset is not None or wanted.time is not None:
        raise RecordingError(
            f"{file}: a WAV file has channels and a rate of its own; leave out dataset and time"
        )
    with file.open("rb") as stream:
        layout = _parse(file, stream, file.stat().st_size)
    channel = _channel(file, wanted.column, layout.channels)
    signal = Series(
        f"channel {channel + 1}", "", layout.frames, _reader(file, layout, channel),
        lambda values: np.zeros(len(values)), lambda position: f"frame {position}",
        layout.codec == PCM,
    )  # fmt: skip
    kind = "float" if layout.codec == FLOAT else "bit"
    note = f"WAV: {layout.channels} channel(s), {8 * layout.width} {kind}, {layout.rate:g} Hz"
    return Source(signal, None, layout.rate, (note,), f"channels 1 to {layout.channels}")


def _channel(file: Path, wanted: int | str | None, channels: int) -> int:
    if wanted is None and channels == 1:
        return 0
    if isinstance(wanted, int) and 1 <= wanted <= channels:
        return wanted - 1
    given = "several channels, choose one with" if wanted is None else f"no channel {wanted!r};"
    raise RecordingError(f"{file}: {given} channel = 1 to {channels} (counted from 1)")


def _parse(file: Path, stream: BinaryIO, size: int) -> _Format:
    """Walk through the chunks of the file up to the data."""
    head = stream.read(12)
    if len(head) < 12 or head[8:] != b"WAVE":
        raise RecordingError(f"{file}: the header of the WAV file is cut off or damaged")
    if head[:4] != b"RIFF":
        raise RecordingError(
            f"{file}: is a WAV file of form {head[:4]!r}, which is not read; store it as plain "
            "WAV (below 4 GB) or as NPY"
        )
    found: _Format | None = None
    while len(chunk := stream.read(8)) == 8:
        name, length = chunk[:4], int(struct.unpack("<I", chunk[4:])[0])
        if name == b"fmt ":
            found = _format(file, stream.read(length))
            stream.seek(length % 2, 1)
        elif name == b"data":
            if found is None:
                raise RecordingError(f"{file}: the data come before their format; damaged header")
            return _with_data(file, found, stream.tell(), length, size)
        else:
            stream.seek(length + length % 2, 1)
    raise RecordingError(f"{file}: holds no data, it is cut off after {size} bytes")


def _format(file: Path, chunk: bytes) -> _Format:
    if len(chunk) < 16:
        raise RecordingError(f"{file}: the header of the WAV file is cut off")
    codec, channels, rate, _, align, bits = struct.unpack("<HHIIHH", chunk[:16])
    if codec == EXTENSIBLE:
        if len(chunk) < 40 or chunk[26:40] != _GUID_TAIL:
            raise RecordingError(f"{file}: extensible WAV of an unknown format")
        codec = struct.unpack("<H", chunk[24:26])[0]
    if codec not in (PCM, FLOAT):
        raise RecordingError(
            f"{file}: is compressed ({_CODECS.get(codec, f'code {codec:#06x}')}); only PCM and "
            "float are read: convert it"
        )
    width = align // channels if channels else 0
    widths = (1, 2, 3, 4) if codec == PCM else (4, 8)
    if not channels or not rate or align != width * channels or width not in widths:
        raise RecordingError(
            f"{file}: a format of {channels} channels, {bits} bits, {align} bytes per frame, "
            f"{rate} Hz cannot be read; 8, 16, 24, 32 bit PCM and 32, 64 bit float can"
        )
    return _Format(codec, channels, float(rate), width)


def _with_data(file: Path, layout: _Format, offset: int, length: int, size: int) -> _Format:
    align = layout.width * layout.channels
    there = max(size - offset, 0)
    if length > there:
        raise RecordingError(
            f"{file}: is truncated: the header promises {counted(length // align, 'frame')}, "
            f"there: {there // align:,}; record it again, or mend the header to use these"
        )
    if length < align:
        raise RecordingError(f"{file}: holds no frame")
    return _Format(
        layout.codec, layout.channels, layout.rate, layout.width, offset, length // align
    )


def _reader(file: Path, layout: _Format, channel: int) -> Callable[[int, int], Real]:
    """Return the function that reads frames first to last - 1 of one channel."""
    shape = (layout.frames, layout.channels, layout.width)

    def read(first: int, last: int) -> Real:
        try:
            frames = np.memmap(file, np.uint8, "r", layout.offset, shape)
        except (OSError, ValueError) as error:
            raise RecordingError(f"{file}: changed while it was read: {error}") from None
        return _numbers(np.array(frames[first:last, channel]), layout.codec)

    return read


def _numbers(raw: NDArray[np.uint8], codec: int) -> Real:
    """Return the numbers that rows of little-endian bytes stand for, shape (frames,)."""
    width = raw.shape[1]
    if codec == FLOAT:
        return raw.view(f"<f{width}")[:, 0].astype(np.float64)
    if width == 1:
        return (raw[:, 0].astype(np.float64) - 128.0) / 128.0
    if width == 3:
        # The three bytes become the upper ones of four, so the sign is that of the whole.
        padded = np.zeros((len(raw), 4), np.uint8)
        padded[:, 1:] = raw
        raw, width = padded, 4
    whole: Real = raw.view(f"<i{width}")[:, 0].astype(np.float64)
    whole /= 2.0 ** (8 * width - 1)
    return whole
