"""Keeps of a run, block by block, what its checks will ask for, and nothing else."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.adc import Adc
from frontend_sim.measure.checks.subject import Real
from frontend_sim.measure.checks.table import EVALUATIONS
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import GridReport, RunBlock


@dataclass(frozen=True, eq=False)
class Kept:
    """What was kept of a finished run; names as in ``Run``. What no check asks for is empty."""

    scenario: Scenario
    time: Real
    pin: Real
    held: Real
    codes: NDArray[np.int64]
    voltage: Real
    overrange: NDArray[np.bool_]
    grid: GridReport | None


class Keeper:
    """Collects the arrays that the checks of a scenario read.

    Without checks nothing is kept, and memory stays bounded by the block; with all of them it is
    33 bytes for each conversion, 41 with an input network.
    """

    def __init__(self, scenario: Scenario) -> None:
        """Find out which arrays are needed."""
        self.scenario = scenario
        wanted = {name for check in scenario.check for name in EVALUATIONS[check.kind].columns}
        self._parts: dict[str, list[Any]] = {name: [] for name in wanted}

    @property
    def per_conversion(self) -> int:
        """Bytes that are kept for each conversion."""
        held = isinstance(self.scenario.adc, Adc) and self.scenario.adc.input is not None
        there = set(self._parts) - (set() if held else {"held"})
        return sum(1 if name == "overrange" else 8 for name in there)

    def add(self, block: RunBlock) -> None:
        """Keep what is needed of a block."""
        for name, parts in self._parts.items():
            parts.append(getattr(block, name))

    def finished(self, grid: GridReport | None) -> Kept:
        """Return what was kept, after the last block."""

        def joined(name: str, kind: type) -> Any:
            parts = self._parts.get(name)
            return np.concatenate(parts) if parts else np.empty(0, kind)

        return Kept(
            self.scenario,
            joined("time", np.float64),
            joined("pin", np.float64),
            joined("held", np.float64),
            joined("codes", np.int64),
            joined("voltage", np.float64),
            joined("overrange", np.bool_),
            grid,
        )
