"""All that can be said of a scan and of its channels before any run."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from frontend_sim.measure.response.inspection import Inspection, inspect_scenario
from frontend_sim.measure.scan.report import ScanReport, scan_report
from frontend_sim.scenario.scan_scenario import ScanScenario


@dataclass(frozen=True, eq=False)
class ScanInspection:
    """Timing and crosstalk of a scan, and an inspection of each channel.

    Parameters
    ----------
    channels : name -> what the transfer function from the stimulus to the pin tells, shared stages
        included as if the channel were connected all the time
    """

    title: str
    report: ScanReport
    channels: dict[str, Inspection]

    @property
    def notes(self) -> tuple[str, ...]:
        """What the reader should know beside the numbers, each with its channel."""
        return tuple(f"{name}: {note}" for name, one in self.channels.items() for note in one.notes)

    def as_dict(self) -> dict[str, Any]:
        """Return plain data for JSON."""
        return {
            "title": self.title,
            "scan": self.report.as_dict(),
            "channels": {name: one.as_dict() for name, one in self.channels.items()},
        }


def inspect_scan(scan: ScanScenario) -> ScanInspection:
    """Measure timing and crosstalk of a scan, and the response of each channel.

    Raises
    ------
    InputError
        If a circuit is unusable, or a stimulus cannot be read.
    """
    channels = {each.channel: inspect_scenario(each) for each in scan.channels(scan.run_length())}
    return ScanInspection(scan.title, scan_report(scan), channels)
