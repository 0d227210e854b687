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
MOST_STALE = 1000
"""Entries of what runs were before, which a journal may have beyond two for each run."""


@dataclass(frozen=True, slots=True)
class _Known:
    """Where the last entry of a run stands, what it was made from, and the file of its record."""

    offset: int
    recipe: bytes
    settled: bool
    record: str


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
            directory.mkdir(parents=True, exist_ok=True)
        self._lock = _Lock(directory / LOCK)
        try:
            self.journal = Journal(directory / JOURNAL)
            with writing(directory):
                (directory / RECORDS).mkdir(exist_ok=True)
            self._known: dict[str, _Known] = {}
            self.created = self._read()
            self._clear()
            self._forget_old_entries()
        except BaseException:
            self._lock.release()
            raise

    def _read(self) -> datetime:
        created = None
        self._known.clear()
        self._head = self._stale = 0
        for offset, entry in self.journal.entries():
            if "format" in entry:
                _refuse_newer(self.directory, entry)
                if created is None:
                    created, self._head = datetime.fromisoformat(entry["created"]), offset
            elif {"name", "recipe", "verdict"} <= entry.keys():
                self._stale += entry["name"] in self._known
                self._know(entry, offset)
        if created is not None:
            return created
        now = datetime.now(UTC).replace(microsecond=0)
        head = {"format": FORMAT, "format_version": FORMAT_VERSION, "created": now.isoformat()}
        self._head = self.journal.append(head)
        return now

    def _know(self, entry: dict[str, Any], offset: int) -> None:
        settled = entry["verdict"] != "error" or bool(entry.get("lasting"))
        record = (entry.get("record") or {}).get("file", "")
        recipe = bytes.fromhex(entry["recipe"])
        self._known[entry["name"]] = _Known(offset, recipe, settled, record)

    def _clear(self) -> None:
        """Remove what a killed call had not finished writing."""
        for folder in (self.directory, self.directory / RECORDS):
            for file in folder.glob(f".*{PARTIAL}"):
                with suppress(OSError):
                    file.unlink()

    def _forget_old_entries(self) -> None:
        """Reduce a journal that has many entries of each run, as years of nights leave it."""
        if self._stale < MOST_STALE + 2 * len(self._known):
            return
        with suppress(OutputError):  # it is only long
            offsets = sorted(known.offset for known in self._known.values())
            self.journal.reduce([self._head, *offsets])
        self._read()

    def outcome(self, run: PlannedRun) -> Outcome | None:
        """Return what a run gave, from the journal; its record is not looked at."""
        known = self._of(run)
        entry = None if known is None else self.journal.at(known.offset)
        return None if entry is None else Outcome.of_entry(entry, run.number)

    def record_name(self, run: PlannedRun) -> str:
        """Return the name of a run's record as seen from the directory, "" where none is kept."""
        known = self._of(run)
        return f"{RECORDS}/{known.record}" if known is not None and known.record else ""

    def is_done(self, run: PlannedRun) -> bool:
        """Return whether a run is done: by its recipe, and by the checksum of what is stored.

        A run whose record is damaged is forgotten: until it is done again it counts nowhere.
        """
        known = self._of(run)
        if known is None or not known.settled:
            return False
        whole = not known.record or self._is_whole(known)
        if not whole:
            del self._known[run.name]
        return whole

    def _of(self, run: PlannedRun) -> _Known | None:
        """Return what is known of a run; None where what is stored was made from something else."""
        known = self._known.get(run.name)
        return known if known is not None and known.recipe == bytes.fromhex(run.recipe) else None

    def _is_whole(self, known: _Known) -> bool:
        entry = self.journal.at(known.offset)
        try:
            with (self.directory / RECORDS / known.record).open("rb") as stream:
                checksum = hashlib.file_digest(stream, "sha256").hexdigest()
        except OSError:
            return False
        return entry is not None and checksum == str(entry["record"]["sha256"])

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
        before = self._known.get(outcome.name)
        if before and before.record and outcome.record is None:
            # The record of what the run was before it changed; the journal said that it is ours.
            with suppress(OSError):
                (self.directory / RECORDS / before.record).unlink(missing_ok=True)
        self._know(entry, self.journal.append(entry))
        return size

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
        # A call that was killed at its very beginning leaves its lock alone.
        there = directory.is_dir() and any(each.name != LOCK for each in directory.iterdir())
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
