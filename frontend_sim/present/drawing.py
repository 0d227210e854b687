"""What all figures share: how they begin, their grid, and words that are shown as they stand."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

import numpy as np
from numpy.typing import NDArray

from frontend_sim.present.numbers import prefix_of
from frontend_sim.present.result_table import PREFIXED

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure


def new_figure(width: float, height: float) -> Figure:
    """Return an empty figure of a size in inches, free of the state of ``pyplot``."""
    from matplotlib.figure import Figure

    return Figure(figsize=(width, height), layout="constrained")


def draw_grid(*panels: Axes, axis: Literal["both", "x", "y"] = "both") -> None:
    """Lay a faint grid behind all that panels show."""
    for panel in panels:
        panel.grid(True, axis=axis, color="0.9", linewidth=0.6)
        panel.set_axisbelow(True)


def write_out(*panels: Axes) -> None:
    """Write the numbers of axes out: a value common to all of them, set aside, is overlooked."""
    for panel in panels:
        panel.ticklabel_format(useOffset=False)


def axis_scale(unit: str, values: NDArray[np.float64]) -> tuple[float, str]:
    """Return the factor and the unit with which numbers of a check stand on an axis.

    Parameters
    ----------
    unit : SI unit of the values; a share is shown in percent
    values : what the axis shows; those that are not finite do not count
    """
    if unit in ("", "1"):
        return 100.0, "%"
    if unit not in PREFIXED:
        return 1.0, unit
    factor, letter = prefix_of(float(np.max(np.abs(values[np.isfinite(values)]), initial=0.0)))
    return factor, f"{letter}{unit}"


def literal(text: str) -> str:
    """Return text that a figure shows as it stands: a dollar sign would begin a formula."""
    return text.replace("$", r"\$")


def legend_text(name: str) -> str:
    """Return a name as a legend shows it: as it stands, and not left out for a leading ``_``."""
    return f" {literal(name)}" if name.startswith("_") else literal(name)
