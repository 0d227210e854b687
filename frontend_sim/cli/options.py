"""Options that several commands have, each with the same name and meaning."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any, Protocol, TypeVar

import click

Function = TypeVar("Function", bound=Callable[..., Any])

PATH = click.Path(path_type=Path)
"""A path, whether or not something is there."""


class Option(Protocol):
    """Gives an option to the function of a command."""

    def __call__(self, function: Function, /) -> Function:
        """Return the function."""


def output_option(metavar: str, help: str) -> Option:
    """Return ``-o``, where results go."""
    return click.option("-o", "--output", type=PATH, metavar=metavar, help=help)


def plot_option(what: str) -> Option:
    """Return ``--plot``; ``what`` begins its help: "Draw the bars"."""
    text = f"{what} into FILE, .png or .svg."
    return click.option("--plot", type=PATH, metavar="FILE", help=text)


def overwrite_option(what: str) -> Option:
    """Return ``--overwrite``; ``what`` ends its help: "the plot if it exists"."""
    return click.option("--overwrite", is_flag=True, help=f"Replace {what}.")


json_option: Option = click.option("--json", "as_json", is_flag=True, help="Print results as JSON.")
