"""What every stored run has: its head, its scenario, its notes and results, its end."""

from __future__ import annotations

import json
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import datetime
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING, Any

from frontend_sim.archive import layout
from frontend_sim.archive.closing import Closing
from frontend_sim.archive.reading import reading
from frontend_sim.archive.table import get_table
from frontend_sim.archive.verification import verify
from frontend_sim.errors import RecordError
from frontend_sim.measure.result import Result, Verdict

if TYPE_CHECKING:
    import h5py


class Stored(Closing):
    """An open record, read when something of it is asked for; a context manager.

    Parameters
    ----------
    path : of the file
    file : the open file
    group : where notes, results and arrays are; the file itself unless told otherwise
    """

    def __init__(self, path: Path, file: h5py.File, group: h5py.Group | None = None) -> None:
        """Take an open HDF5 file, and read its head. Raises RecordError if it has none."""
        self.path = path
        self._file = file
        self._group: h5py.Group = file if group is None else group
        with self._reading("its head"):
            head = dict(file.attrs)
            self.format_version = int(head["format_version"])
            self.title = str(head["title"])
            self.created = datetime.fromisoformat(head["created"])
            self.program_version = str(head["program_version"])
            self.scenario_digest = str(head["scenario_digest"])
            self.seed = int(head["seed"])
            self.verdict: Verdict = head["verdict"]

    @contextmanager
    def _reading(self, what: str) -> Iterator[None]:
        with reading(self.path, what):
            if not self._file:
                raise RecordError(f"{self.path} is closed; open it again")
            yield

    def _text(self, name: str) -> Any:
        with self._reading(name):
            return self._group[name].asstr()[()]

    @cached_property
    def notes(self) -> tuple[str, ...]:
        """What was decided during the run."""
        return tuple(str(note) for note in self._text(layout.NOTES))

    @cached_property
    def results(self) -> tuple[Result, ...]:
        """Measured numbers, then checks, in the order in which they were given."""
        found: tuple[Result, ...] = ()
        for name in (layout.MEASURE, layout.CHECK):
            with self._reading(name):
                if name in self._group:
                    found += get_table(self._group[name])
        return found

    @cached_property
    def scenario_text(self) -> str:
        """The scenario file as written; the text of a scenario that a program made."""
        with self._reading(layout.SCENARIO):
            return str(self._file[layout.SCENARIO].asstr()[()])

    @cached_property
    def resolved(self) -> dict[str, Any]:
        """Values in SI with defaults filled in, files with their digests, versions."""
        with self._reading(layout.RESOLVED):
            content = json.loads(self._file[layout.RESOLVED].asstr()[()])
            if not {"scenario", "files", "versions"} <= content.keys():
                raise ValueError("a part is missing")
            return dict(content)

    @property
    def source(self) -> str:
        """The scenario file as written; "" where a program made the scenario."""
        with self._reading(layout.SCENARIO):
            written = self._file[layout.SCENARIO].attrs["origin"] == "as written"
        return self.scenario_text if written else ""

    def verify(self) -> None:
        """Read everything, so that every checksum is tested.

        Raises
        ------
        RecordError
            If something differs from what was written; the message names the dataset.
        """
        with self._reading("its content"):
            verify(self._file, self.path)

    def _has(self, name: str) -> bool:
        with self._reading(name):
            return name in self._group

    def close(self) -> None:
        """Close the file; what was read before stays."""
        self._file.close()

    def __repr__(self) -> str:
        """Tell which file, and whether it is open."""
        return f"<{'' if self._file else 'closed '}{type(self).__name__} {self.path}>"
