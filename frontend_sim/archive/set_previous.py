"""The table of the night before, kept beside that of the last one."""

from __future__ import annotations

import secrets
import shutil
from contextlib import suppress
from pathlib import Path

from frontend_sim.archive.set_table import PREVIOUS_FILE
from frontend_sim.archive.target import writing


def keep_previous(path: Path, digest: str) -> None:
    """Keep the file of a set that other results are about to replace.

    Only a complete night is kept, so that one that was stopped is never what the next one is
    compared with. A night that gives the same again replaces nothing.

    Parameters
    ----------
    path : of the file of the set
    digest : of the results that are about to be written

    Raises
    ------
    OutputError
        If it cannot be copied; what was there is then unchanged.
    """
    import h5py

    try:
        with h5py.File(path, "r") as file:
            worth = file.attrs["status"] == "complete" and file.attrs["set_digest"] != digest
    except (OSError, RuntimeError, KeyError):
        return  # none, or none that could be read
    if not worth:
        return
    target = path.with_name(PREVIOUS_FILE)
    temporary = path.with_name(f".frontend-sim-{secrets.token_hex(6)}.partial")
    try:
        with writing(target):
            shutil.copyfile(path, temporary)
            temporary.replace(target)
    finally:
        with suppress(OSError):
            temporary.unlink(missing_ok=True)


def previous_of(path: Path) -> Path | None:
    """Return the file of the night before that of a set, or of its directory; None without one."""
    folder = path if path.is_dir() else path.parent
    found = folder / PREVIOUS_FILE
    return found if found.is_file() else None
