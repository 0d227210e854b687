"""A record, read from HDF5 when something of it is asked for."""

from __future__ import annotations

from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.archive import layout
from frontend_sim.archive.grid import grid_of
from frontend_sim.archive.kept import Kept, get_stretches
from frontend_sim.archive.names import point_name
from frontend_sim.archive.rebuild import first_there, rebuild
from frontend_sim.archive.stored import Stored
from frontend_sim.archive.waveform import Waveforms
from frontend_sim.errors import RecordError
from frontend_sim.quantities.counting import counted
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.run import GridReport, Run, RunBlock
from frontend_sim.simulation.stretches import Stretches

if TYPE_CHECKING:
    import h5py

Real = NDArray[np.float64]
Codes = NDArray[np.int64]


class Record(Stored):
    """A stored run; a context manager, which closes the file at its end.

    It has the names of ``Run``, so that what reads a run reads a record as well. Each access to
    an array reads it from the file and checks it; keep the array if it is needed again, or take
    ``conversions`` for a stretch. Where the record keeps a part of its run alone, arrays hold that
    part, and ``stretches`` tells which it is. This class reads format versions 1 and 3, see
    ``layout.py``.
    """

    def __init__(self, path: Path, file: h5py.File) -> None:
        """Take an open HDF5 file, and make sure that everything is in its place.

        Raises
        ------
        RecordError
            If a part is missing, or the lengths differ along time.
        """
        super().__init__(path, file)
        self._refuse_incomplete()

    def _refuse_incomplete(self) -> None:
        with self._reading("its content"):
            self._file[layout.SCENARIO], self._file[layout.RESOLVED], self._group[layout.NOTES]
            conversions = self._group[layout.ADC]
            groups = [[conversions[column.name] for column in layout.CONVERSIONS]]
            if layout.KEPT in self._group:
                groups[0].append(conversions[layout.NUMBER.name])
            further = (layout.STIMULUS, layout.HELD.name)
            groups[0] += [conversions[name] for name in further if name in conversions]
            if layout.WAVEFORM in self._group:
                waveform = self._group[layout.WAVEFORM]
                groups.append([waveform[layout.TIME], *waveform.values()])
            for group in groups:
                if any(dataset.shape != (len(group[0]),) for dataset in group):
                    raise RecordError(
                        f"{self.path}: the datasets beside {group[0].name} differ in length; the "
                        "record is damaged: restore it from a copy, or run its scenario again"
                    )

    def _stretch(self, name: str, start: int = 0, stop: int | None = None) -> Any:
        with self._reading(name):
            dataset = self._group[name]
            return dataset[slice(*slice(start, stop).indices(len(dataset)))]

    @property
    def count(self) -> int:
        """Number of conversions that are kept."""
        with self._reading(layout.ADC):
            return len(self._group[layout.ADC][layout.TIME])

    @cached_property
    def _kept(self) -> Kept | None:
        with self._reading(layout.KEPT):
            return get_stretches(self._group)

    @property
    def stretches(self) -> Stretches | None:
        """Which stretches of the run are kept; None where all of it is."""
        return None if self._kept is None else self._kept.stretches

    @property
    def whole_count(self) -> int:
        """Number of conversions of the whole run."""
        return self.count if self._kept is None else self._kept.conversions

    @property
    def numbers(self) -> NDArray[np.int64]:
        """Numbers of the conversions in the whole run, increasing, shape (K,)."""
        if self._kept is None:
            return np.arange(self.count)
        numbers: NDArray[np.int64] = self._stretch(f"{layout.ADC}/{layout.NUMBER.name}")
        return numbers

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

    @property
    def stimulus(self) -> Real:
        """What arrived at the sensor at these instants, in the SI unit of the stimulus, shape (K,).

        Empty where the stimulus is a voltage, and in records of a program that did not keep it.
        """
        values: Real = self._further(layout.STIMULUS)
        return values

    @property
    def held(self) -> Real:
        """Voltage of the sampling capacitor, before noise and rounding, shape (K,) [V].

        Empty where the converter has no input network.
        """
        values: Real = self._further(layout.HELD.name)
        return values

    def _further(self, column: str, start: int = 0, stop: int | None = None) -> Any:
        name = f"{layout.ADC}/{column}"
        return self._stretch(name, start, stop) if self._has(name) else np.empty(0)

    def _conversion(self, field: str, start: int = 0, stop: int | None = None) -> Any:
        column = next(column for column in layout.CONVERSIONS if column.field == field)
        values = self._stretch(f"{layout.ADC}/{column.name}", start, stop)
        return values.astype(np.int64) if field == "codes" else values

    def conversions(self, start: int = 0, stop: int | None = None) -> RunBlock:
        """Read conversions ``start`` to ``stop`` of those kept, as in a slice, without waveform."""
        first, last, _ = slice(start, stop).indices(self.count)
        fields = {
            column.field: self._conversion(column.field, first, last)
            for column in layout.CONVERSIONS
        }
        fields["stimulus"] = self._further(layout.STIMULUS, first, last)
        fields["held"] = self._further(layout.HELD.name, first, last)
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
            group = self._group.get(layout.WAVEFORM, ())
            names = [name for name in group if name != layout.TIME]
        paths = {point_name(name): f"{layout.WAVEFORM}/{name}" for name in names}
        return Waveforms(paths, self._stretch)

    @property
    def grid(self) -> GridReport | None:
        """How good a discrete model was; None in the exact mode."""
        return grid_of(self.results)

    @cached_property
    def scenario(self) -> Scenario:
        """The scenario, for reading the run; its files are not compared, see ``rerun_scenario``."""
        with self._reading("its scenario"):
            files = {
                entry["name"]: first_there(entry, self.path) for entry in self.resolved["files"]
            }
            return rebuild(self.resolved["scenario"], files, self.source, self.path)

    def run(self) -> Run:
        """Read everything into memory.

        Raises
        ------
        RecordError
            If the record keeps a part of its run alone.
        """
        if self._kept is not None:
            raise RecordError(
                f"{self.path} keeps {self.count:,} of {counted(self.whole_count, 'conversion')}, "
                "which make no run; read its arrays, or run its scenario again for all of them: "
                "rerun(record)"
            )
        block = self.conversions()
        fields = {column.field: getattr(block, column.field) for column in layout.CONVERSIONS}
        return Run(
            scenario=self.scenario,
            waveform_time=self.waveform_time,
            waveform=dict(self.waveform),
            grid=self.grid,
            notes=self.notes,
            stimulus=block.stimulus,
            held=block.held,
            **fields,
        )
