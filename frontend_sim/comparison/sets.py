"""Two nights, compared run by run."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from frontend_sim.archive import open_record
from frontend_sim.archive.set_table import SetTable
from frontend_sim.comparison.attribution import Attribution
from frontend_sim.comparison.base_scenario import scenario_of
from frontend_sim.comparison.changes import Change, changes
from frontend_sim.comparison.columns import ColumnDifference, column_difference, flips
from frontend_sim.comparison.records import FALSE_ALARMS, ROUNDING
from frontend_sim.comparison.scans import compare_runs
from frontend_sim.comparison.series import DIFFERENT
from frontend_sim.comparison.tolerance import Tolerances
from frontend_sim.errors import InputError
from frontend_sim.measure.checks.quiet import quiet_checks
from frontend_sim.quantities.counting import counted, share_of

Real = NDArray[np.float64]
Index = NDArray[np.int64]

MOST_RECORDS = 200
"""Pairs of records that are read; more are picked evenly."""


@dataclass(frozen=True, eq=False)
class SetComparison:
    """What differs between two nights.

    Parameters
    ----------
    first, second : their files
    title : of the first
    matched : how many runs both have
    added, removed : names of runs that one of them has alone
    reseeded : how many matched runs have other seeds
    changed : keys of the scenarios, with the name of the scenario in front where there are several
    varied : keys whose values in the runs differ -> in how many
    columns : checks and measures, and what the kept records add: pin, codes, of each channel
    records : pairs of records that were read
    notes : what else a reader must know
    attribution : of the nominal scenarios, where it was asked for
    """

    first: Path
    second: Path
    title: str
    matched: int
    added: tuple[str, ...]
    removed: tuple[str, ...]
    reseeded: int
    changed: tuple[Change, ...]
    varied: Mapping[str, int]
    columns: tuple[ColumnDifference, ...]
    records: int
    notes: tuple[str, ...]
    attribution: Attribution | None = None

    @property
    def alarms(self) -> tuple[str, ...]:
        """What differs by more than noise and tolerance, in short."""
        told = [f"{row.name}: {row.told}" for row in self.columns if row.finding in DIFFERENT]
        if self.removed:
            told.append(f"gone: {counted(len(self.removed), 'run')}")
        return tuple(told)

    @property
    def differs(self) -> bool:
        """Whether anything does."""
        return bool(self.alarms)


def compare_sets(
    first: SetTable, second: SetTable, tolerances: Tolerances | None = None
) -> SetComparison:
    """Compare two nights, runs matched by name.

    Where the runs of a pair have the same seed, or noise does not move a check, any difference
    beyond rounding counts. Elsewhere the mean of the differences over all pairs is held against
    its standard error, and verdicts that flip against even chances, so that of a thousand
    comparisons in which the seed alone changed one finds something.

    Raises
    ------
    InputError
        If a record is damaged, a tolerance does not fit, or the nights have no run in common.
    """
    allowed = tolerances or Tolerances()
    pair = _Nights(first, second, allowed)
    if len(pair.one) == 0:
        raise InputError(
            f"{first.path} and {second.path} have no run of the same name; compare nights of one "
            "set, or sets that vary the same keys"
        )
    columns = tuple(pair.columns())
    allowed.refuse_unknown(row.name for row in columns)
    changed = tuple(pair.changed())
    return SetComparison(
        first.path,
        second.path,
        first.title,
        len(pair.one),
        tuple(name for name in second.names if name not in pair.before),
        tuple(name for name in first.names if name not in pair.after),
        pair.reseeded,
        changed,
        pair.varied(),
        columns,
        pair.records,
        tuple(pair.notes()),
    )


class _Nights:
    """Two tables, and the rows of the runs that both have."""

    def __init__(self, first: SetTable, second: SetTable, tolerances: Tolerances) -> None:
        self.first, self.second, self.tolerances = first, second, tolerances
        self.before = {name: row for row, name in enumerate(first.names)}
        self.after = {name: row for row, name in enumerate(second.names)}
        common = [name for name in first.names if name in self.after]
        self.names = common
        # Draw n has the same parts whatever is varied besides.
        last = [name.rpartition(",")[2] for name in common]
        self.draws = np.array(
            [
                draw if draw.startswith("draw ") else name
                for name, draw in zip(common, last, strict=True)
            ],
            np.str_,
        )
        self.one = np.array([self.before[name] for name in common], np.int64)
        self.other = np.array([self.after[name] for name in common], np.int64)
        seeds = first.runs["seed"][self.one], second.runs["seed"][self.other]
        self.moved = np.asarray(seeds[0] != seeds[1])
        self.reseeded = int(np.count_nonzero(self.moved))
        self.records = 0

    def changed(self) -> Iterator[Change]:
        """Return what differs between scenarios of the same name."""
        later = dict(zip(self.second.base_names, self.second.base_values, strict=True))
        several = len(self.first.base_names) > 1
        for name, values in zip(self.first.base_names, self.first.base_values, strict=True):
            other = later.get(name)
            if other is None and len(later) == 1 and not several:
                other = next(iter(later.values()))
            if other is None:
                continue
            scenarios = (scenario_of(values), scenario_of(other))
            for change in changes(values, other, scenarios):
                yield replace(change, key=f"{name}: {change.key}") if several else change

    def varied(self) -> dict[str, int]:
        """Count the matched runs in which a varied key has another value."""
        found = {}
        for key, values in self.first.parameters.items():
            if key not in self.second.parameters:
                continue
            one, other = values[self.one], self.second.parameters[key][self.other]
            same = one == other
            if one.dtype.kind == "f" and other.dtype.kind == "f":
                same |= np.isnan(one.astype(float)) & np.isnan(other.astype(float))
            if not np.all(same):
                found[key] = int(np.count_nonzero(~same))
        return found

    def columns(self) -> Iterator[ColumnDifference]:
        later = {check.name: check for check in self.second.checks}
        names = [check.name for check in self.first.checks]
        measures = [name for name in self.first.measures if name in self.second.measures]
        signals = 2 * max(len(values.get("channel", "1")) for values in self.first.base_values)
        level = FALSE_ALARMS / (2 * (len(names) + len(measures) + signals + 1))
        quiet = quiet_checks((*self.first.base_values, *self.second.base_values))
        verdicts = self.first.verdicts[self.one], self.second.verdicts[self.other]
        yield flips("all checks", verdicts, self.reseeded == 0, level, self.draws)
        for check in self.first.checks:
            other = later.pop(check.name, None)
            if other is None:
                yield ColumnDifference.lost(check.name, check.unit, "removed")
                continue
            exact = self._exact(check.name in quiet)
            yield column_difference(
                check.name, check.unit, check.value[self.one], other.value[self.other],
                (check.verdict[self.one], other.verdict[self.other]),
                (check.margin[self.one], other.margin[self.other]),
                exact, self._allowed(check.name, check.unit, check.value), level, self.draws,
            )  # fmt: skip
        for name, check in later.items():
            yield ColumnDifference.lost(name, check.unit, "added")
        units = {column.of: column.unit for column in self.first.columns if column.role == "value"}
        for name in measures:
            values = self.first.measures[name][self.one], self.second.measures[name][self.other]
            exact, unit = self._exact(name.partition(": ")[0] in quiet), units.get(name, "1")
            allowed = self._allowed(name, unit, self.first.measures[name])
            yield column_difference(
                name, unit, *values, None, None, exact, allowed, level, self.draws
            )
        yield from self._signals(level)

    def _exact(self, quiet: bool) -> bool:
        """Return whether differences have no chance in them: same seeds, or nothing to be moved.

        Parameters
        ----------
        quiet : whether noise does not move what is compared
        """
        return self.reseeded == 0 or (quiet and not self.varied())

    def _allowed(self, name: str, unit: str, values: Real) -> float:
        """Return a tolerance; a share is one of the median magnitude of the first night."""
        known = np.abs(values[np.isfinite(values)])
        return self.tolerances.of_result(name, unit, float(np.median(known)) if len(known) else 0.0)

    def _signals(self, level: float) -> Iterator[ColumnDifference]:
        """Compare the kept records of both nights, as many as there is time for."""
        kept = [row for row, name in enumerate(self.names) if self._both_kept(name)]
        step = -(-len(kept) // MOST_RECORDS) if kept else 1
        read = {row: self._signals_of(self.names[row]) for row in kept[::step]}
        self.records = sum(map(bool, read.values()))
        if not self.records:
            return
        adc = next(values["adc"] for values in self.first.base_values if "adc" in values)
        codes = 2.0 ** int(adc["bits"])
        extent = float(adc["high"]) - float(adc["low"])
        allowed = self.tolerances.of_signal("LSB", extent / codes, extent)
        for name in dict.fromkeys(name for found in read.values() for name in found):
            told = {row: found[name] for row, found in read.items() if name in found}
            values, certain = (np.array(each) for each in zip(*told.values(), strict=True))
            # Other seeds draw other parts, and with them another pin.
            exact = self._exact(bool(np.all(certain)))
            yield column_difference(
                name, "LSB", np.zeros(len(values)), values, None, None, exact, allowed, level,
                self.draws[list(told)], ROUNDING * codes,
            )  # fmt: skip

    def _both_kept(self, name: str) -> bool:
        if self.first.path.parent == self.second.path.parent:
            return False  # the records there are those of the later night
        paths = self.first.record_path(name), self.second.record_path(name)
        return all(path is not None and path.is_file() for path in paths)

    def _signals_of(self, name: str) -> dict[str, tuple[float, bool]]:
        """Return pin and codes of each channel -> mean difference [LSB], and whether it is exact.

        What is left out is known in parts of the runs that tell nothing of each other.
        """
        paths = self.first.record_path(name), self.second.record_path(name)
        assert paths[0] is not None  # only what both have is looked at
        assert paths[1] is not None
        with open_record(paths[0]) as one, open_record(paths[1]) as other:
            found = {row.name: row for row in compare_runs(one, other).series}
        told = {}
        for label, pin in found.items():
            channel = label.removesuffix("pin")
            codes = found.get(f"{channel}codes")
            if channel != label and codes is not None and codes.finding != "not judged":
                told[label] = pin.mean, pin.shift is None
                told[codes.name] = codes.mean, self.reseeded == 0
        return told

    def notes(self) -> Iterator[str]:
        for name in dict.fromkeys((*self.first.versions, *self.second.versions)):
            then, now = self.first.versions.get(name), self.second.versions.get(name)
            if then != now:
                yield f"{name} {then or 'none'} then, {now or 'none'} now"
        if not self.reseeded and not self.varied() and not any(self.changed()):
            told = self.first.texts("digest")[self.one] != self.second.texts("digest")[self.other]
            if np.any(told):
                yield (
                    f"in {counted(int(np.count_nonzero(told)), 'run')} the scenario is another "
                    "though no value differs: a recording or a table that it reads has another "
                    "content"
                )
        if self.reseeded:
            yield f"other seeds in {share_of(self.reseeded, len(self.one), 'run')}"
        if 0 < self.records < len(self.one):
            share = share_of(self.records, len(self.one), "run")
            yield f"pins and codes are those of {share}, of which records of both nights were read"
        if not self.records:
            yield (
                "no run has in both nights a record that tells something of the other, so pins and "
                'codes are not compared; keep them with keep = "all"'
            )
        for table in (self.first, self.second):
            if not table.complete:
                yield f"{table.path.parent} is incomplete"
