"""Two records of scans, compared channel by channel."""

from __future__ import annotations

from dataclasses import replace

from frontend_sim.archive import Record, ScanRecord
from frontend_sim.comparison.again import named
from frontend_sim.comparison.changes import changes
from frontend_sim.comparison.records import (
    FALSE_ALARMS,
    RecordComparison,
    compare_records,
    part_notes,
    version_notes,
)
from frontend_sim.comparison.results import ResultDifference, result_differences
from frontend_sim.comparison.series import SeriesDifference, not_comparable
from frontend_sim.comparison.tolerance import Tolerances
from frontend_sim.errors import InputError
from frontend_sim.scenario.scan_scenario import ScanScenario


def compare_runs(
    first: Record | ScanRecord, second: Record | ScanRecord, tolerances: Tolerances | None = None
) -> RecordComparison:
    """Compare two records, both of one channel or both of scans.

    See ``compare_records`` and ``compare_scans``.

    Raises
    ------
    InputError
        If one of them alone is a scan, a record is damaged, or a tolerance does not fit.
    """
    if isinstance(first, ScanRecord):
        if isinstance(second, ScanRecord):
            return compare_scans(first, second, tolerances)
        raise _unlike(first)
    if isinstance(second, ScanRecord):
        raise _unlike(second)
    return compare_records(first, second, tolerances)


def _unlike(scan: ScanRecord) -> InputError:
    return InputError(f"{scan.path} is a scan and the other is none; compare like with like")


def compare_scans(
    first: ScanRecord, second: ScanRecord, tolerances: Tolerances | None = None
) -> RecordComparison:
    """Compare two records of scans, channels matched by name, see ``compare_records``.

    Signals, measures and checks have the name of their channel in front: ``oil: pin``. All channels
    together have the false alarms of one comparison.

    Raises
    ------
    InputError
        If a record is damaged, or a tolerance does not fit.
    """
    allowed = tolerances or Tolerances()
    series: list[SeriesDifference] = []
    results: list[ResultDifference] = []
    notes: list[str] = []
    share = FALSE_ALARMS / len(first.channels)
    for name in dict.fromkeys((*first.channels, *second.channels)):
        if name not in first.channels or name not in second.channels:
            gone = name in first.channels
            row = not_comparable(named(name, "pin"), "LSB", "the channel is in one scan alone")
            series.append(replace(row, finding="removed" if gone else "added"))
            continue
        # Names of tolerances are those with the channel in front, which only the whole knows.
        plain = replace(allowed, named=_of_channel(allowed, name))
        pair = first.channels[name], second.channels[name]
        found = compare_records(*pair, plain, share)
        notes += [named(name, note) for note in part_notes(*pair)]
        series += [replace(each, name=named(name, each.name)) for each in found.series]
        results += [replace(each, name=named(name, each.name)) for each in found.results]
    results += result_differences(first.results, second.results, allowed, lambda name: False)
    allowed.refuse_unknown(row.name for row in results)
    files = tuple(
        {entry["name"]: entry["sha256"] for entry in record.resolved["files"]}
        for record in (first, second)
    )
    return RecordComparison(
        first.path,
        second.path,
        first.title,
        (first.seed, second.seed),
        changes(
            first.resolved["scenario"],
            second.resolved["scenario"],
            (_scenario(first), _scenario(second)),
            (files[0], files[1]),
        ),
        tuple(series),
        tuple(results),
        (*notes, *version_notes(first.resolved, second.resolved)),
    )


def _of_channel(tolerances: Tolerances, channel: str) -> dict[str, str]:
    head = named(channel, "")
    told = tolerances.named.items()
    return {name.removeprefix(head): text for name, text in told if name.startswith(head)}


def _scenario(record: ScanRecord) -> ScanScenario | None:
    try:
        return record.scenario
    except InputError:
        return None
