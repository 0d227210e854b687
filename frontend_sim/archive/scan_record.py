"""The record of a scan, and those of its channels in it."""

from __future__ import annotations

from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING

from frontend_sim.archive import layout
from frontend_sim.archive.names import point_name
from frontend_sim.archive.rebuild import first_there, rebuild_scan
from frontend_sim.archive.record import Record
from frontend_sim.archive.stored import Stored
from frontend_sim.errors import RecordError
from frontend_sim.measure.result import verdict_of
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.simulation.scan import ScanRun

if TYPE_CHECKING:
    import h5py


class ScanRecord(Stored):
    """A stored scan; a context manager, which closes the file at its end.

    ``results`` are those of the scan as a whole: timing and crosstalk. This class reads format
    versions 2 and 4, see ``layout.py``.
    """

    def __init__(self, path: Path, file: h5py.File) -> None:
        """Take an open HDF5 file, and make sure that everything is in its place.

        Raises
        ------
        RecordError
            If a part is missing, or the lengths differ along time.
        """
        super().__init__(path, file)
        with self._reading("its content"):
            file[layout.SCENARIO], file[layout.RESOLVED], file[layout.NOTES]
            found = {point_name(name): group for name, group in file[layout.CHANNEL].items()}
            there = {str(group.attrs["name"]) for group in found.values()}
            left = [name for name in file[layout.CHANNEL].attrs["order"] if name not in there]
        if left:
            raise RecordError(
                f"{path}: the group of channel {left[0]!r} is missing; the record is damaged: "
                "restore it from a copy, or run its scenario again"
            )
        self.channels: dict[str, ChannelRecord] = {
            name: ChannelRecord(self, name, group) for name, group in found.items()
        }

    @cached_property
    def scenario(self) -> ScanScenario:
        """The scenario, for reading the run; its files are not compared, see ``rerun_scenario``."""
        with self._reading("its scenario"):
            files = {
                entry["name"]: first_there(entry, self.path) for entry in self.resolved["files"]
            }
            return rebuild_scan(self.resolved["scenario"], files, self.source, self.path)

    @property
    def skew(self) -> dict[str, float]:
        """How late each channel is sampled, by the converter's own clock [s]."""
        with self._reading(layout.CHANNEL):
            above = self._file[layout.CHANNEL].values()
            return {str(group.attrs["name"]): float(group.attrs["skew"]) for group in above}

    def run(self) -> ScanRun:
        """Read everything into memory."""
        channels = {name: record.run() for name, record in self.channels.items()}
        return ScanRun(self.scenario, channels, self.notes)


class ChannelRecord(Record):
    """One channel of a stored scan; it has the names of ``Record``, and closes the whole file."""

    def __init__(self, whole: ScanRecord, name: str, group: h5py.Group) -> None:
        """Take the group of the channel, see ``Record``."""
        Stored.__init__(self, whole.path, group.file, group)
        self._whole, self.name = whole, name
        self._refuse_incomplete()
        self.title = f"{self.title}: {name}" if self.title else name
        self.verdict = verdict_of(self.results)

    @cached_property
    def scenario(self) -> Scenario:
        """The channel as a scenario of its own."""
        scan = self._whole.scenario
        with self._reading("its timing"):
            duration = float(self._group.attrs["duration"])
        return scan.channels(duration)[scan.names.index(self.name)]
