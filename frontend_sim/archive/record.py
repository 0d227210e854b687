"""A record, read from HDF5 when something of it is asked for."""

from __future__ import annotations

import json
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import datetime
from functools import cached_property
from pathlib import Path
from types import TracebackType
from typing import TYPE_CHECKING, Any, Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.archive import layout
from frontend_sim.archive.grid import grid_of
from frontend_sim.archive.names import point_name
from frontend_sim.archive.reading import reading
from frontend_sim.archive.rebuild import first_there, rebuild
from frontend_sim.archive.table import get_table
from frontend_sim.archive.verification import verify
from frontend_sim.archive.waveform import Waveforms
from frontend_sim.errors import RecordError
from frontend_sim.measure.result import Result, Verdict
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.run import GridReport, Run, RunBlock

if TYPE_CHECKING:
    import h5py

Real = NDArray[np.float64]
Codes = NDArray[np.int64]


class Record:
    """A stored run; a context manager, which closes the file at its end.

    It has the names of ``Run``, so that what reads a run reads a record as well. Each access to
    an array reads it from the file and checks it; keep the array if it is needed again, or take
    ``conversions`` for a stretch. This class reads format version 1, see ``layout.py``.
    """

    def __init__(self, path: Path, file: h5py.File) -> None:
        """Take an open HDF5 file, and make sure that everything is in its place.

        Raises
        ------
        RecordError
            If a part is missing, or the lengths differ along time.
        """
        self.path = path
        self._file = file
        with self._reading("its head"):
            head = dict(file.attrs)
            self.format_version = int(head["format_version"])
            self.title = str(head["title"])
            self.created = datetime.fromisoformat(head["created"])
            self.program_version = str(head["program_version"])
            self.scenario_digest = str(head["scenario_digest"])
            self.seed = int(head["seed"])
            self.verdict: Verdict = head["verdict"]
        self._refuse_incomplete()

    def _refuse_incomplete(self) -> None:
        with self._reading("its content"):
            self._file[layout.SCENARIO], self._file[layout.RESOLVED], self._file[layout.NOTES]
            conversions = self._file[layout.ADC]
            groups = [[conversions[column.name] for column in layout.CONVERSIONS]]
            if layout.WAVEFORM in self._file:
                waveform = self._file[layout.WAVEFORM]
                groups.append([waveform[layout.TIME], *waveform.values()])
            for group in groups:
                if any(dataset.shape != (len(group[0]),) for dataset in group):
                    raise RecordError(
                        f"{self.path}: the datasets beside {group[0].name} differ in length; the "
                        "record is damaged: restore it from a copy, or run its scenario again"
                    )

    @contextmanager
    def _reading(self, what: str) -> Iterator[None]:
        with reading(self.path, what):
            if not self._file:
                raise RecordError(f"{self.path} is closed; open it again")
            yield

    def _stretch(self, name: str, start: int = 0, stop: int | None = None) -> Any:
        with self._reading(name):
            dataset = self._file[name]
            return dataset[slice(*slice(start, stop).indices(len(dataset)))]

    def _text(self, name: str) -> Any:
        with self._reading(name):
            return self._file[name].asstr()[()]

    @property
    def count(self) -> int:
        """Number of conversions."""
        with self._reading(layout.ADC):
            return len(self._file[layout.ADC][layout.TIME])

    @property
    def time(self) -> Real:
        """Sampling instants, shape (K,) [s]."""
        values: Real = self._conversion("time")
        return values

    @property
    def pin(self) -> Real:
        """Exact analog values at these instants, before noise and rounding, shape (K,) [V]."""
        values: Real = self._conversion("pin")
        return values

    @property
    def codes(self) -> Codes:
        """Codes of the converter, shape (K,) [counts]."""
        codes: Codes = self._conversion("codes")
        return codes

    @property
    def voltage(self) -> Real:
        """The codes read back, shape (K,) [V]."""
        values: Real = self._conversion("voltage")
        return values

    @property
    def overrange(self) -> NDArray[np.bool_]:
        """Where the code was clipped, shape (K,)."""
        flags: NDArray[np.bool_] = self._conversion("overrange")
        return flags

    def _conversion(self, field: str, start: int = 0, stop: int | None = None) -> Any:
        column = next(column for column in layout.CONVERSIONS if column.field == field)
        values = self._stretch(f"{layout.ADC}/{column.name}", start, stop)
        return values.astype(np.int64) if field == "codes" else values

    def conversions(self, start: int = 0, stop: int | None = None) -> RunBlock:
        """Read conversions ``start`` to ``stop``, counted as in a slice, without waveform."""
        first, last, _ = slice(start, stop).indices(self.count)
        fields = {
            column.field: self._conversion(column.field, first, last)
            for column in layout.CONVERSIONS
        }
        return RunBlock(start=first, waveform_time=np.empty(0), waveform={}, **fields)

    @property
    def waveform_time(self) -> Real:
        """Time axis of the waveforms, shape (W,) [s]; empty where none was kept."""
        if self._has(layout.WAVEFORM):
            values: Real = self._stretch(f"{layout.WAVEFORM}/{layout.TIME}")
            return values
        return np.empty(0)

    @cached_property
    def waveform(self) -> Waveforms:
        """Point of the chain -> its waveform [V], read when asked for."""
        with self._reading(layout.WAVEFORM):
            group = self._file.get(layout.WAVEFORM, ())
            names = [name for name in group if name != layout.TIME]
        paths = {point_name(name): f"{layout.WAVEFORM}/{name}" for name in names}
        return Waveforms(paths, self._stretch)

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
                if name in self._file:
                    found += get_table(self._file[name])
        return found

    @property
    def grid(self) -> GridReport | None:
        """How good a discrete model was; None in the exact mode."""
        return grid_of(self.results)

    @cached_property
    def scenario_text(self) -> str:
        """The scenario file as written; the text of a scenario that a program made."""
        return str(self._text(layout.SCENARIO))

    @cached_property
    def resolved(self) -> dict[str, Any]:
        """Values in SI with defaults filled in, files with their digests, versions."""
        with self._reading(layout.RESOLVED):
            content = json.loads(self._text(layout.RESOLVED))
            if not {"scenario", "files", "versions"} <= content.keys():
                raise ValueError("a part is missing")
            return dict(content)

    @property
    def source(self) -> str:
        """The scenario file as written; "" where a program made the scenario."""
        with self._reading(layout.SCENARIO):
            written = self._file[layout.SCENARIO].attrs["origin"] == "as written"
        return self.scenario_text if written else ""

    @cached_property
    def scenario(self) -> Scenario:
        """The scenario, for reading the run; its files are not compared, see ``rerun_scenario``."""
        with self._reading("its scenario"):
            files = {
                entry["name"]: first_there(entry, self.path) for entry in self.resolved["files"]
            }
            return rebuild(self.resolved["scenario"], files, self.source, self.path)

    def run(self) -> Run:
        """Read everything into memory."""
        block = self.conversions()
        fields = {column.field: getattr(block, column.field) for column in layout.CONVERSIONS}
        return Run(
            scenario=self.scenario,
            waveform_time=self.waveform_time,
            waveform=dict(self.waveform),
            grid=self.grid,
            notes=self.notes,
            **fields,
        )

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
            return name in self._file

    def close(self) -> None:
        """Close the file; what was read before stays."""
        self._file.close()

    def __enter__(self) -> Self:
        """Return the record."""
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        """Close the file."""
        self.close()

    def __repr__(self) -> str:
        """Tell which file, and whether it is open."""
        return f"<{'Record' if self._file else 'closed Record'} {self.path}>"
