"""How finely a column is printed."""

from __future__ import annotations

import re
from collections.abc import Iterable

import numpy as np

from frontend_sim.stimulus.recording.cells import CLOCK, DATE
from frontend_sim.stimulus.recording.series import Real

_DIGITS = re.compile(r"[+-]?(?:\d+\.?(\d*)|\.(\d+))(?:[eE]([+-]?\d+))?\Z", re.A)


class PrintedDigits:
    """How finely the numbers of a column are printed, learnt from some of its cells.

    The count of decimals is kept by power of ten, so numbers of fixed decimals and numbers of
    fixed significant digits are both understood: in each, a larger number never has more decimals.
    """

    def __init__(self) -> None:
        """Start without any cell seen."""
        self._decimals: dict[int, int] = {}

    def see(self, cells: Iterable[str]) -> None:
        """Learn from cells whose decimal sign is a point."""
        for cell in cells:
            date = DATE.match(cell) or CLOCK.match(cell)
            if date:
                fraction = date.groups()[1 if "-" in cell else 3]
                self._learn(300, len(fraction or ""))
                continue
            digits = _DIGITS.match(cell)
            value = abs(float(cell)) if digits else 0.0
            if digits and 0.0 < value < np.inf:
                power = int(np.floor(np.log10(value)))
                decimals = len(digits.group(1) or digits.group(2) or "")
                self._learn(power, decimals - int(digits.group(3) or 0))

    def _learn(self, power: int, decimals: int) -> None:
        self._decimals[power] = max(decimals, self._decimals.get(power, decimals))

    def half_step(self, values: Real) -> Real:
        """Return half of the last printed digit of each number."""
        if not self._decimals:
            return np.zeros(len(values))
        powers = sorted(self._decimals)
        most = np.maximum.accumulate([self._decimals[power] for power in reversed(powers)])[::-1]
        edges = 10.0 ** np.array(powers[1:], dtype=np.float64)
        return np.asarray(
            0.5 * 10.0 ** -most[np.searchsorted(edges, np.abs(values), side="right")].astype(float)
        )
