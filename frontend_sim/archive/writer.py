"""Blocks of a run go in, HDF5 comes out, memory is bounded by the block."""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from datetime import UTC, datetime
from io import BytesIO, FileIO
from pathlib import Path
from types import TracebackType
from typing import TYPE_CHECKING, Any, Self

from frontend_sim.archive import layout
from frontend_sim.archive.group_writer import GroupWriter, put_ending
from frontend_sim.archive.interrupts import uninterrupted
from frontend_sim.archive.inventory import inventory
from frontend_sim.archive.names import dataset_name
from frontend_sim.archive.provenance import PROGRAM
from frontend_sim.archive.sink import Sink
from frontend_sim.archive.target import writing
from frontend_sim.archive.text import clean, put_text
from frontend_sim.measure.result import Result, Verdict, verdict_of
from frontend_sim.scenario.channel_scenario import ChannelScenario
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.scan_scenario import AnyScenario, ScanScenario
from frontend_sim.scenario.write import scenario_text
from frontend_sim.simulation.run import RunBlock
from frontend_sim.simulation.stretches import Stretches

if TYPE_CHECKING:
    import h5py

CACHE = 2**20
"""Bytes of unfinished chunks that HDF5 keeps for each dataset, room for one of the longest."""


class RecordWriter:
    """A record in the making, in the layout of ``layout.py``; a context manager.

    From version 1.10 on, the format of HDF5 guards its own structure by checksums; older readers
    are not served.

    Parameters
    ----------
    file : the file to make, which must not exist; or memory, from which the caller takes it
    path : what messages call it
    scenario : what is run
    resolved : content of ``/resolved``, see ``provenance.document``
    stretches : what of the run is kept; None for all of it
    """

    version = layout.FORMAT_VERSION

    def __init__(
        self,
        file: Path | BytesIO,
        path: object,
        scenario: AnyScenario,
        resolved: dict[str, Any],
        stretches: Stretches | None = None,
    ) -> None:
        """Open the file and write the scenario and what is needed to run it again."""
        if stretches is not None:
            self.version += layout.OF_A_PART
        self._path = path
        self._scenario = scenario
        self._resolved = resolved
        with writing(path):
            self._stream = file.open("x+b", buffering=0) if isinstance(file, Path) else file
        self._sink = Sink(self._stream)
        self._file = self._made()
        try:
            with self._hdf5():
                self._put_scenario(file.parent if isinstance(file, Path) else None)
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

    def _put_scenario(self, directory: Path | None) -> None:
        text, origin = _scenario_text(self._scenario, directory)
        dataset = put_text(self._file, layout.SCENARIO, text, "the scenario")
        dataset.attrs["origin"] = origin
        about = "JSON: every value in SI units with defaults filled in, files, versions"
        put_text(self._file, layout.RESOLVED, json.dumps(self._resolved, indent=1), about)

    def _put_head(self, verdict: Verdict) -> None:
        head = {
            "format": layout.FORMAT,
            "format_version": self.version,
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
        if isinstance(self._stream, FileIO):
            self._stream.close()


class Writer(RecordWriter):
    """The record of one channel, see ``RecordWriter``."""

    def __init__(
        self,
        file: Path | BytesIO,
        path: object,
        scenario: Scenario,
        resolved: dict[str, Any],
        stretches: Stretches | None = None,
    ) -> None:
        """Open the file and write the scenario and what is needed to run it again."""
        super().__init__(file, path, scenario, resolved, stretches)
        self._group = GroupWriter(self._file, scenario, stretches)

    def append(self, block: RunBlock) -> None:
        """Add some conversions, a stretch of waveform, or both."""
        with self._hdf5():
            self._group.append(block)

    def finish(self, notes: Iterable[str], results: Sequence[Result]) -> None:
        """Write what is known after the run: notes, tables, the head of the record."""
        with self._hdf5():
            self._group.finish(notes, results)
            self._put_head(verdict_of(results))


class ScanWriter(RecordWriter):
    """The record of a scan: a group for each channel, see ``RecordWriter``."""

    version = layout.SCAN_FORMAT_VERSION

    def __init__(
        self,
        file: Path | BytesIO,
        path: object,
        scenario: ScanScenario,
        channels: Mapping[str, ChannelScenario],
        resolved: dict[str, Any],
        stretches: Stretches | None = None,
    ) -> None:
        """Open the file, write the scenario, and make a group for each channel.

        Parameters
        ----------
        channels : name -> the channel as a scenario of its own
        """
        super().__init__(file, path, scenario, resolved, stretches)
        self._groups: dict[str, GroupWriter] = {}
        rhythm = scenario.rhythm
        with self._hdf5():
            above = self._file.create_group(layout.CHANNEL, track_order=True)
            above.attrs["description"] = "channels; each is laid out as a record of one channel"
            above.attrs["order"] = [clean(scenario.names[i]) for i in rhythm.order]
            above.attrs["sampling"] = scenario.scan.sampling
            above.attrs["slot"] = rhythm.slot
            for position, (name, channel) in enumerate(channels.items()):
                group = above.create_group(dataset_name(name), track_order=True)
                group.attrs["name"] = clean(name)
                group.attrs["position"] = position
                group.attrs["skew"] = rhythm.skew(position)
                group.attrs["duration"] = channel.simulation.duration
                self._groups[name] = GroupWriter(group, channel, stretches)

    def append(self, channel: str, block: RunBlock) -> None:
        """Add conversions or a stretch of waveform of a channel."""
        with self._hdf5():
            self._groups[channel].append(block)

    def finish(
        self,
        notes: Iterable[str],
        results: Sequence[Result],
        channels: Mapping[str, tuple[Iterable[str], Sequence[Result]]],
    ) -> None:
        """Write what is known after the run: notes, tables, the head of the record.

        Parameters
        ----------
        notes, results : of the scan as a whole
        channels : name -> notes and results of a channel
        """
        every = [*results, *(row for _, rows in channels.values() for row in rows)]
        with self._hdf5():
            for name, (said, rows) in channels.items():
                self._groups[name].finish(said, rows)
            put_ending(self._file, notes, results)
            self._put_head(verdict_of(every))


def _scenario_text(scenario: AnyScenario, directory: Path | None) -> tuple[str, str]:
    """Return the scenario for people to read, and where the text comes from."""
    if scenario.source:
        return scenario.source, "as written"
    return scenario_text(scenario, directory), "generated"
