"""``frontend-sim report``: a page to read in the morning."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from frontend_sim.cli.console import print_notes
from frontend_sim.cli.options import PATH, output_option, overwrite_option
from frontend_sim.cli.status import FAILS, HOLDS

if TYPE_CHECKING:
    from frontend_sim.archive import Record, ScanRecord
    from frontend_sim.comparison import RecordComparison
    from frontend_sim.present.page import Page


@click.command("report")
@click.argument("run", type=PATH)
@output_option(
    "PAGE.html",
    "Where the page goes; by default the record's or the set's name with .html, in this folder.",
)
@click.option(
    "--since",
    type=PATH,
    metavar="EARLIER",
    help="Tell what changed since an earlier record or set; by default, of a set, since the night "
    "before in its directory.",
)
@overwrite_option("the page if it exists")
def command(run: Path, output: Path | None, since: Path | None, overwrite: bool) -> int:
    """Write one self-contained HTML page on RUN, a record or the directory of a set.

    Exit status: 0 all checks hold, 1 a check fails, 2 the input is wrong, 3 a set is incomplete.
    """
    from frontend_sim.archive.set_table import is_set
    from frontend_sim.present.page import check_page_target, write_page

    target = output or Path(f"{run.resolve().stem}.html")
    check_page_target(target, overwrite)
    page, status = _of_set(run, since) if is_set(run) else _of_record(run, since)
    write_page(page, target, overwrite)
    click.echo(f"{page.verdict}\npage: {target}")
    return status


def _of_record(run: Path, since: Path | None) -> tuple[Page, int]:
    from frontend_sim.archive import ScanRecord, open_record
    from frontend_sim.present.page import record_page, scan_page

    with open_record(run) as record:
        comparison = None if since is None else _changes(record, since)
        if isinstance(record, ScanRecord):
            page = scan_page(record, comparison)
        else:
            page = record_page(record, comparison)
        return page, FAILS if page.tone == "fails" else HOLDS


def _changes(record: Record | ScanRecord, since: Path) -> RecordComparison:
    from frontend_sim.archive import open_record
    from frontend_sim.comparison import compare_runs

    with open_record(since) as earlier:
        return compare_runs(earlier, record)


def _of_set(run: Path, since: Path | None) -> tuple[Page, int]:
    from frontend_sim.archive.set_previous import previous_of
    from frontend_sim.archive.set_table import open_set
    from frontend_sim.comparison import compare_sets
    from frontend_sim.present.page import night_page
    from frontend_sim.summary import summarize

    table, earlier = open_set(run), since or previous_of(run)
    summary = summarize(table)
    comparison = None if earlier is None else compare_sets(open_set(earlier), table)
    print_notes(summary.warnings)
    return night_page(summary, comparison), summary.status
