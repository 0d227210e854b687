"""What tables and plots of a scan ask for; a finished scan and its record both have it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Protocol

from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.simulation.finished import RunLike


class ScanLike(Protocol):
    """A finished scan, in memory or in a file; names as in ``simulation.scan.ScanRun``."""

    @property
    def scenario(self) -> ScanScenario:
        """The scenario of the scan."""

    @property
    def channels(self) -> Mapping[str, RunLike]:
        """Name -> the channel's run."""

    @property
    def notes(self) -> tuple[str, ...]:
        """What was decided during the run."""
