"""Two records, compared."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.archive import Record
from frontend_sim.comparison.attribution import Attribution
from frontend_sim.comparison.changes import Change, changes
from frontend_sim.comparison.instants import Common, by_instant, by_number, by_numbers, same_clock
from frontend_sim.comparison.randomness import random_pin, slow_noise
from frontend_sim.comparison.results import ResultDifference, result_differences
from frontend_sim.comparison.series import (
    DIFFERENT,
    SeriesDifference,
    exact_difference,
    noise_change,
    noisy_difference,
    not_comparable,
)
from frontend_sim.comparison.tolerance import Tolerances
from frontend_sim.errors import InputError
from frontend_sim.measure.checks.quiet import quiet_checks
from frontend_sim.quantities.counting import counted
from frontend_sim.scenario.model import Scenario

Real = NDArray[np.float64]

FALSE_ALARMS = 1e-3
"""Rate of comparisons of equal scenarios that shall find a difference by chance [1]."""

ROUNDING = 1e-9
"""What the engine promises, as a share of the range of the converter."""


@dataclass(frozen=True, eq=False)
class RecordComparison:
    """What differs between two records.

    Parameters
    ----------
    first, second : their paths
    title : of the first
    seeds : of both
    changed : keys of the scenario
    series : pin, codes, noise, waveforms
    results : measures and checks
    notes : what else a reader must know
    attribution : where it was asked for
    """

    first: Path
    second: Path
    title: str
    seeds: tuple[int, int]
    changed: tuple[Change, ...]
    series: tuple[SeriesDifference, ...]
    results: tuple[ResultDifference, ...]
    notes: tuple[str, ...]
    attribution: Attribution | None = field(default=None)

    @property
    def alarms(self) -> tuple[str, ...]:
        """What differs by more than noise and tolerance, in short."""
        told = [f"{row.name}: {row.finding}" for row in self.series if row.finding in DIFFERENT]
        found = [row for row in self.results if row.finding in DIFFERENT]
        told += [f"{row.name}: {row.flip or row.finding}" for row in found]
        return (*told, *(f"{row.name}: added, fails" for row in self.results if row.newly_fails))

    @property
    def differs(self) -> bool:
        """Whether anything does."""
        return bool(self.alarms)


def compare_records(
    first: Record,
    second: Record,
    tolerances: Tolerances | None = None,
    false_alarms: float = FALSE_ALARMS,
) -> RecordComparison:
    """Compare two records.

    The pin and the waveforms are exact: where the seed plays no part in them, any difference
    beyond rounding counts. Codes carry noise: what they lie above the pin is judged by its mean
    and its rms, against the noise in the two records themselves, so that of a thousand comparisons
    in which the seed alone changed one finds something.

    Parameters
    ----------
    tolerances : how far a difference does not matter
    false_alarms : how often equal scenarios may be found to differ by chance [1]

    Raises
    ------
    InputError
        If a record is damaged, or a tolerance does not fit.
    """
    allowed = tolerances or Tolerances()
    pair = _Pair(first, second, allowed, false_alarms)
    results = pair.results()
    allowed.refuse_unknown(row.name for row in results)
    return RecordComparison(
        first.path,
        second.path,
        first.title,
        (first.seed, second.seed),
        pair.changed(),
        tuple(pair.series()),
        results,
        tuple(pair.notes()),
    )


@dataclass(eq=False)
class _Pair:
    """Two open records and what several comparisons of them ask for."""

    first: Record
    second: Record
    tolerances: Tolerances
    false_alarms: float

    def __post_init__(self) -> None:
        self.resolved = (values_of(self.first), values_of(self.second))
        self.scenarios = (scenario_of(self.first), scenario_of(self.second))
        self.adc: Mapping[str, Any] = self.resolved[0]["adc"]
        self.low, self.high = float(self.adc["low"]), float(self.adc["high"])
        self.lsb = (self.high - self.low) / 2.0 ** int(self.adc["bits"])
        self.reseeded = self.first.seed != self.second.seed
        self.parts = any(run.stretches is not None for run in (self.first, self.second))
        whole = [record.resolved["scenario"] for record in (self.first, self.second)]
        self.moving_pin = self.reseeded and any(map(random_pin, [*self.resolved, *whole]))

    def changed(self) -> tuple[Change, ...]:
        files = tuple(
            {entry["name"]: entry["sha256"] for entry in record.resolved["files"]}
            for record in (self.first, self.second)
        )
        return changes(*self.resolved, self.scenarios, (files[0], files[1]))

    def series(self) -> Iterator[SeriesDifference]:
        waveforms = [name for name in self.first.waveform if name in self.second.waveform]
        tests = 2 + (1 + len(waveforms) if self.moving_pin else 0)
        self.level = self.false_alarms / tests
        yield from map(self._judged, self._conversions())
        if not waveforms:
            return
        times = self.first.waveform_time, self.second.waveform_time
        common = by_instant(*times)
        for name in waveforms:
            yield self._judged(self._waveform(name, common, times[0]))

    def _judged(self, row: SeriesDifference) -> SeriesDifference:
        """Return a difference, not judged where only parts are there and they cannot tell it.

        What a part keeps was chosen by what failed, and so by chance, if other seeds are at work.
        """
        if not self.parts or (row.count and (row.shift is None or not self.reseeded)):
            return row
        why = "" if row.count == 0 else "; kept for what failed, so that chance is no measure"
        return replace(row, finding="not judged", told=f"{row.told}{why}")

    def _conversions(self) -> Iterator[SeriesDifference]:
        times = self.first.time, self.second.time
        if not same_clock(self.adc, self.resolved[1]["adc"]):
            common = by_instant(*times)
        elif self.parts:
            common = by_numbers(self.first.numbers, self.second.numbers)
        else:
            common = by_number(len(times[0]), len(times[1]))
        if len(common) == 0:
            yield not_comparable("pin", "LSB", common.told)
            yield not_comparable("codes", "LSB", common.told)
            return
        time, told = times[0][common.first], common.told
        allowed = self.tolerances.of_signal("LSB", self.lsb, self.high - self.low)
        pins = self.first.pin[common.first], self.second.pin[common.second]
        pin = (pins[1] - pins[0]) / self.lsb
        rounding = ROUNDING * (self.high - self.low) / self.lsb
        if self.moving_pin:
            yield noisy_difference("pin", "LSB", time, pin, pin, allowed, self.level, told)
        else:
            yield exact_difference("pin", "LSB", time, pin, rounding, allowed, told)
        read = self.first.voltage[common.first], self.second.voltage[common.second]
        codes = (read[1] - read[0]) / self.lsb
        exact = self._held(common) or pins
        above = [(read[side] - exact[side]) / self.lsb for side in (0, 1)]
        slow = self._slow(float(times[0][-1])) if self.reseeded else 0.0
        if not self.reseeded and allowed == 0.0:
            yield exact_difference("codes", "LSB", time, codes, rounding, 0.0, told)
        else:
            noise = codes if self.moving_pin else above[1] - above[0]
            yield noisy_difference(
                "codes", "LSB", time, codes, noise, allowed, self.level, told, slow
            )
        yield noise_change(above[0], above[1], allowed, self.level)

    def _held(self, common: Common) -> tuple[Real, Real] | None:
        """Return what the sampling capacitors held, which codes are made from; None without."""
        held = self.first.held, self.second.held
        if not len(held[0]) or not len(held[1]):
            return None
        return held[0][common.first], held[1][common.second]

    def _slow(self, duration: float) -> float:
        """Return the standard error of a difference that slow noise makes [LSB]."""
        found = [slow_noise(scenario, duration) for scenario in self.scenarios if scenario]
        return float(np.sqrt(sum(rms**2 for rms in found)))

    def _waveform(self, name: str, common: Common, time: Any) -> SeriesDifference:
        label = f"waveform: {name}"
        unit, scale = self._unit(name)
        if len(common) == 0:
            return not_comparable(label, unit, common.told)
        one = self.first.waveform[name][common.first]
        difference = (self.second.waveform[name][common.second] - one) / scale
        whole = self.high - self.low
        allowed = self.tolerances.of_signal("LSB", self.lsb, whole) if unit == "LSB" else 0.0
        at = time[common.first]
        if self.moving_pin:
            return noisy_difference(
                label, unit, at, difference, difference, allowed, self.level, common.told
            )
        largest = max(whole if unit == "LSB" else 0.0, float(np.max(np.abs(one))))
        rounding = ROUNDING * largest / scale
        return exact_difference(label, unit, at, difference, rounding, allowed, common.told)

    def _unit(self, name: str) -> tuple[str, float]:
        """Return the unit that a waveform is told in, and how large it is in SI."""
        scenario = self.scenarios[0]
        units = dict(zip(scenario.points(), scenario.units(), strict=True)) if scenario else {}
        unit = units.get(name, "V")
        return ("LSB", self.lsb) if unit == "V" else (unit or "1", 1.0)

    def results(self) -> tuple[ResultDifference, ...]:
        # Of what a program added to a record nobody knows whether noise moves it, so it may.
        quiet = quiet_checks(self.resolved, self.moving_pin)
        return result_differences(
            self.first.results,
            self.second.results,
            self.tolerances,
            lambda name: self.reseeded and not _of_check(name, quiet),
        )

    def notes(self) -> Iterator[str]:
        yield from part_notes(self.first, self.second)
        yield from version_notes(self.first.resolved, self.second.resolved)
        if self.adc["bits"] != self.resolved[1]["adc"]["bits"] or (self.low, self.high) != (
            self.resolved[1]["adc"]["low"],
            self.resolved[1]["adc"]["high"],
        ):
            yield "the converters differ in their codes; LSB here are those of the first"
        if self.first.scenario_digest == self.second.scenario_digest:
            yield "the scenarios are the same, bit by bit"
        alone = set(self.first.waveform) ^ set(self.second.waveform)
        if alone:
            yield f"waveforms that one of them alone has: {', '.join(sorted(alone))}"


def part_notes(first: Record, second: Record) -> Iterator[str]:
    """Tell which record keeps a part of its run alone, and what that means."""
    for record in (first, second):
        if record.stretches is not None:
            yield (
                f"{record.path} keeps {record.count:,} of "
                f"{counted(record.whole_count, 'conversion')}, around what failed; signals are "
                "compared where both records have them"
            )


def values_of(record: Record) -> dict[str, Any]:
    """Return the resolved values of a record's scenario; of a channel of a scan, its own."""
    values: dict[str, Any] = record.resolved["scenario"]
    return values if "adc" in values and "stimulus" in values else record.scenario.resolved()


def scenario_of(record: Record) -> Scenario | None:
    """Return the scenario of a record, None where this version cannot build it any more."""
    try:
        return record.scenario
    except InputError:
        return None


def version_notes(first: Mapping[str, Any], second: Mapping[str, Any]) -> Iterator[str]:
    """Tell the libraries whose versions differ, and another machine."""
    one, other = first["versions"], second["versions"]
    for name in dict.fromkeys((*one, *other)):
        if one.get(name) != other.get(name):
            yield f"{name} {one.get(name, 'none')} then, {other.get(name, 'none')} now"
    if first.get("machine") != second.get("machine"):
        yield f"machine {first.get('machine')} then, {second.get('machine')} now"


def _of_check(name: str, labels: Collection[str]) -> bool:
    """Return whether a result is that of one of some checks, or was found beside it."""
    return any(name == label or name.startswith(f"{label}: ") for label in labels)
