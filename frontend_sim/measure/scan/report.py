"""All that can be said of a scan before any run."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.measure.result import Result
from frontend_sim.measure.scan.crosstalk import Crosstalk, crosstalk
from frontend_sim.measure.scan.order import OrderFound, best_order
from frontend_sim.measure.scan.skew import Skew, skews
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.simulation import ScanSimulation

Real = NDArray[np.float64]

INSTANTS = 256
"""Instants of a run at which the channels' levels are compared."""


@dataclass(frozen=True, eq=False)
class ScanReport:
    """Timing and crosstalk of a scan.

    Parameters
    ----------
    order : names of the channels, visit by visit
    period, slot : [s];  rate : codes of each channel per second, without those thrown away [Hz]
    best : the order with the least crosstalk; None where there is none, or nothing to choose
    """

    order: tuple[str, ...]
    sampling: str
    period: float
    slot: float
    rate: dict[str, float]
    skew: tuple[Skew, ...]
    crosstalk: Crosstalk
    best: OrderFound | None

    def as_dict(self) -> dict[str, Any]:
        """Return plain data for JSON, in SI units and LSB."""
        best = self.best
        return {
            "order": list(self.order),
            "sampling": self.sampling,
            "period": self.period,
            "slot": self.slot,
            "rate": self.rate,
            "skew": [
                {"channel": s.channel, "time": s.time, "frequency": s.frequency,
                 "degrees": s.degrees}
                for s in self.skew
            ],
            "crosstalk": {"ways": list(self.crosstalk.ways), "victim": {
                victim: dict(zip(self.crosstalk.names, row.tolist(), strict=True))
                for victim, row in zip(self.crosstalk.names, self.crosstalk.matrix, strict=True)
            }},
            "best_order": None if best is None else {
                "order": list(best.order), "error": best.error, "before": best.before,
                "exhaustive": best.exhaustive,
            },
        }  # fmt: skip

    def results(self) -> tuple[Result, ...]:
        """Return the numbers as rows of ``/measure``."""
        return (*_of_skew(self.skew), *_of_crosstalk(self.crosstalk))


def scan_results(scan: ScanScenario) -> tuple[Result, ...]:
    """Return the results of ``scan_report`` alone, without the search for another order."""
    return (*_of_skew(skews(scan)), *_of_crosstalk(crosstalk(scan)))


def _of_skew(skew: Iterable[Skew]) -> Iterator[Result]:
    for each in skew:
        yield Result(f"skew of {each.channel}", each.time, "s", method="timing")
        if each.degrees is not None:
            name = f"skew of {each.channel} at {each.frequency:g} Hz"
            yield Result(name, each.degrees, "deg", method="360 · frequency · skew")


def _of_crosstalk(found: Crosstalk) -> Iterator[Result]:
    if not found.ways:
        return
    method = f"fixed point of the scan, {', '.join(found.ways)}"
    for victim, row in zip(found.names, found.matrix, strict=True):
        for aggressor, value in zip(found.names, row, strict=True):
            if aggressor != victim:
                name = f"crosstalk from {aggressor} into {victim}"
                yield Result(name, float(value), "LSB", method=method)


def scan_report(scan: ScanScenario, prepared: ScanSimulation | None = None) -> ScanReport:
    """Tell of the timing of a scan, and what its channels do to each other.

    Parameters
    ----------
    prepared : the simulation, where there is one already

    Raises
    ------
    InputError
        If a circuit is unusable, or a stimulus cannot be read.
    """
    rhythm, tempo = scan.rhythm, scan.adc.tempo
    found = crosstalk(scan)
    best = None
    if np.any(found.matrix):
        best = best_order(scan, levels_apart(prepared or ScanSimulation(scan)))
    rates = {
        name: rhythm.visiting(scan.sampling_adc, i).true_rate for i, name in enumerate(scan.names)
    }
    return ScanReport(
        tuple(scan.names[i] for i in rhythm.order),
        scan.scan.sampling,
        rhythm.period / tempo,
        rhythm.slot / tempo,
        rates,
        skews(scan),
        found,
        best,
    )


def levels_apart(simulation: ScanSimulation) -> Real:
    """Return how far the pins of two channels are from each other at the same time at most.

    As a share of full scale, at some instants of the run, shape (N, N).
    """
    adc = simulation.scenario.adc
    instants: Real = np.arange(INSTANTS, dtype=np.float64) * (simulation.duration / INSTANTS)
    pins = np.array(
        [
            channel.values([channel.chain.points[-1]], instants)[0]
            for channel in map(simulation.simulation, simulation.channels)
        ]
    )
    apart: Real = np.max(np.abs(pins[:, None] - pins[None, :]), axis=2)
    return apart / (adc.high - adc.low)
