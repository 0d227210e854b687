"""The plot of a pass/fail map: which pairs of values pass, and which check stops the others."""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from frontend_sim.present.colours import BLACK, BLUE, ORANGE, PURPLE, SKY_BLUE, VERMILION, YELLOW
from frontend_sim.present.drawing import legend_text, new_figure
from frontend_sim.present.figure_file import save_figure
from frontend_sim.present.key_axis import label_axis

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.figure import Figure

    from frontend_sim.solve import PassMap

PASSES = SKY_BLUE
MOST_DOTS = 1000
"""Of more runs than these no dots are drawn."""

UNKNOWN = "#ffffff"
CANNOT_RUN = "#bbbbbb"
FAILS = (VERMILION, ORANGE, PURPLE, YELLOW, BLUE)
"""Colours of the checks that stop a pair, in the order in which they are met."""


def plot_map(found: PassMap, path: str | os.PathLike[str], overwrite: bool = False) -> Path:
    """Draw a pass/fail map into a PNG or SVG file.

    Each pair of values is a tile: one colour for all that pass, and one for each check that stops
    the others. A cross marks the scenario as it is.

    Parameters and errors as ``plot_run``.
    """
    return save_figure(map_figure(found), path, overwrite)


def map_figure(found: PassMap) -> Figure:
    """Return the figure of a map, to draw on or to show elsewhere."""
    from matplotlib.colors import ListedColormap
    from matplotlib.patches import Patch

    colours = _colours(found)
    names = list(colours)
    kinds = np.array([[names.index(_kind(cell)) for cell in row] for row in found.cells])
    figure = new_figure(9.0, 6.5)
    axes = figure.subplots()
    scales = found.first.domain.scale, found.second.domain.scale
    axes.set_xscale(scales[0])
    axes.set_yscale(scales[1])
    across, up = label_axis(axes.xaxis, found.first), label_axis(axes.yaxis, found.second)
    axes.pcolormesh(
        across * _edges(found.columns, scales[0]), up * _edges(found.rows, scales[1]), kinds,
        cmap=ListedColormap(list(colours.values())), vmin=-0.5, vmax=len(names) - 0.5,
        edgecolors="white", linewidth=0.6,
    )  # fmt: skip
    handles: list[Artist] = [
        Patch(facecolor=colours[name], edgecolor=BLACK, label=_told(name)) for name in names
    ]
    if found.tried <= MOST_DOTS:  # the verdict of a tile is that of the run in its middle
        x, y = np.meshgrid(across * np.asarray(found.columns), up * np.asarray(found.rows))
        handles += axes.plot(x.ravel(), y.ravel(), ".", color=BLACK, markersize=2.5,
                             linestyle="none", label="runs")  # fmt: skip
    now = found.first.now, found.second.now
    if now[0] is not None and now[1] is not None and _within(found, now[0], now[1]):
        handles += axes.plot(across * now[0], up * now[1], "P", color=BLACK, markersize=9.0,
                             markeredgecolor="white", linestyle="none",
                             label="the scenario as it is")  # fmt: skip
    axes.legend(handles=handles, loc="upper left", bbox_to_anchor=(1.01, 1.0), fontsize="small")
    axes.set_title(f"Which pairs pass: {found.passing} of {found.tried}", loc="left",
                   fontsize="medium")  # fmt: skip
    return figure


def _kind(cell: object) -> str:
    from frontend_sim.solve import Trial
    from frontend_sim.solve.pass_map import stopper

    if not isinstance(cell, Trial):
        return "not tried"
    return "passes" if cell.passes else stopper(cell)


def _colours(found: PassMap) -> dict[str, str]:
    """Return name -> colour of what is there to be seen."""
    seen = dict.fromkeys(_kind(cell) for row in found.cells for cell in row)
    fixed = {"passes": PASSES, "cannot be run": CANNOT_RUN, "not tried": UNKNOWN}
    checks = [name for name in seen if name not in fixed]
    own = {name: FAILS[number % len(FAILS)] for number, name in enumerate(checks)}
    return {name: {**own, **fixed}[name] for name in seen}


def _told(name: str) -> str:
    fixed = ("passes", "cannot be run", "not tried")
    return name if name in fixed else legend_text(f"{name} fails")


def _within(found: PassMap, across: float, up: float) -> bool:
    inside = found.columns[0] <= across <= found.columns[-1]
    return inside and found.rows[0] <= up <= found.rows[-1]


def _edges(values: tuple[float, ...], scale: str) -> NDArray[np.float64]:
    """Return the edges of tiles around values, shape (len + 1,)."""
    at = np.log(values) if scale == "log" else np.asarray(values, dtype=np.float64)
    middle = 0.5 * (at[:-1] + at[1:])
    edges = np.concatenate([[1.5 * at[0] - 0.5 * at[1]], middle, [1.5 * at[-1] - 0.5 * at[-2]]])
    return np.exp(edges) if scale == "log" else edges
