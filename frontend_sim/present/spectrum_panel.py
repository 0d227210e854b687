"""The panel of what folds: the spectrum of the codes, with every alias named by its source."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.aliasing import Alias
from frontend_sim.measure.arrays import Real
from frontend_sim.measure.spectrum import amplitude_spectrum
from frontend_sim.present.aliasing_table import aliasing_in
from frontend_sim.present.colours import BLUE, MARK, SERIES
from frontend_sim.present.decimation import shown_points
from frontend_sim.present.drawing import legend_text
from frontend_sim.present.numbers import engineering, prefix_of
from frontend_sim.simulation.finished import RunLike

if TYPE_CHECKING:
    from matplotlib.axes import Axes

WINDOW = "blackman-harris"

MOST_NAMED = 6
"""So many aliases are named, the strongest."""

LOWEST = -200.0
"""Nothing below is shown [dBFS]."""


@dataclass(frozen=True, eq=False)
class SpectrumView:
    """What the panel shows.

    Parameters
    ----------
    frequency, level : of the codes, shape (N,) [Hz], [dBFS]
    aliases : that have a level, the strongest first
    rate : of the codes [Hz]
    """

    frequency: Real
    level: Real
    aliases: tuple[Alias, ...]
    rate: float


def spectrum_view(run: RunLike) -> SpectrumView | None:
    """Return the spectrum of the codes of a run; None where nothing of a known level folds."""
    found = aliasing_in(run)
    if found is None:
        return None
    known = [alias for alias in found.aliases if alias.full_scale is not None]
    known.sort(key=lambda alias: -(alias.full_scale or 0.0))
    adc = run.scenario.adc
    if not known:
        return None
    try:
        shown = amplitude_spectrum(run.voltage, adc.true_rate, WINDOW)
    except MeasureError:  # a few codes have no spectrum
        return None
    level = np.maximum(shown.dbfs(adc.high - adc.low), LOWEST)
    return SpectrumView(shown.frequency, level, tuple(known), adc.true_rate)


def draw_spectrum(axes: Axes, view: SpectrumView) -> None:
    """Draw the spectrum, a mark for each line that folds, a stretch for each band."""
    factor, letter = prefix_of(float(view.frequency[-1]))
    kept = shown_points(view.level)
    axes.plot(factor * view.frequency[kept], view.level[kept], color=BLUE, linewidth=0.9, zorder=2)
    colours = [colour for colour in SERIES if colour != BLUE]
    lowest = max(float(np.min(view.level)), LOWEST)
    seen = [alias for alias in view.aliases if (alias.full_scale or 0.0) > lowest]
    for number, alias in enumerate(seen):
        named = number < MOST_NAMED
        colour = colours[number % len(colours)] if named else MARK
        label = legend_text(f"{alias.source}: {_where(alias)}") if named else None
        if alias.up_to > alias.frequency:
            axes.axvspan(
                factor * alias.lands, factor * alias.lands_up_to,
                color=colour, alpha=0.15, label=label, zorder=1, linewidth=0.0,
            )  # fmt: skip
        else:
            axes.plot(
                [factor * alias.lands], [alias.full_scale or 0.0], marker="v", markersize=8.0,
                linestyle="none", markerfacecolor="none", markeredgewidth=1.6, color=colour,
                label=label, zorder=4,
            )  # fmt: skip
    axes.set_xlim(0.0, factor * float(view.frequency[-1]))
    axes.set_ylim(lowest, max(5.0, float(np.max(view.level)) + 5.0))
    axes.set_xlabel(f"frequency in the codes [{letter}Hz]")
    axes.set_ylabel("level [dBFS]")
    rest = len(seen) - MOST_NAMED
    more = f", {rest} more in grey" if rest > 0 else ""
    axes.set_title(f"What folds, and where it lands{more}", loc="left", fontsize="medium",
                   color=MARK)  # fmt: skip
    if seen:
        axes.legend(loc="upper right", fontsize="small", framealpha=0.9)


def _where(alias: Alias) -> str:
    """Return where an alias comes from, and how strong it is in the codes."""
    where = engineering(alias.frequency, "Hz", 4)
    if alias.up_to > alias.frequency:
        end = engineering(alias.up_to, "Hz", 4) if math.isfinite(alias.up_to) else "ever higher"
        where += f" to {end}"
    rms = " rms" if alias.measure == "rms" else ""
    return f"{where}, {alias.full_scale:.1f} dBFS{rms}"
