"""The error of the codes against the physical quantity, and the parts that it is the sum of."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.aliasing.aliasing import Aliasing
from frontend_sim.measure.aliasing.split import Edges
from frontend_sim.measure.arrays import Real
from frontend_sim.measure.error.ideal import Ideal
from frontend_sim.measure.error.part import Part
from frontend_sim.measure.error.stations import Stations
from frontend_sim.scenario.channel_scenario import ChannelScenario
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import Simulation
from frontend_sim.simulation.stretches import refuse_part

if TYPE_CHECKING:
    from frontend_sim.simulation.finished import Finished

BEYOND = "beyond half the rate"
"""The part that ``band_limited`` leaves out."""

ORDER = (
    "timing", "gain", "offset", BEYOND, "settling", "aliasing", "channel change",
    "nonlinearity",
    "acquisition", "noise", "clipping", "quantization", "noise and quantization",
)  # fmt: skip
"""Causes in the order of the signal path."""


@dataclass(frozen=True, eq=False)
class TotalError:
    """Codes read back, less the ideal, referred to the pin; and what it is made of.

    Parameters
    ----------
    time : true instants of the codes, shape (K,) [s]
    volts : the error, shape (K,) [V]
    ideal : the line, or curve, that firmware reads by
    lsb : width of a code [V]
    parts : causes whose waveforms add up to the error
    unsure : how far the error itself is known, 0 unless the ideal is band-limited, shape (K,) [V]
    uncertainty : how far the split into settling and aliasing is known, 0 where it is exact [V]
    """

    time: Real
    volts: Real
    ideal: Ideal
    lsb: float
    parts: tuple[Part, ...]
    unsure: Real
    uncertainty: float = 0.0

    @cached_property
    def total(self) -> Part:
        """The whole error as one part."""
        return Part("total", self.volts)

    @cached_property
    def remainder(self) -> float:
        """What the parts have in common: mean square of the total less those of the parts [V²].

        Twice the sum of the mean products of all pairs; above zero where causes push the same way,
        below where one takes from another.
        """
        return self.total.rms**2 - sum(part.rms**2 for part in self.parts)

    @property
    def common_rms(self) -> float:
        """Root of the size of ``remainder``, with its sign [V]."""
        return math.copysign(math.sqrt(abs(self.remainder)), self.remainder)

    def quantity(self, volts: float) -> float:
        """Return an error of the pin as one of the quantity, without sign [unit]."""
        return abs(volts / self.ideal.gain)

    def after(self, instant: float) -> TotalError:
        """Return the error of the codes from an instant on [s].

        Raises
        ------
        MeasureError
            If no code is that late.
        """
        first = int(np.searchsorted(self.time, instant))
        if first == len(self.time):
            raise MeasureError(f"no conversion follows the instant {instant:g} s")
        parts = tuple(Part(part.name, part.volts[first:]) for part in self.parts)
        return replace(
            self,
            time=self.time[first:],
            volts=self.volts[first:],
            parts=parts,
            unsure=self.unsure[first:],
        )


def total_error(
    run: Finished,
    gain: float | None = None,
    offset: float | None = None,
    edges: Edges = "reflected",
    band_limited: bool = False,
    prepared: Simulation | None = None,
    curve: bool = False,
) -> TotalError:
    """Return the error of the codes of a run against the quantity that arrived.

        error[k] = (voltage read[k] - offset) - gain · u(k / rate)

    at the instants where firmware believes to have looked. Each part is what one idealization less
    changes, so their sum is the error, code by code:

    * timing: the true instants (delay, jitter, wander and rate of the clock)
    * gain, offset: of the chain at its temperature, at zero frequency, and of the converter
    * beyond half the rate: the codes stand for the stimulus under a perfect band limit
    * settling: everything else that the linear chain and the converter's own filter do to it
    * aliasing: what lies above half the rate and comes through (``measure.aliasing``)
    * channel change: what a shared stage still holds of the channel before, in a scan
    * nonlinearity: limits and curves of the chain; later, of the converter's codes
    * acquisition: what the converter's input network has not settled to
    * noise: of the circuit, of the converter, of its reference
    * clipping: what the range cuts off; quantization: rounding, with dither and averaging
    * noise and quantization: both at once, of a channel of a scan whose converter draws noise

    Parameters
    ----------
    run : a ``Run`` or an open ``Record``
    gain : volts for one unit of the quantity; left out, the chain's nominal gain at dc [V/unit]
    offset : voltage for a quantity of zero; left out, see ``Ideal`` [V]
    edges : how a recording goes on beyond its ends
    band_limited : whether the codes are to stand for the stimulus under a perfect band limit at
        half the rate: what lies beyond is then interference, and keeping it out is no error
    prepared : the simulation of the run, where there is one already
    curve : whether firmware reads by the sensor's own nominal curve rather than by the line; what
        it bends away from the line is then no error, and nonlinearity is what is left beside it

    Raises
    ------
    MeasureError
        If the chain has no gain at dc and none is given, no sensor has a curve to read by, the run
        is empty, too long or not kept whole, or codes of several looks come from a scan that keeps
        the pin between them to itself.
    """
    refuse_part(run, "the total error")
    refuse_looks_of_a_scan(run.scenario)
    if len(run.time) == 0:
        raise MeasureError("the run has no conversion; lengthen simulation.duration")
    simulation = prepared or Simulation(run.scenario)
    ideal = Ideal.of(run.scenario, gain, offset, curve)
    aliasing = Aliasing.of(run.scenario, simulation.chain, edges)
    stations = Stations(run, simulation, ideal, aliasing)
    found: dict[str, Real] = {}
    start = last = line = np.zeros(0)
    for name, now in (*stations.before_the_pin(), *stations.behind_the_pin()):
        if name:
            found[name] = found[name] + (now - last) if name in found else now - last
        else:
            start = line = now
        last = now
    unsure = np.zeros(len(start))
    if band_limited and BEYOND in found:
        start = start + found.pop(BEYOND)
        unsure = abs(stations.gain) * stations.beyond.unsure
    if ideal.curve is not None:
        bent = stations.ideal_codes() - line
        start, found["nonlinearity"] = start + bent, found["nonlinearity"] - bent
    parts = tuple(Part(name, found[name]) for name in ORDER if name in found)
    return TotalError(
        run.time,
        run.voltage - start,
        ideal,
        run.scenario.adc.lsb,
        parts,
        unsure,
        stations.folded.uncertainty,
    )


def refuse_looks_of_a_scan(scenario: Scenario) -> None:
    """Refuse averages of a scan whose pin, or capacitor, other channels have a part in.

    A run keeps it at the last look of each code alone, and a channel by itself cannot tell what it
    was at the others.

    Raises
    ------
    MeasureError
        If it is such a channel.
    """
    if not isinstance(scenario, ChannelScenario) or scenario.adc.looks == 1:
        return
    if len(scenario.chain) > scenario.origin.stages or scenario.adc.input is not None:
        raise MeasureError(
            "each code is an average over several looks, and what other channels leave at them is "
            "kept for the last one alone; take adc.averaging out, or give the channel stages of "
            "its own"
        )
