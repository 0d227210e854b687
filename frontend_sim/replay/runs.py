"""A set made ready: its runs, one after the other, each with its name, values, seed and digest."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from itertools import chain
from pathlib import Path
from typing import Any

from frontend_sim.errors import InputError
from frontend_sim.quantities import Part
from frontend_sim.replay.contents import Contents
from frontend_sim.replay.names import seed_of
from frontend_sim.replay.points import Axis, combinations, count_of
from frontend_sim.replay.set_model import Keep
from frontend_sim.replay.spread import Spread
from frontend_sim.scenario import AnyScenario
from frontend_sim.scenario.key import dimension_at
from frontend_sim.scenario.vary import with_values

_text_of = json.JSONEncoder(sort_keys=True, separators=(",", ":")).encode


@dataclass(frozen=True, eq=False)
class Base:
    """A scenario that a set varies.

    Parameters
    ----------
    name : of it in the names of runs, "" where the set has one only
    path : of its file
    scenario : None where it cannot be read
    error : why not
    axes, spreads : how it is varied
    """

    name: str
    path: Path
    scenario: AnyScenario | None
    error: str = ""
    axes: tuple[Axis, ...] = ()
    spreads: tuple[Spread, ...] = ()

    @cached_property
    def count(self) -> int:
        """How many runs it gives."""
        if self.scenario is None:
            return 1
        return count_of(self.axes) * (sum(spread.count for spread in self.spreads) or 1)


@dataclass(frozen=True)
class PlannedRun:
    """One run of a set.

    Parameters
    ----------
    number : of the run, from 0
    name : stable from night to night
    base : number of the scenario that it varies
    values : key -> value that it has there
    seed : of the run
    recipe : digest of all that its outcome depends on; where it is the same, nothing is run again
    error : why it cannot be run, "" where it can
    """

    number: int
    name: str
    base: int
    values: Mapping[str, Any]
    seed: int
    recipe: str
    error: str = ""

    def parameters(self) -> dict[str, float | str]:
        """Return the varied values as the table has them."""
        return {key: _cell(value) for key, value in self.values.items()}


def _cell(value: Any) -> float | str:
    if isinstance(value, bool):
        return "true" if value else "false"
    return float(value) if isinstance(value, int | float) else str(value)


@dataclass(frozen=True, eq=False)
class PreparedSet:
    """A set that was read, checked and counted.

    Parameters
    ----------
    source : what the user named
    title, keep, around : as in the set file
    seed : of the set; None where the scenarios are run with their own seeds
    text : the set file as written, "" where there is none
    directory : what files in values are relative to
    bases : the scenarios that are varied
    file_keys : keys whose values are files
    versions : of everything that the numbers depend on
    contents : of the recordings, as this set found them
    """

    source: str
    title: str
    seed: int | None
    keep: Keep
    text: str
    directory: Path
    bases: tuple[Base, ...]
    file_keys: frozenset[str] = frozenset()
    versions: Mapping[str, str] = field(default_factory=dict)
    around: float | None = None
    contents: Contents = field(default_factory=Contents)

    @cached_property
    def count(self) -> int:
        """How many runs the set has."""
        return sum(base.count for base in self.bases)

    @cached_property
    def units(self) -> dict[str, str]:
        """Key that is varied -> the unit of its numbers, in SI."""
        units: dict[str, str] = {}
        for base in self.bases:
            if base.scenario is None:
                continue
            points = chain.from_iterable(axis[0].values for axis in base.axes)
            for key in chain(points, *(spread.keys for spread in base.spreads)):
                dimension = dimension_at(base.scenario, key)
                units[key] = dimension.unit if dimension is not None else "1"
        return units

    def runs(self) -> Iterator[PlannedRun]:
        """Return all runs, always in the same order; they are made one by one."""
        number = 0
        for place, base in enumerate(self.bases):
            digest = self._digest(base)
            for label, values, error in _circuits(base, self.directory):
                given = (base.name, label) if label else (base.name,)
                name = ",".join(part for part in given if part) or base.path.stem
                seed = self._seed(base, name)
                recipe = self._recipe(digest, values, seed)
                yield PlannedRun(number, name, place, values, seed, recipe, error or base.error)
                number += 1

    def _seed(self, base: Base, name: str) -> int:
        if self.seed is not None:
            return seed_of(self.seed, name)
        return 0 if base.scenario is None else base.scenario.seed

    def _digest(self, base: Base) -> str:
        if base.scenario is None:
            return hashlib.sha256(base.error.encode()).hexdigest()
        return base.scenario.digest(self.contents)

    def _recipe(self, base: str, values: Mapping[str, Any], seed: int) -> str:
        plain = {key: self._plain(key, value) for key, value in values.items()}
        keep = self.keep if self.around is None else [self.keep, self.around]
        told = [base, plain, seed, keep, dict(self.versions)]
        return hashlib.sha256(_text_of(told).encode()).hexdigest()

    def _plain(self, key: str, value: Any) -> Any:
        """Return a value as data for JSON; a file counts by its content, not by its name."""
        if key in self.file_keys:
            return self.contents(Path(value))
        return value.plain() if isinstance(value, Part) else value


def _circuits(base: Base, directory: Path) -> Iterator[tuple[str, dict[str, Any], str]]:
    """Return label, values and fault of every run of a base."""
    if base.scenario is None:
        yield "", {}, ""
        return
    for label, values in combinations(base.axes):
        if not base.spreads:
            yield label, values, ""
            continue
        scenario, fault = base.scenario, ""
        try:
            scenario = with_values(base.scenario, values, directory)
        except InputError as error:
            fault = str(error)
        for spread in base.spreads:
            for circuit, parts in spread.circuits(scenario):
                yield f"{label},{circuit}" if label else circuit, {**values, **parts}, fault
