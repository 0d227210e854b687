"""The progress of a night on standard error: a bar at a terminal, now and then a line in a log."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from typing import TYPE_CHECKING

import click

from frontend_sim.cli.console import PATIENCE
from frontend_sim.quantities.counting import counted

if TYPE_CHECKING:
    from frontend_sim.replay import Progress

INTERVAL = 60.0
"""How often a log gets a line [s]."""


@contextmanager
def night_bar(title: str) -> Iterator[Callable[[Progress], None]]:
    """Give a function that takes the progress of a night and shows it."""
    from rich.console import Console
    from rich.progress import BarColumn, TextColumn
    from rich.progress import Progress as Bar

    console = Console(stderr=True)
    bar = Bar(
        TextColumn("{task.description}", markup=False),
        BarColumn(),
        TextColumn("{task.fields[told]}", markup=False),
        console=console,
        transient=True,
        disable=not console.is_terminal,
    )
    task = bar.add_task(title, total=None, told="")
    begun = shown = time.monotonic()
    started, noted = False, ""

    def tell(text: str) -> None:
        line = f"{title}: {text}"
        if console.is_terminal:
            console.print(line, markup=False, highlight=False, soft_wrap=True)
            return
        with suppress(OSError):  # the night goes on where nobody reads of it, or its log is full
            click.echo(line, err=True)

    def report(progress: Progress) -> None:
        nonlocal shown, started, noted
        now = time.monotonic()
        if progress.note != noted:
            noted, shown = progress.note, now
            tell(noted or told(progress))
        if not console.is_terminal:
            if now - shown > INTERVAL:
                tell(f"{told(progress)}; {noted}" if noted else told(progress))
                shown = now
            return
        if not started and now - begun > PATIENCE and progress.done < progress.total:
            bar.start()
            started = True
        bar.update(task, total=progress.total, completed=progress.done, told=told(progress))

    try:
        yield report
    finally:
        if started:
            bar.stop()


def told(progress: Progress) -> str:
    """Return the progress of a night in one line."""
    from frontend_sim.replay.estimate import told_seconds

    parts = [f"{progress.done:,} of {counted(progress.total, 'run')}", f"{progress.rate:.3g}/s"]
    if progress.left is not None and progress.done < progress.total:
        parts.append(f"{told_seconds(progress.left)} left")
    if progress.kept:
        parts.append(f"{progress.kept:,} kept")
    parts.append(f"{progress.fails:,} fail")
    if progress.errors:
        parts.append(f"{progress.errors:,} without a result")
    return ", ".join(parts)
