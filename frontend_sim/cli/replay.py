"""``frontend-sim replay``: run a set, resume it, summarize it."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from frontend_sim.cli.console import print_json, print_notes, print_tables
from frontend_sim.cli.options import json_option, output_option
from frontend_sim.cli.status import FAILS, HOLDS, INCOMPLETE, INTERRUPTED
from frontend_sim.quantities.counting import counted, share_of

if TYPE_CHECKING:
    from frontend_sim.replay import Preview, Replayed

SHOWN = 20
"""Runs that a preview lists for people."""


@click.command("replay")
@click.argument("source", nargs=-1, required=True, metavar="SET")
@output_option(
    "DIR",
    "Where records and table go; by default the set's name and _runs, in this folder.",
)
@click.option(
    "--workers", type=click.IntRange(min=1), metavar="N", help="By default one for each core."
)
@click.option(
    "--on",
    type=click.Choice(["processes", "in-process", "dask"]),
    default="processes",
    show_default=True,
    help="Where the runs are done.",
)
@click.option(
    "--scheduler",
    metavar="ADDRESS",
    help="Of a Dask scheduler; by default a cluster on this machine.",
)
@click.option(
    "--keep",
    type=click.Choice(["nothing", "around-failures", "failures", "all"]),
    help="Of which runs records are kept; by default what the set says, else failures.",
)
@click.option(
    "--around",
    metavar="TIME",
    help='With --keep around-failures, how long before and behind each of them, "2 ms".',
)
@click.option("--dry-run", is_flag=True, help="Tell what would be run and how long it takes.")
@json_option
def command(
    source: tuple[str, ...],
    output: Path | None,
    workers: int | None,
    on: str,
    scheduler: str | None,
    keep: Any,
    around: str | None,
    dry_run: bool,
    as_json: bool,
) -> int:
    """Run SET: a set file, a directory or pattern of scenarios, or several scenarios.

    What was run before and has not changed is kept, so that the same call goes on where it was
    stopped, by whatever.

    Exit status: 0 all checks hold, 1 a check fails, 2 the input is wrong, 3 the set is incomplete:
    a run gave no result, the disk is full, or there are no workers any more; 130 interrupted.
    """
    from frontend_sim.cli.night_bar import night_bar
    from frontend_sim.replay import preview_set, replay_set

    given = source[0] if len(source) == 1 else list(source)
    width = None if around is None else _time(around)
    if dry_run:
        found = preview_set(given, output, workers=workers, keep=keep, around=width)
        _tell_preview(found, as_json)
        return HOLDS
    with night_bar(source[0]) as report:
        done = replay_set(
            given,
            output,
            workers=workers,
            on=on,
            scheduler=scheduler,
            keep=keep,
            around=width,
            report=report,
        )
    _tell(done, as_json)
    return _status(done)


def _time(text: str) -> float:
    from frontend_sim.errors import InputError, QuantityError
    from frontend_sim.quantities import TIME, parse

    try:
        found = parse(text, TIME)
    except QuantityError as error:
        raise InputError(f"--around: {error}") from None
    if found < 0.0:
        raise InputError(f"--around: given {text!r}; a time before and behind is 0 s or more")
    return found


def _status(done: Replayed) -> int:
    if done.interrupted:
        return INTERRUPTED
    if not done.complete:
        return INCOMPLETE
    return FAILS if done.tally.verdict == "fails" else HOLDS


def _tell(done: Replayed, as_json: bool) -> None:
    from frontend_sim.present import replay_tables
    from frontend_sim.present.night_table import night_data, night_tables
    from frontend_sim.summary import summarize

    counts = done.tally.counts
    missing = done.tally.planned - done.tally.done
    if as_json:
        told: dict[str, Any] = {
            "directory": str(done.directory),
            "planned": done.tally.planned,
            "ran": done.ran,
            "kept": done.kept,
            "missing": missing,
            **{name: counts.get(name, 0) for name in ("holds", "fails", "none", "error")},
            "verdict": done.tally.verdict,
            "complete": done.complete,
            "stopped": done.stopped,
            "digest": done.digest,
            "seconds": done.seconds,
        }
        if done.tabled and done.tally.done:
            told["summary"] = night_data(summarize(done.table()))
        print_json(told)
    elif done.tabled and done.tally.done:
        summary = summarize(done.table())
        print_notes(summary.warnings)
        print_tables((*replay_tables(summary.table), *night_tables(summary)))
        click.echo(f"table: {done.directory / 'set.h5'}")
    if done.stopped:
        left = "not known yet how many are" if done.left is None else f"{done.left:,}"
        click.echo(
            f"stopped after {counted(done.ran, 'run')}, {left} left: {done.stopped}; the same "
            "call goes on from here",
            err=True,
        )
    elif counts.get("error"):
        click.echo(
            f"{share_of(counts['error'], done.tally.planned, 'run')} gave no result, so the set "
            "is incomplete",
            err=True,
        )


def _tell_preview(found: Preview, as_json: bool) -> None:
    from frontend_sim.archive.room import told_bytes
    from frontend_sim.replay.estimate import told_seconds

    if as_json:
        told = {
            "directory": str(found.directory),
            "planned": found.planned,
            "kept": found.kept,
            "runs": list(found.names),
            "seconds": found.seconds,
            "bytes": found.size,
            "bytes_free": found.free,
        }
        print_json(told)
        return
    for name in found.names[:SHOWN]:
        click.echo(name)
    if len(found.names) > SHOWN:
        click.echo(f"... and {len(found.names) - SHOWN:,} more; --json lists all of them")
    click.echo(
        f"{share_of(len(found.names), found.planned, 'run')} would be done, already done: "
        f"{found.kept:,}; about {told_seconds(found.seconds)}, {told_bytes(found.size)} in "
        f"{found.directory}"
    )
    if found.size > found.free:
        click.echo(
            f"the disk has {told_bytes(found.free)} left, which is not enough: free some space, or "
            'keep less: keep = "around-failures" or "nothing"'
        )
    if found.at_most:
        click.echo("draws end when they are tight, so that fewer may be enough")
