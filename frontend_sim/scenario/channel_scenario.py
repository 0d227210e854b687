"""One channel of a scan as a scenario of its own."""

from __future__ import annotations

from pydantic import Field

from frontend_sim.converter.paced import PacedAdc
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.rules import Path
from frontend_sim.values import Value


class Origin(Value):
    """Where in the file of a scan the parts of one channel stand.

    Parameters
    ----------
    text : the file as written, empty for a scan made in Python
    channel : number of the channel, from 0
    stages : how many stages are the channel's own; those that follow are shared
    checks : position in the file of each check of the channel
    """

    text: str
    channel: int
    stages: int
    checks: tuple[int, ...]

    def path(self, path: Path) -> Path:
        """Return where in the file a path of the channel's scenario is."""
        head = path[0] if path else None
        if (
            head == "chain"
            and len(path) > 1
            and isinstance(path[1], int)
            and path[1] >= self.stages
        ):
            return ("scan", "chain", path[1] - self.stages, *path[2:])
        if head in ("chain", "stimulus"):
            return ("channel", self.channel, *path)
        if head == "check" and len(path) > 1 and isinstance(path[1], int):
            return ("check", self.checks[path[1]], *path[2:])
        return path


def with_channel(path: Path, text: str, name: str) -> str:
    """Return a message about a channel's scenario, with its name where the path is that of all."""
    return f"channel {name!r}: {text}" if path[:1] == ("simulation",) else text


class ChannelScenario(Scenario):
    """What one channel of a scan sees: its stimulus, its chain and the shared one, its conversions.

    Run alone, the channel has the converter for itself between its visits, and draws random numbers
    of its own; within the scan, conversions draw by their number in the sequence.
    """

    adc: PacedAdc = Field(description="the converter, as the channel gets it")
    channel: str = Field(exclude=True, description="name of the channel")
    origin: Origin = Field(
        exclude=True, repr=False, description="where its parts stand in the file"
    )

    def in_file(self, path: Path) -> Path:
        """Return where in the file of the scan a path of this scenario is."""
        return self.origin.path(path)

    @property
    def file_text(self) -> str:
        """The file that the scenario stands in, as written."""
        return self.origin.text
