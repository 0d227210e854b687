"""The panel of all checks: how far each stays on the right side of its limit."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

from frontend_sim.measure.result import Result
from frontend_sim.present.colours import GREEN, LIMIT, MARK
from frontend_sim.present.drawing import literal
from frontend_sim.present.result_table import SIGNS, checked

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MOST_BARS = 30
"""The checks that are shown: those that fail, then those with the least margin."""

FEWEST = 2
"""Room for so many bars at least, so that one alone is no slab."""

LINE = 0.34
"""Height of one bar [inch]."""


def verdicts_of(results: Sequence[Result]) -> list[Result]:
    """Return the checks of a run by their margin, the worst first."""
    checks = [row for row in results if row.verdict != "none"]
    return sorted(checks, key=relative_margin)


def bars_of(rows: Sequence[Result]) -> int:
    """Return for how many bars the panel of some checks has room."""
    return min(len(rows), MOST_BARS)


def relative_margin(row: Result) -> float:
    """Return the margin as a share of the limit, from -1 to 1; -1 of what cannot be told."""
    if row.margin is None or math.isnan(row.margin):
        return -1.0
    scale = abs(row.limit) if row.limit else 0.0
    if scale == 0.0:
        return math.copysign(1.0, row.margin) if row.margin else 0.0
    return min(max(row.margin / scale, -1.0), 1.0)


def draw_margins(axes: Axes, rows: Sequence[Result]) -> None:
    """Draw a bar for each check, to the right where it holds, with value and limit beside it.

    Parameters
    ----------
    rows : all checks, the worst first, of which ``MOST_BARS`` are drawn
    """
    broken, whole = sum(row.verdict == "fails" for row in rows), len(rows)
    rows = rows[: bars_of(rows)]
    shares = [100.0 * relative_margin(row) for row in rows]
    places = list(range(len(rows)))
    colours = [GREEN if row.verdict == "holds" else LIMIT for row in rows]
    axes.barh(places, shares, color=colours, height=0.6, zorder=3)
    axes.axvline(0.0, color=MARK, linewidth=1.0, zorder=4)
    axes.set_yticks(places, [literal(row.name) for row in rows], fontsize="small")
    axes.set_ylim(max(len(rows), FEWEST) - 0.5, -0.5)
    axes.set_xlim(-105.0, 105.0)
    axes.set_xlabel("margin [% of the limit]")
    for place, row, share in zip(places, rows, shares, strict=True):
        right = share < 0.0
        axes.text(
            2.0 if right else -2.0, place, _told(row), va="center",
            ha="left" if right else "right", fontsize="small", zorder=5,
        )  # fmt: skip
    told = f"{broken} of {whole} fail" if broken else "all hold"
    if whole > len(rows):
        told += f", the {len(rows)} with the least margin are shown"
    axes.set_title(f"Checks: {told}", loc="left", fontsize="medium",
                   color=LIMIT if broken else MARK)  # fmt: skip


def _told(row: Result) -> str:
    if row.value is None:
        return "cannot be told"
    limit = f"{SIGNS.get(row.bound, '')}{checked(row.limit, row.unit)}"
    return f"{checked(row.value, row.unit)} (limit {limit})"
