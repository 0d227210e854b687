"""The panel of the noise budget."""

from __future__ import annotations

from typing import TYPE_CHECKING

from frontend_sim.measure.noise_budget import NoiseBudget
from frontend_sim.present.colours import MARK
from frontend_sim.present.named_bars import draw_named_bars, short
from frontend_sim.present.numbers import engineering, plain
from frontend_sim.quantities.counting import counted

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MOST_BARS = 8
"""The largest sources; what the others add up to is one bar more."""


def draw_noise(axes: Axes, budget: NoiseBudget) -> None:
    """Draw the rms of each source at the pin, of its part above half the rate, and their sum."""
    bars = [(row.source, row.rms, row.folded) for row in budget.rows[:MOST_BARS]]
    others = budget.rows[MOST_BARS:]
    if others:
        sums = [sum(getattr(row, name) ** 2 for row in others) ** 0.5 for name in ("rms", "folded")]
        bars.append((counted(len(others), "other"), sums[0], sums[1]))
    bars.append(("together", budget.rms, budget.folded))
    scale = _scale(budget)
    told = [f"{short(name)}: {engineering(rms, 'V')}, {plain(scale * rms, 3)} LSB"
            for name, rms, _ in bars]  # fmt: skip
    drawn = [
        (text, scale * rms, scale * folded)
        for text, (_, rms, folded) in zip(told, bars, strict=True)
    ]
    draw_named_bars(axes, drawn, ("whole", "above half the rate"))
    axes.set_xlabel(f"rms at the {'sampling capacitor' if budget.sampled else 'pin'} [LSB]")
    axes.set_title("Noise budget", loc="left", fontsize="medium", color=MARK)


def _scale(budget: NoiseBudget) -> float:
    """Return LSB per volt."""
    return budget.lsb / budget.rms if budget.rms > 0.0 else 0.0
