"""A figure becomes a file, whole or not at all."""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING

from frontend_sim.archive.target import file_target, new_file, writing
from frontend_sim.errors import OutputError

if TYPE_CHECKING:
    from matplotlib.figure import Figure

FORMATS = {".png": "png", ".svg": "svg"}
"""Suffix -> format."""

RESOLUTION = 150
"""Dots per inch of a PNG."""


def check_plot_target(path: str | os.PathLike[str], overwrite: bool = False) -> Path:
    """Return where a plot goes, links followed, after everything that could forbid it.

    Raises
    ------
    OutputError
        If the suffix is no known one, the directory is not there, the path is no place for a
        file, or a file is there that must not be replaced.
    """
    if Path(path).suffix.lower() not in FORMATS:
        raise OutputError(
            f"{path}: a plot is written as {' or '.join(FORMATS)}; give a name that ends so"
        )
    return file_target(path, overwrite)


def save_figure(figure: Figure, path: str | os.PathLike[str], overwrite: bool = False) -> Path:
    """Write a figure as PNG or SVG, told by the suffix, under a temporary name first.

    Raises
    ------
    OutputError
        As ``check_plot_target`` does, or if writing fails; nothing is left behind then.
    """
    import matplotlib as mpl
    from matplotlib.backends.backend_agg import FigureCanvasAgg

    target = check_plot_target(path, overwrite)
    kind = FORMATS[Path(path).suffix.lower()]
    FigureCanvasAgg(figure)
    # Without a date and with fixed names inside, the same run gives the same file.
    metadata = {"Date": None} if kind == "svg" else {}
    with (
        mpl.rc_context({"svg.hashsalt": "frontend_sim"}),
        new_file(target, path, overwrite) as temporary,
        writing(path),
        temporary.open("xb") as stream,
    ):
        figure.savefig(stream, format=kind, dpi=RESOLUTION, metadata=metadata)
    return target
