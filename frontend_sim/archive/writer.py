"""Blocks of a run go in, HDF5 comes out, memory is bounded by the block."""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from datetime import UTC, datetime
from pathlib import Path
from types import TracebackType
from typing import TYPE_CHECKING, Any, Self

from frontend_sim.archive import layout
from frontend_sim.archive.datasets import attach_axis, extend, open_column
from frontend_sim.archive.interrupts import uninterrupted
from frontend_sim.archive.inventory import inventory
from frontend_sim.archive.names import dataset_name
from frontend_sim.archive.provenance import PROGRAM
from frontend_sim.archive.sink import Sink
from frontend_sim.archive.table import put_table
from frontend_sim.archive.target import writing
from frontend_sim.archive.text import clean, put_text
from frontend_sim.measure.result import Result, verdict_of
from frontend_sim.quantities import SIGNALS
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.signal import PIN
from frontend_sim.scenario.write import scenario_text
from frontend_sim.simulation.run import RunBlock

if TYPE_CHECKING:
    import h5py

CACHE = 2**20
"""Bytes of unfinished chunks that HDF5 keeps for each dataset, room for one of the longest."""


class Writer:
    """A record in the making, in the layout of ``layout.py``; a context manager.

    From version 1.10 on, the format of HDF5 guards its own structure by checksums; older readers
    are not served.

    Parameters
    ----------
    file : the file to make, which must not exist
    path : what messages call it
    scenario : what is run
    resolved : content of ``/resolved``, see ``provenance.document``
    """

    def __init__(
        self, file: Path, path: object, scenario: Scenario, resolved: dict[str, Any]
    ) -> None:
        """Open the file and write the scenario and what is needed to run it again."""
        self._path = path
        self._scenario = scenario
        self._resolved = resolved
        self._points: tuple[str, ...] | None = None
        with writing(path):
            self._stream = file.open("x+b", buffering=0)
        self._sink = Sink(self._stream)
        self._file = self._made()
        try:
            with self._hdf5():
                self._put_scenario(file.parent)
        except BaseException:
            self._close()
            raise

    def _made(self) -> h5py.File:
        import h5py

        with uninterrupted():
            return h5py.File(
                self._sink, "w", libver=("v110", "v110"), track_order=True, rdcc_nbytes=CACHE
            )

    @contextmanager
    def _hdf5(self) -> Iterator[None]:
        """Guard a stretch of calls into HDF5."""
        with writing(self._path):
            with uninterrupted():
                yield
            self._sink.check()

    def _put_scenario(self, directory: Path) -> None:
        text, origin = _scenario_text(self._scenario, directory)
        dataset = put_text(self._file, layout.SCENARIO, text, "the scenario")
        dataset.attrs["origin"] = origin
        about = "JSON: every value in SI units with defaults filled in, files, versions"
        put_text(self._file, layout.RESOLVED, json.dumps(self._resolved, indent=1), about)

    def append(self, block: RunBlock) -> None:
        """Add some conversions, a stretch of waveform, or both."""
        with self._hdf5():
            if len(block.time) > 0:
                self._append_conversions(block)
            self._points = self._points or tuple(block.waveform)
            if len(block.waveform_time) > 0:
                self._append_waveform(block)

    def _append_conversions(self, block: RunBlock) -> None:
        if layout.ADC not in self._file:
            self._open_conversions(len(block.time))
        group = self._file[layout.ADC]
        for column in layout.CONVERSIONS:
            extend(group[column.name], getattr(block, column.field))

    def _open_conversions(self, expected: int) -> None:
        adc = self._scenario.adc
        group = self._file.create_group(layout.ADC, track_order=True)
        group.attrs["description"] = "conversions; low, high and lsb are in V"
        for name in ("bits", "code_format", "lowest_code", "highest_code", "low", "high", "lsb"):
            group.attrs[name] = getattr(adc, name)
        for column in layout.CONVERSIONS:
            open_column(group, column, column.kind or layout.code_type(adc), expected)
        attach_axis(group)

    def _append_waveform(self, block: RunBlock) -> None:
        if layout.WAVEFORM not in self._file:
            self._open_waveform(len(block.waveform_time))
        group = self._file[layout.WAVEFORM]
        extend(group[layout.TIME], block.waveform_time)
        for point, values in block.waveform.items():
            extend(group[dataset_name(point)], values)

    def _open_waveform(self, expected: int) -> None:
        group = self._file.create_group(layout.WAVEFORM, track_order=True)
        group.attrs["description"] = "points of the chain, from the stimulus to the pin"
        open_column(group, layout.WAVEFORM_TIME, "<f8", expected)
        units = dict(zip(self._scenario.points(), self._scenario.units(), strict=True))
        for point in self._points or ():
            unit = units.get(point, PIN)
            noun = SIGNALS[unit].name
            column = layout.Column(dataset_name(point), "", unit or "1", f"{noun} at this point")
            open_column(group, column, "<f8", expected).attrs["point"] = clean(point)
        attach_axis(group)

    def finish(self, notes: Iterable[str], results: Sequence[Result]) -> None:
        """Write what is known after the run: notes, tables, the head of the record."""
        checks = [result for result in results if result.verdict != "none"]
        measures = [result for result in results if result.verdict == "none"]
        with self._hdf5():
            if layout.ADC not in self._file:
                self._open_conversions(0)
            if self._points and layout.WAVEFORM not in self._file:
                self._open_waveform(0)
            put_text(self._file, layout.NOTES, tuple(notes), "what was decided during the run")
            put_table(self._file, layout.MEASURE, measures, "measured numbers")
            put_table(self._file, layout.CHECK, checks, "numbers held against their limits")
            self._put_head(verdict_of(checks))

    def _put_head(self, verdict: str) -> None:
        head = {
            "format": layout.FORMAT,
            "format_version": layout.FORMAT_VERSION,
            "title": clean(self._scenario.title),
            "created": datetime.now(UTC).isoformat(timespec="seconds"),
            "program_version": self._resolved["versions"][PROGRAM],
            "scenario_digest": self._resolved["scenario_digest"],
            "seed": self._scenario.seed,
            "verdict": verdict,
        }
        for name, value in head.items():
            self._file.attrs[name] = value
        self._file.attrs[layout.INVENTORY] = inventory(self._file)

    def __enter__(self) -> Self:
        """Return the writer."""
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        """Close the file; it is whole if no error came up."""
        if kind is not None:
            self._close()
            return
        with self._hdf5():
            self._close()

    def _close(self) -> None:
        """Close HDF5 before the file below it, in which it has its last word."""
        with uninterrupted():
            self._file.close()
        self._stream.close()


def _scenario_text(scenario: Scenario, directory: Path) -> tuple[str, str]:
    """Return the scenario for people to read, and where the text comes from."""
    if scenario.source:
        return scenario.source, "as written"
    return scenario_text(scenario, directory), "generated"
