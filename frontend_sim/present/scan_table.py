"""Tables of a scan: for the terminal, and for programs."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from frontend_sim.measure.result import verdict_of
from frontend_sim.measure.scan import ScanReport, scan_report
from frontend_sim.present.numbers import engineering, fixed, plain
from frontend_sim.present.result_table import result_tables
from frontend_sim.present.run_table import run_summary
from frontend_sim.present.scan_like import ScanLike

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table
    from rich.text import Text

MOST_COLUMNS = 12
"""A matrix of more channels than this is not printed; JSON and the record have it."""


def scan_summary(scan: ScanLike) -> dict[str, Any]:
    """Return the numbers of a scan as plain data for JSON, in SI units.

    ``channels`` has for each channel what ``run_summary`` tells of a run, ``scan`` timing and
    crosstalk.
    """
    channels = {name: run_summary(run) for name, run in scan.channels.items()}
    results = [row for run in scan.channels.values() for row in getattr(run, "results", ())]
    return {
        "title": scan.scenario.title,
        "verdict": verdict_of(results),
        "scan": scan_report(scan.scenario).as_dict(),
        "channels": channels,
        "notes": list(scan.notes),
    }


def scan_tables(scan: ScanLike) -> tuple[RenderableType, ...]:
    """Return the tables of a scan for the terminal: timing, crosstalk, channels, their results."""
    report = scan_report(scan.scenario)
    shown = [*report_tables(report, scan.scenario.title), _channel_table(scan)]
    rows = [
        {**vars(row), "name": f"{name}: {row.name}"}
        for name, run in scan.channels.items()
        for row in getattr(run, "results", ())
    ]
    return (*shown, *result_tables(rows))


def report_tables(report: ScanReport, title: str = "") -> tuple[RenderableType, ...]:
    """Return the tables of what is known before any run: timing, and crosstalk if there is any."""
    shown: list[RenderableType] = [_timing_table(report, title)]
    if report.crosstalk.ways and len(report.crosstalk.names) <= MOST_COLUMNS:
        shown.append(_crosstalk_table(report))
    if report.best is not None:
        shown.append(_best_sentence(report))
    return tuple(shown)


def _timing_table(report: ScanReport, title: str) -> Table:
    from rich.table import Table
    from rich.text import Text

    order = ", ".join(report.order)
    head = f"{title or 'Scan'}\n{report.sampling}: {order}; period {_time(report.period)}"
    table = Table(title=Text(head), title_justify="left")
    table.add_column("channel", overflow="fold")
    for name in ("codes per second", "skew", "degrees"):
        table.add_column(name, justify="right")
    for skew in report.skew:
        angle = ""
        if skew.degrees is not None and skew.frequency is not None:
            angle = f"{plain(skew.degrees)} at {engineering(skew.frequency, 'Hz')}"
        rate = engineering(report.rate[skew.channel], "Hz", 4)
        table.add_row(Text(skew.channel), rate, _time(skew.time), angle)
    return table


def _time(value: float) -> str:
    return engineering(value, "s", 4)


def _crosstalk_table(report: ScanReport) -> Table:
    from rich.table import Table
    from rich.text import Text

    ways = " and ".join(report.crosstalk.ways)
    title = f"Crosstalk by {ways}, for a difference of a full scale [LSB]"
    table = Table(title=title, title_justify="left")
    table.add_column("victim")
    for name in report.crosstalk.names:
        table.add_column(Text(f"from {name}"), justify="right")
    table.add_column("all together", justify="right")
    for place, (name, row) in enumerate(
        zip(report.crosstalk.names, report.crosstalk.matrix, strict=True)
    ):
        cells = ["" if i == place else plain(float(value), 3) for i, value in enumerate(row)]
        table.add_row(Text(name), *cells, plain(report.crosstalk.worst(place), 3))
    return table


def _best_sentence(report: ScanReport) -> Text:
    from rich.text import Text

    best = report.best
    assert best is not None
    how = "of all orders" if best.exhaustive else "found by exchanging neighbours, not of all"
    if best.order == report.order:
        text = (
            f"The order has the least crosstalk {how}, within 1 %: {plain(best.error, 3)} LSB at "
            "most."
        )
    else:
        text = (
            f"Least crosstalk {how}: {', '.join(best.order)} with {plain(best.error, 3)} LSB at "
            f"most, now {plain(best.before, 3)} LSB."
        )
    return Text(text)


def _channel_table(scan: ScanLike) -> Table:
    from rich.table import Table
    from rich.text import Text

    table = Table(title="Channels", title_justify="left")
    table.add_column("channel", overflow="fold")
    names = (
        "conversions",
        "pin: lowest",
        "highest",
        "codes",
        "beyond the range",
        "codes less pin, rms",
    )
    for name in names:
        table.add_column(name, justify="right")
    for name, run in scan.channels.items():
        told = run_summary(run)
        if told["conversions"] == 0:
            table.add_row(Text(name), "0")
            continue
        pin, codes, rms = told["pin"], told["codes"], told["difference_rms"]
        table.add_row(
            Text(name),
            f"{told['conversions']:,}",
            engineering(pin["lowest"], "V", 5),
            engineering(pin["highest"], "V", 5),
            f"{codes['lowest']} to {codes['highest']}",
            f"{told['overrange']:,}",
            "" if rms is None else f"{fixed(rms, 3)} LSB",
        )
    return table
