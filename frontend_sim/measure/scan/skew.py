"""How late each channel of a scan is sampled."""

from __future__ import annotations

from dataclasses import dataclass

from frontend_sim.scenario.scan_scenario import ScanScenario


@dataclass(frozen=True)
class Skew:
    """The skew of one channel against the channel that is sampled first.

    Parameters
    ----------
    channel : name
    time : from the first kept code of a scan to the channel's own, in true time [s]; a record's
        attribute ``skew`` is the same by the converter's clock, without its rate error
    frequency : at which the angle is told, None where none is known [Hz]
    """

    channel: str
    time: float
    frequency: float | None

    @property
    def degrees(self) -> float | None:
        """The same as an angle, 360 · frequency · time."""
        return None if self.frequency is None else 360.0 * self.frequency * self.time


def skews(scan: ScanScenario) -> tuple[Skew, ...]:
    """Return the skew of each channel, in the order of the file.

    The frequency is ``scan.skew_frequency``, else that of the channel's own stimulus.
    """
    rhythm = scan.rhythm
    return tuple(
        Skew(
            channel.name,
            rhythm.skew(position) / scan.adc.tempo,
            scan.scan.skew_frequency or getattr(channel.stimulus, "frequency", None),
        )
        for position, channel in enumerate(scan.channel)
    )
