"""The directory of a night: its journal, its records, and who works in it."""

from __future__ import annotations

import hashlib
import secrets
from contextlib import suppress
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from frontend_sim.archive.closing import Closing
from frontend_sim.archive.set_table import SET_FILE
from frontend_sim.archive.target import writing
from frontend_sim.errors import OutputError
from frontend_sim.replay.journal import Journal
from frontend_sim.replay.names import file_name
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.runs import PlannedRun

JOURNAL, RECORDS, LOCK = "night.journal", "records", "night.lock"
FORMAT = "frontend_sim night"
FORMAT_VERSION = 1
PARTIAL = ".partial"


@dataclass(frozen=True)
class _Known:
    """Where the last entry of a run stands, and what it was made from."""

    offset: int
    recipe: bytes
    settled: bool


class Store(Closing):
    """The directory that a set is replayed into; a context manager that holds it for itself.

    The journal is the truth: a run is done if the journal has an entry of its recipe, and if the
    record that the entry names has the checksum that it tells. No file counts for being there.
    """

    def __init__(self, directory: Path) -> None:
        """Open the directory, or make it.

        Raises
        ------
        OutputError
            If it cannot be made, holds something else, or another program works in it.
        """
        self.directory = directory
        _refuse_foreign(directory)
        with writing(directory):
            (directory / RECORDS).mkdir(parents=True, exist_ok=True)
        self._lock = _Lock(directory / LOCK)
        try:
            self.journal = Journal(directory / JOURNAL)
            self._known: dict[str, _Known] = {}
            self.created = self._read()
            self._clear()
        except BaseException:
            self._lock.release()
            raise

    def _read(self) -> datetime:
        created = None
        for offset, entry in self.journal.entries():
            if "format" in entry:
                _refuse_newer(self.directory, entry)
                created = created or datetime.fromisoformat(entry["created"])
            elif {"name", "recipe", "verdict"} <= entry.keys():
                self._know(entry, offset)
        if created is not None:
            return created
        now = datetime.now(UTC).replace(microsecond=0)
        head = {"format": FORMAT, "format_version": FORMAT_VERSION, "created": now.isoformat()}
        self.journal.append(head)
        return now

    def _know(self, entry: dict[str, Any], offset: int) -> None:
        settled = entry["verdict"] != "error" or bool(entry.get("lasting"))
        self._known[entry["name"]] = _Known(offset, bytes.fromhex(entry["recipe"]), settled)

    def _clear(self) -> None:
        """Remove what a killed call had not finished writing."""
        for file in (self.directory / RECORDS).glob(f"*{PARTIAL}"):
            with suppress(OSError):
                file.unlink()

    def outcome(self, run: PlannedRun) -> Outcome | None:
        """Return what a run gave, from the journal; its record is not looked at."""
        known = self._known.get(run.name)
        if known is None or known.recipe != bytes.fromhex(run.recipe):
            return None
        entry = self.journal.at(known.offset)
        return None if entry is None else Outcome.of_entry(entry, run.number)

    def record_name(self, run: PlannedRun) -> str:
        """Return the name of a run's record as seen from the directory, "" where none is kept."""
        stored = self._stored(run.name)
        return f"{RECORDS}/{stored['file']}" if stored else ""

    def is_done(self, run: PlannedRun) -> bool:
        """Return whether a run is done: by its recipe, and by the checksum of what is stored."""
        known = self._known.get(run.name)
        if known is None or not known.settled or known.recipe != bytes.fromhex(run.recipe):
            return False
        entry = self.journal.at(known.offset)
        if entry is None:
            return False
        stored = entry.get("record")
        if not stored:
            return True
        file = self.directory / RECORDS / stored["file"]
        try:
            with file.open("rb") as stream:
                checksum = hashlib.file_digest(stream, "sha256").hexdigest()
        except OSError:
            return False
        return checksum == str(stored["sha256"])

    def put(self, outcome: Outcome) -> int:
        """Store what a run gave, and return the bytes that it takes.

        Raises
        ------
        OutputError
            If the disk is full, or does not take it for another reason; nothing half written is
            left.
        """
        entry, size = outcome.entry(), 0
        if outcome.record is not None:
            name = file_name(outcome.name)
            self._put_record(name, outcome.record)
            size = len(outcome.record)
            checksum = hashlib.sha256(outcome.record).hexdigest()
            entry["record"] = {"file": name, "sha256": checksum, "size": size}
        before = self._stored(outcome.name)
        offset = self.journal.append(entry)
        self._know(entry, offset)
        if before and outcome.record is None:
            # The record of what the run was before it changed; the journal said that it is ours.
            with suppress(OSError):
                (self.directory / RECORDS / before["file"]).unlink(missing_ok=True)
        return size

    def _stored(self, name: str) -> dict[str, Any]:
        """Return what the journal tells of the record of a run; nothing where none is kept."""
        known = self._known.get(name)
        entry = None if known is None else self.journal.at(known.offset)
        return (entry or {}).get("record") or {}

    def _put_record(self, name: str, content: bytes) -> None:
        target = self.directory / RECORDS / name
        temporary = target.with_name(f".{secrets.token_hex(6)}{PARTIAL}")
        with writing(target):
            try:
                temporary.write_bytes(content)
                temporary.replace(target)
            except BaseException:
                with suppress(OSError):
                    temporary.unlink(missing_ok=True)
                raise

    @property
    def set_file(self) -> Path:
        """The file of the set."""
        return self.directory / SET_FILE

    def close(self) -> None:
        """Bring the journal to the disk, and let others work in the directory."""
        try:
            with suppress(OutputError):
                self.journal.sync()
            self.journal.close()
        finally:
            self._lock.release()


def _refuse_foreign(directory: Path) -> None:
    if directory.exists() and not directory.is_dir():
        raise OutputError(f"{directory} is a file; give the name of a directory")
    with writing(directory):
        there = directory.is_dir() and any(directory.iterdir())
    if there and not (directory / JOURNAL).is_file():
        raise OutputError(
            f"{directory} holds something else than a night of this program; give another directory"
        )


def _refuse_newer(directory: Path, entry: dict[str, Any]) -> None:
    if entry["format"] != FORMAT or int(entry["format_version"]) > FORMAT_VERSION:
        raise OutputError(
            f"{directory} was written by a newer version of this program; install that, or give "
            "another directory"
        )


class _Lock:
    """Keeps a second call out of a directory; the system releases it whatever ends the process."""

    def __init__(self, path: Path) -> None:
        """Take the lock. Raises OutputError if another process has it."""
        with writing(path):
            self._stream = path.open("ab")
        try:
            import fcntl
        except ImportError:  # no such locks on this system; two calls must then not meet
            return
        try:
            fcntl.flock(self._stream, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except OSError:
            self._stream.close()
            raise OutputError(
                f"{path.parent} is being worked in by another call; wait for its end, or give "
                "another directory"
            ) from None

    def release(self) -> None:
        """Give the lock back."""
        self._stream.close()
