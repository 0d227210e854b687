"""What is left of one channel in the codes of another.

Sources that rest make the same scan again and again; its fixed point is solved for, no run is
needed: see ``simulation.shared_period`` for stages behind the multiplexer, and
``simulation.switched_period`` for a sampling capacitor.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from frontend_sim.analog.chain import chain_of
from frontend_sim.scenario.rhythm import Rhythm
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.scenario.spread import stages_at
from frontend_sim.simulation.scan_charge import charge_matrix
from frontend_sim.simulation.scan_tapped import tapped_matrix
from frontend_sim.simulation.shared_period import gain_of, left_over

Real = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Crosstalk:
    """Aggressor to victim, for a difference of a full scale between the two.

    Parameters
    ----------
    names : of the channels
    matrix : error of the victim (row) that the aggressor (column) makes, of all kept conversions
        of a scan the largest, with its sign, shape (N, N) [LSB]; zero on the diagonal
    ways : how channels reach each other: "shared stages", "sampling capacitor", or nothing
    """

    names: tuple[str, ...]
    matrix: Real
    ways: tuple[str, ...]

    def worst(self, victim: int) -> float:
        """Return the largest error of a channel if all others differ by a full scale [LSB]."""
        return float(np.sum(np.abs(self.matrix[victim])))


def crosstalk(scan: ScanScenario, order: Sequence[int] | None = None) -> Crosstalk:
    """Return what the channels of a scan do to each other once it has gone on for ever.

    Parameters
    ----------
    order : numbers of the channels, to ask for another order; left out, the scan's own

    Raises
    ------
    ModelError
        If shared stages or an input network have no settled state.
    """
    rhythm = scan.rhythm if order is None else scan.rhythm.in_order(order)
    count = len(scan.channel)
    looks = np.zeros((rhythm.conversions * rhythm.looks, count))
    ways = []
    network = scan.sampling_adc.input is not None and not rhythm.simultaneous
    if scan.scan.chain:
        temperature = scan.environment.temperature
        shared = chain_of(stages_at(scan.scan.chain, temperature), temperature)
        ways.append("shared stages")
        if network:
            looks = tapped_matrix(scan, rhythm, shared)
        else:
            pin = len(shared.points) - 1
            left = left_over(shared, [pin], rhythm, count, scan.adc.tempo)[0]
            looks = left / gain_of(shared, pin)
    elif network:
        looks = charge_matrix(scan, rhythm)
    if network:
        ways.append("sampling capacitor")
    codes = looks.reshape(rhythm.conversions, rhythm.looks, count).mean(axis=1)
    full = (scan.adc.high - scan.adc.low) / scan.adc.lsb
    return Crosstalk(scan.names, _largest(codes * full, rhythm, count), tuple(ways))


def _largest(codes: Real, rhythm: Rhythm, count: int) -> Real:
    """Return, of the kept conversions of each channel, the largest effect of each other one."""
    matrix = np.zeros((count, count))
    for victim in range(count):
        mine = codes[(rhythm.channel_of == victim) & rhythm.kept]
        matrix[victim] = mine[np.argmax(np.abs(mine), axis=0), np.arange(count)]
        matrix[victim, victim] = 0.0
    return matrix
