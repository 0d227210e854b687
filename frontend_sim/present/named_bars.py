"""Bars with their names above them: a size, and a part of it, for each of several causes."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from frontend_sim.present.colours import BLUE, SKY_BLUE
from frontend_sim.present.drawing import literal

if TYPE_CHECKING:
    from matplotlib.axes import Axes

SHORT = 60
"""Longest name above a bar."""

Bar = tuple[str, float, float]
"""What is told above the bar, its size, and a second size."""


def draw_named_bars(axes: Axes, bars: Sequence[Bar], names: tuple[str, str]) -> None:
    """Draw a bar for each cause, from the top down, the larger of its two sizes behind the other.

    Parameters
    ----------
    bars : at least one
    names : of the two sizes, for the legend
    """
    places = list(range(len(bars)))
    longest = max(max(first, second) for _, first, second in bars) or 1.0
    for size, name, colour in zip((1, 2), names, (BLUE, SKY_BLUE), strict=True):
        sizes = [float(bar[size]) for bar in bars]
        others = [float(bar[3 - size]) for bar in bars]
        front = 3 + (sum(sizes) < sum(others))
        axes.barh(places, sizes, height=0.3, color=colour, label=name, zorder=front)
    for place, (told, _, _) in enumerate(bars):
        axes.text(0.01 * longest, place - 0.2, told, va="bottom", ha="left", fontsize="small",
                  zorder=5)  # fmt: skip
    axes.set_yticks([])
    axes.set_ylim(len(bars) - 0.6, -0.8)
    axes.set_xlim(0.0, 1.08 * longest)
    axes.legend(
        loc="lower right", bbox_to_anchor=(1.0, 1.0), ncols=3, fontsize="small", frameon=False,
        borderaxespad=0.1,
    )  # fmt: skip


def short(name: str) -> str:
    """Return a name that fits above a bar, with nothing in it that begins a formula."""
    cut = name if len(name) <= SHORT else f"{name[: SHORT - 1]}…"
    return literal(cut)
