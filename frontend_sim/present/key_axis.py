"""The axis of a key of the scenario: its name, its unit and its ticks."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from frontend_sim.present.drawing import literal

if TYPE_CHECKING:
    from matplotlib.axis import Axis

    from frontend_sim.solve import Varied

PLAIN_UNITS = ("K", "LSB", "1", "dB", "bit", "m/s^2", "1/K")
"""Units that take no prefix on an axis."""

FEW_DECADES = 2.5
"""Of fewer decades more than their beginnings are labelled."""


def label_axis(axis: Axis, key: Varied) -> float:
    """Name an axis after a key, with its unit and prefixes, and return the factor of its values."""
    from matplotlib.ticker import EngFormatter, MaxNLocator

    if key.domain.scale == "log":
        _mark_decades(axis, key)
    elif key.whole:
        axis.set_major_locator(MaxNLocator(integer=True))
    name = literal(key.key)
    if key.of_tolerance:
        axis.set_label_text(f"{name} [%]")
        return 100.0
    if key.symbol and key.symbol not in PLAIN_UNITS:
        formatter = EngFormatter(unit=key.symbol)
        formatter.ENG_PREFIXES = EngFormatter.ENG_PREFIXES | {-6: "u"}  # as everywhere else
        axis.set_major_formatter(formatter)
        axis.set_label_text(name)
        return 1.0
    axis.set_label_text(f"{name} [{key.symbol}]" if key.symbol else name)
    return 1.0


def _mark_decades(axis: Axis, key: Varied) -> None:
    """Label 1, 2 and 5 of few decades, of many their beginnings."""
    from matplotlib.ticker import LogLocator, NullFormatter, ScalarFormatter

    low, *_, high = key.domain.spread(2)
    few = math.log10(high / low) < FEW_DECADES
    axis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0) if few else (1.0,)))
    axis.set_minor_formatter(NullFormatter())
    axis.set_major_formatter(ScalarFormatter())
