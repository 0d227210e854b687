"""The file below HDF5, and what happens when it cannot be written."""

from __future__ import annotations

from io import SEEK_END, BytesIO, FileIO


class Sink:
    """A file for HDF5 that never refuses a write, and tells afterwards.

    After a write that fails, HDF5 can neither flush nor close the file, and brings the
    interpreter down at its end. So this file takes whatever comes: what the disk does not hold is
    dropped, and the first failure is kept for ``check``. The file may lie in memory, which ends
    as a disk does.
    """

    def __init__(self, stream: FileIO | BytesIO) -> None:
        """Write to an open, unbuffered file."""
        self._stream = stream
        self._failure: OSError | MemoryError | None = None

    def check(self) -> None:
        """Raise the first failure, an OSError or a MemoryError, if there was one."""
        if self._failure is not None:
            raise self._failure

    def read(self, size: int = -1) -> bytes:
        """Read some bytes; HDF5 asks whether this exists and calls ``readinto``."""
        return self._stream.read(size)

    def readinto(self, buffer: memoryview) -> int:
        """Fill a buffer from the file, with zeros past its end."""
        done = 0
        while done < len(buffer) and (got := self._stream.readinto(buffer[done:])):
            done += got
        buffer[done:] = bytes(len(buffer) - done)
        return len(buffer)

    def write(self, data: memoryview) -> int:
        """Write all of the data, or keep the failure."""
        rest = memoryview(data)
        try:
            while len(rest):
                rest = rest[self._stream.write(rest) :]
        except (OSError, MemoryError) as error:
            self._failure = self._failure or error
        return len(data)

    def truncate(self, size: int) -> int:
        """Set the file's length, or keep the failure."""
        try:
            self._stream.truncate(size)
            missing = size - self._stream.seek(0, SEEK_END)
            if missing > 0:  # memory grows by what is written alone
                self._stream.write(bytes(missing))
        except (OSError, MemoryError) as error:
            self._failure = self._failure or error
        return size

    def seek(self, offset: int, whence: int = 0) -> int:
        """Go to a position."""
        return self._stream.seek(offset, whence)

    def tell(self) -> int:
        """Return the position."""
        return self._stream.tell()

    def flush(self) -> None:
        """Do nothing: the file is unbuffered."""
