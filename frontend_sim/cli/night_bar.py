"""The progress of a night on standard error: a bar at a terminal, now and then a line in a log."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

import click

from frontend_sim.cli.console import PATIENCE

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
    started = False

    def report(progress: Progress) -> None:
        nonlocal shown, started
        now = time.monotonic()
        if not console.is_terminal:
            if now - shown > INTERVAL:
                click.echo(f"{title}: {told(progress)}", err=True)
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

    parts = [f"{progress.done:,} of {progress.total:,} runs", f"{progress.rate:.3g}/s"]
    if progress.left is not None and progress.done < progress.total:
        parts.append(f"{told_seconds(progress.left)} left")
    if progress.kept:
        parts.append(f"{progress.kept:,} kept")
    parts.append(f"{progress.fails:,} fail")
    if progress.errors:
        parts.append(f"{progress.errors:,} without a result")
    return ", ".join(parts)
