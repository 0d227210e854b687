"""A page becomes one HTML file that needs nothing else."""

from __future__ import annotations

import base64
import io
import os
import re
from importlib.resources import files
from pathlib import Path
from typing import TYPE_CHECKING

from frontend_sim.archive.target import file_target, new_file, writing
from frontend_sim.errors import OutputError
from frontend_sim.present.page.content import Page, PageFigure

if TYPE_CHECKING:
    from markupsafe import Markup
    from matplotlib.figure import Figure

SUFFIXES = (".html", ".htm")


def render(page: Page) -> str:
    """Return a page as HTML; whatever a user wrote is escaped."""
    from jinja2 import Environment, StrictUndefined

    source = files("frontend_sim.present.page").joinpath("page.html").read_text("utf-8")
    environment = Environment(autoescape=True, undefined=StrictUndefined)
    environment.filters["breaking"] = _breaking
    return environment.from_string(source).render(page=page)


def _breaking(text: str) -> Markup:
    """Return text that may go on in a new line behind the commas of the name of a run."""
    from markupsafe import Markup, escape

    return Markup("<wbr>").join(escape(part) for part in re.split(r"(?<=,)(?=[^\W\d])", text))


def write_page(page: Page, path: str | os.PathLike[str], overwrite: bool = False) -> Path:
    """Write a page under a temporary name, and rename it once it is whole.

    Returns
    -------
    The file that was written, links followed.

    Raises
    ------
    OutputError
        As ``check_page_target`` does, or if writing fails; nothing is left behind then.
    """
    target = check_page_target(path, overwrite)
    text = render(page)
    with new_file(target, path, overwrite) as temporary, writing(path):
        temporary.write_text(text, "utf-8", "surrogateescape")
    return target


def check_page_target(path: str | os.PathLike[str], overwrite: bool = False) -> Path:
    """Return where a page goes, links followed, after everything that could forbid it.

    Raises
    ------
    OutputError
        If the suffix is no known one, the directory is not there, the path is no place for a
        file, or a file is there that must not be replaced.
    """
    if Path(path).suffix.lower() not in SUFFIXES:
        raise OutputError(f"{path}: a page is written as .html; give a name that ends so")
    return file_target(path, overwrite)


def embedded(figure: Figure, description: str, caption: str) -> PageFigure:
    """Return a figure as a picture inside the page, drawn as SVG."""
    import matplotlib as mpl
    from matplotlib.backends.backend_svg import FigureCanvasSVG

    stream = io.BytesIO()
    FigureCanvasSVG(figure)
    # Without a date and with fixed names inside, the same run gives the same page.
    with mpl.rc_context({"svg.hashsalt": "frontend_sim"}):
        figure.savefig(stream, format="svg", metadata={"Date": None})
    data = base64.b64encode(stream.getvalue()).decode()
    return PageFigure(f"data:image/svg+xml;base64,{data}", description, caption)
