"""Files by their content, as a night found them."""

from __future__ import annotations

from collections.abc import Iterable
from functools import lru_cache
from pathlib import Path

from frontend_sim.scenario.digest import sha256_of


def cached_sha256(file: Path) -> str:
    """Return the SHA-256 of a file, read again only where the file was written to since."""
    about = file.stat()
    return _sha256(file, about.st_size, about.st_mtime_ns, about.st_ino)


@lru_cache(maxsize=4096)
def _sha256(file: Path, size: int, modified: int, inode: int) -> str:
    return sha256_of(file)


class Contents:
    """The contents of files, each taken when it is first asked for and never again.

    A night is about one state of its recordings: one that changes or goes away meanwhile makes
    the runs that are left fail, and the next call, which takes the contents anew, does them all.
    """

    def __init__(self) -> None:
        """Begin with nothing."""
        self._digests: dict[Path, str | None] = {}

    def __call__(self, file: Path) -> str:
        """Return the SHA-256 of a file; of one that is not there, that it is missing."""
        return self._digest(file) or f"missing {file}"

    def known(self, files: Iterable[Path]) -> dict[str, str]:
        """Return path -> SHA-256 of some files, without those that are missing."""
        found = {str(file): self._digest(file) for file in files}
        return {file: digest for file, digest in found.items() if digest is not None}

    def _digest(self, file: Path) -> str | None:
        if file not in self._digests:
            try:
                self._digests[file] = cached_sha256(file)
            except OSError:  # the run tells
                self._digests[file] = None
        return self._digests[file]
