"""Where results, messages and progress go: results to standard output, the rest to the other."""

from __future__ import annotations

import io
import json
import shutil
import sys
import time
from collections.abc import Callable, Iterable, Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from rich.console import RenderableType

PATIENCE = 0.5
"""A bar appears only where a run takes longer than this [s]."""


def print_tables(tables: Iterable[RenderableType]) -> None:
    """Print tables to standard output."""
    from rich.console import Console

    at_terminal = sys.stdout is not None and sys.stdout.isatty()
    console = Console(
        file=io.StringIO(),
        width=shutil.get_terminal_size().columns if at_terminal else 100,
        force_terminal=at_terminal,
        highlight=False,
        markup=False,  # names may have [brackets] and :colons:, which stand for themselves
        emoji=False,
    )
    with console.capture() as drawn:
        for table in tables:
            console.print(table)
    click.echo(drawn.get(), nl=False)


def print_json(values: Any) -> None:
    """Print results for programs to standard output."""
    click.echo(json.dumps(values, indent=2, allow_nan=False, ensure_ascii=False))


def print_notes(notes: Iterable[str]) -> None:
    """Print what was decided on the way to standard error."""
    for note in notes:
        click.echo(f"note: {note}", err=True)


@contextmanager
def progress_bar(title: str) -> Iterator[Callable[[float], None]]:
    """Give a function that takes the share that is done, and shows a bar if it takes long."""
    from rich.console import Console
    from rich.progress import BarColumn, Progress, TextColumn, TimeRemainingColumn

    console = Console(stderr=True)
    bar = Progress(
        TextColumn("{task.description}", markup=False),
        BarColumn(),
        TextColumn("{task.percentage:>3.0f} %"),
        TimeRemainingColumn(compact=True),
        console=console,
        transient=True,
        disable=not console.is_terminal,
    )
    task = bar.add_task(title, total=1.0)
    begun, shown = time.monotonic(), False

    def advance(share: float) -> None:
        nonlocal shown
        if not shown and share < 1.0 and time.monotonic() - begun > PATIENCE:
            bar.start()
            shown = True
        bar.update(task, completed=share)

    try:
        yield advance
    finally:
        if shown:
            bar.stop()
