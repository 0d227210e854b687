"""What a run came from: files by their content, libraries by their version."""

from __future__ import annotations

import os
import platform
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import lru_cache
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path
from typing import Any

from frontend_sim.errors import RecordingError
from frontend_sim.scenario.digest import sha256_of
from frontend_sim.scenario.scan_scenario import AnyScenario

PROGRAM = "frontend-sim"
LIBRARIES = ("numpy", "scipy", "numba", "pydantic", "h5py")


@dataclass(frozen=True)
class SourceFile:
    """A file that the stimulus is read from.

    Parameters
    ----------
    name : as the scenario has it
    path : absolute
    size : [bytes]
    sha256 : of the content
    modified : when it was last written [ns], to notice a change while the run goes on
    """

    name: str
    path: Path
    size: int
    sha256: str
    modified: int

    def entry(self, directory: Path) -> dict[str, Any]:
        """Return what a record in a directory tells of this file, as data for JSON."""
        try:
            relative = os.path.relpath(self.path, directory)
        except ValueError:  # on another drive
            relative = self.path.name
        return {
            "name": self.name,
            "path": str(self.path),
            "from_record": Path(relative).as_posix(),
            "size": self.size,
            "sha256": self.sha256,
        }


def source_files(
    scenario: AnyScenario, sha256: Callable[[Path], str] = sha256_of
) -> tuple[SourceFile, ...]:
    """Read size and digest of every file of the scenario. Raises RecordingError.

    ``sha256`` gives the digest of a file's content.
    """
    return tuple(_source_file(file, sha256) for file in scenario.files())


def _source_file(file: Path, sha256: Callable[[Path], str]) -> SourceFile:
    try:
        about = file.stat()
        digest = sha256(file)
    except OSError as error:
        raise RecordingError(f"{file} cannot be read: {error.strerror or error}") from error
    return SourceFile(str(file), file.absolute(), about.st_size, digest, about.st_mtime_ns)


def refuse_changed(files: Sequence[SourceFile]) -> None:
    """Raise RecordingError if a file was written to since its digest was taken."""
    for file in files:
        try:
            about = file.path.stat()
            same = (about.st_size, about.st_mtime_ns) == (file.size, file.modified)
        except OSError:
            same = False
        if not same:
            raise RecordingError(
                f"{file.name} changed while the run was reading it, so nobody could tell what the "
                "codes belong to; run again once the file is complete"
            )


def versions() -> dict[str, str]:
    """Return the versions of this program and of all that its numbers depend on."""
    import h5py

    return {
        PROGRAM: _version(PROGRAM),
        "python": platform.python_version(),
        **{library: _version(library) for library in LIBRARIES},
        "hdf5": h5py.version.hdf5_version,
    }


@lru_cache(maxsize=32)
def _version(distribution: str) -> str:
    try:
        return version(distribution)
    except PackageNotFoundError:
        return "unknown"


def document(
    scenario: AnyScenario,
    files: Sequence[SourceFile],
    directory: Path,
    sha256: Callable[[Path], str] = sha256_of,
) -> dict[str, Any]:
    """Return the content of ``/resolved`` of a record that will lie in a directory."""
    return {
        "scenario": scenario.resolved(),
        "scenario_digest": scenario.digest(sha256),
        "files": [file.entry(directory) for file in files],
        "versions": versions(),
        "platform": platform.platform(),
        "machine": platform.machine(),
    }
