"""The place that a file is written to: nothing there is lost, nothing half written appears."""

from __future__ import annotations

import errno
import os
import secrets
import stat
from collections.abc import Iterable, Iterator
from contextlib import contextmanager, suppress
from pathlib import Path

from frontend_sim.errors import OutputError, shortened

HOW_TO_REPLACE = "give another name, or overwrite it: --overwrite, in Python overwrite=True"
"""What to do about a file that is there."""


def file_target(path: str | os.PathLike[str], overwrite: bool) -> Path:
    """Return where a file goes, links followed.

    Raises
    ------
    OutputError
        If the directory is not there, the path is no place for a file, or a file is there that
        must not be replaced.
    """
    with writing(path):
        target = Path(os.path.realpath(path))
        try:
            there = target.stat()
        except FileNotFoundError:
            _refuse_missing_directory(path, target.parent)
            return target
        if stat.S_ISDIR(there.st_mode):
            raise OutputError(f"{path} is a directory; give the name of a file in it")
        if not stat.S_ISREG(there.st_mode):
            raise OutputError(f"{path} is not a regular file; give the name of a new file")
        if not overwrite:
            raise OutputError(f"{path} exists; {HOW_TO_REPLACE}")
        return target


def record_target(path: str | os.PathLike[str], overwrite: bool, inputs: Iterable[Path]) -> Path:
    """Return where a record goes, links followed, after everything that could forbid it.

    Parameters
    ----------
    path : as the user gave it
    overwrite : whether a record that is there may be replaced
    inputs : files that the run reads, which are never replaced

    Raises
    ------
    OutputError
        As ``file_target`` does, or if an input is there, or a file that is no record.
    """
    _refuse_inputs(path, inputs)
    target = file_target(path, overwrite)
    with writing(path):
        if target.exists() and target.stat().st_size > 0 and not _is_record(target):
            raise OutputError(
                f"{path} exists and is no whole record of this program, so it is not overwritten; "
                "give another name, or delete it first"
            )
    return target


def _refuse_missing_directory(path: object, directory: Path) -> None:
    if not directory.is_dir():
        raise OutputError(
            f"{path}: there is no directory {directory}; make it first, or give another place"
        )


def _refuse_inputs(path: str | os.PathLike[str], inputs: Iterable[Path]) -> None:
    with writing(path):
        target = Path(os.path.realpath(path))
        for file in inputs:
            if target.is_file() and file.exists() and file.samefile(target):
                raise OutputError(
                    f"{path} is an input of this run and is not replaced; give another name"
                )


def _is_record(path: Path) -> bool:
    import h5py

    from frontend_sim.archive.layout import FORMAT

    try:
        with h5py.File(path, "r") as file:
            return bool(file.attrs.get("format") == FORMAT)
    except (OSError, RuntimeError):
        return False


@contextmanager
def new_file(target: Path, path: object, overwrite: bool) -> Iterator[Path]:
    """Give a temporary name beside the target, and rename it to the target if all goes well.

    Whatever ends the body early, Ctrl-C included, removes the temporary file. Without
    ``overwrite`` the target is not replaced even if it appeared in the meantime.
    """
    temporary = target.parent / f".frontend-sim-{secrets.token_hex(6)}.partial"
    try:
        yield temporary
        with writing(path):
            _to_disk(temporary)
            _rename(temporary, target, path, overwrite)
            _directory_to_disk(target.parent)
    finally:
        with suppress(OSError):
            temporary.unlink(missing_ok=True)


def _rename(temporary: Path, target: Path, path: object, overwrite: bool) -> None:
    if overwrite:
        temporary.replace(target)
        return
    try:
        os.link(temporary, target)  # unlike a rename, it never replaces what is there
    except OSError as error:
        if isinstance(error, FileExistsError) or target.exists():
            raise OutputError(
                f"{path} appeared while the run went on and is not overwritten; give another name"
            ) from None
        temporary.rename(target)  # the file system knows no second name for a file


def _to_disk(path: Path) -> None:
    with path.open("r+b") as stream:
        os.fsync(stream.fileno())


def _directory_to_disk(directory: Path) -> None:
    if os.name == "posix":
        descriptor = os.open(directory, os.O_RDONLY)
        try:
            with suppress(OSError):  # some network file systems refuse; the file itself is safe
                os.fsync(descriptor)
        finally:
            os.close(descriptor)


_FULL = (errno.ENOSPC, errno.EDQUOT, errno.EFBIG)


@contextmanager
def writing(path: object) -> Iterator[None]:
    """Turn the errors of the operating system and of HDF5 into an OutputError on ``path``."""
    try:
        yield
    except OutputError:
        raise
    except (OSError, RuntimeError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error).partition("\n")[0]
        full = getattr(error, "errno", None) in _FULL
        cure = "free some space or choose another place" if full else "choose another place"
        raise OutputError(
            f"{shortened(path)} cannot be written: {reason}; {cure}, nothing was left behind"
        ) from error
