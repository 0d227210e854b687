"""Circuits with other parts: corners of all tolerances, and random draws within them."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from itertools import product
from pathlib import Path
from typing import Any, Protocol

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import RecordingError, ScenarioError
from frontend_sim.quantities import Part
from frontend_sim.randomness import stream, uniform
from frontend_sim.replay.set_model import Corners, Distribution, DrawnPart, Draws
from frontend_sim.scenario import AnyScenario, spread_parts
from frontend_sim.scenario.key import find, value_at
from frontend_sim.scenario.walk import key_text

TEMPERATURE_KEY = "environment.temperature"
STRETCH = 1024
"""Draws that are made at once."""

Real = NDArray[np.float64]
Circuit = tuple[str, dict[str, Any]]
"""The label of a circuit, and the values of its keys."""


class Spread(Protocol):
    """A way to vary the parts of a scenario."""

    @property
    def keys(self) -> tuple[str, ...]:
        """The keys that it varies."""

    @property
    def count(self) -> int:
        """How many circuits it makes."""

    def circuits(self, scenario: AnyScenario) -> Iterator[Circuit]:
        """Return the circuits; values are taken around those of a scenario."""


@dataclass(frozen=True)
class CornerSpread:
    """The nominal circuit, and every combination of the ends of its tolerances.

    A two-level full factorial: 2^n corners of n parts, the temperature counted as one. In
    ``corner 0-1`` the first is at its lowest, the second at its highest value.
    """

    parts: tuple[str, ...]
    temperature: tuple[float, float] | None

    @classmethod
    def of(cls, corners: Corners, scenario: AnyScenario) -> CornerSpread:
        """Find the parts. Raises ScenarioError if there are none."""
        parts = toleranced(corners.parts, scenario, "corners.parts")
        if not parts and corners.temperature is None:
            raise ScenarioError(
                "corners: no part of the scenario has a tolerance, and no temperature range is "
                'given; write resistance = { value = "10 kohm", tolerance = "1 %" } in the '
                'scenario, or temperature = ["-40 degC", "85 degC"] here'
            )
        return cls(parts, corners.temperature)

    @property
    def keys(self) -> tuple[str, ...]:
        """The keys that it varies."""
        return self.parts if self.temperature is None else (*self.parts, TEMPERATURE_KEY)

    @property
    def count(self) -> int:
        """How many circuits it makes."""
        return int(2 ** len(self.keys) + 1)

    def circuits(self, scenario: AnyScenario) -> Iterator[Circuit]:
        """Return the nominal circuit and all corners, see ``Spread``."""
        yield "corner nominal", {}
        parts = [part_at(scenario, key) for key in self.parts]
        for sides in product((0, 1), repeat=len(self.keys)):
            values: dict[str, Any] = {
                key: _at_end(part, side)
                for key, part, side in zip(self.parts, parts, sides, strict=False)
            }
            if self.temperature is not None:
                values[TEMPERATURE_KEY] = self.temperature[sides[-1]]
            yield f"corner {'-'.join(map(str, sides))}", values


def _at_end(part: Part, side: int) -> Part:
    return Part((part.lowest, part.highest)[side], part.tolerance, part.drift)


@dataclass(frozen=True, eq=False)
class DrawSpread:
    """Random circuits; draw n is the same whatever the number of draws and their order.

    A part takes nominal · (1 + tolerance · z), with z from -1 to 1. Uniform: all z alike. Normal:
    of standard deviation s, cut off at -1 and 1, by the inverse of its distribution,
    z = s Phi^-1(Phi(-1/s) + u (Phi(1/s) - Phi(-1/s))) with u uniform. Source: JCGM 101:2008,
    6.4.2 and 6.4.7, Annex C; from memory. A part with measured values takes one of these.

    Parameters
    ----------
    parts, rules : keys of the parts, and how each is drawn
    measured : key -> measured values, as they were when the set was read
    first : number of the first draw; those before it are left out
    """

    seed: int
    draws: Draws
    parts: tuple[str, ...]
    rules: tuple[DrawnPart, ...]
    measured: Mapping[str, Real]
    first: int = 0

    @classmethod
    def of(cls, draws: Draws, scenario: AnyScenario, seed: int, directory: Path) -> DrawSpread:
        """Find the parts, and the rule for each. Raises ScenarioError if there are none."""
        keys = toleranced(draws.parts, scenario, "draws.parts")
        rules: dict[Any, DrawnPart] = {}
        paths = {find(scenario, key).path: key for key in keys}
        for place, rule in enumerate(draws.part):
            path = find(scenario, rule.key).path
            if path in rules:
                raise ScenarioError(f"draws.part[{place + 1}]: {rule.key} is listed twice")
            rules[path] = rule
            if path not in paths:
                # A part with measured values needs no tolerance.
                measured = rule.file is not None
                given = (rule.key,)
                found = given if measured else toleranced(given, scenario, "draws.part")
                paths[path] = found[0]
        if not paths and draws.temperature is None:
            raise ScenarioError(
                "draws: no part of the scenario has a tolerance, so all draws would be alike; "
                'write resistance = { value = "10 kohm", tolerance = "1 %" } in the scenario'
            )
        parts = tuple(key_text(scenario, path) for path in paths)
        chosen = tuple(rules.get(path, DrawnPart(key=key)) for path, key in paths.items())
        tables: dict[str, Real] = {}
        for key, rule in zip(parts, chosen, strict=True):
            if rule.file is not None:
                tables[key] = measured_values(directory / rule.file, rule.column)
                _refuse_foreign(key, rule.file, tables[key], scenario)
        return cls(seed, draws, parts, chosen, tables)

    @property
    def keys(self) -> tuple[str, ...]:
        """The keys that it varies."""
        return self.parts if self.draws.temperature is None else (*self.parts, TEMPERATURE_KEY)

    @property
    def count(self) -> int:
        """How many circuits it makes."""
        return self.draws.count - self.first

    def limited(self, count: int) -> DrawSpread:
        """Return the same with no more than so many draws."""
        fewer = min(count, self.draws.count)
        return replace(self, draws=self.draws.model_copy(update={"count": fewer}))

    def circuits(self, scenario: AnyScenario) -> Iterator[Circuit]:
        """Return all draws, see ``Spread``."""
        for start in range(self.first, self.draws.count, STRETCH):
            stop = min(start + STRETCH, self.draws.count)
            columns = {
                key: self._column(key, rule, scenario, start, stop)
                for key, rule in zip(self.parts, self.rules, strict=True)
            }
            if self.draws.temperature is not None:
                low, high = self.draws.temperature
                u = uniform(stream(self.seed, "draw", "temperature"), start, stop)
                columns[TEMPERATURE_KEY] = (low + u * (high - low)).tolist()
            for row in range(stop - start):
                values = {key: column[row] for key, column in columns.items()}
                yield f"draw {start + row + 1:04d}", values

    def _column(
        self, key: str, rule: DrawnPart, scenario: AnyScenario, start: int, stop: int
    ) -> list[Any]:
        """Return the values of one part in some draws."""
        name = ("group", rule.group) if rule.group is not None else ("part", key)
        u = uniform(stream(self.seed, "draw", *name), start, stop)
        part = part_at(scenario, key)
        if key in self.measured:
            measured = self.measured[key]
            row = np.minimum((u * len(measured)).astype(np.int64), len(measured) - 1)
            values = measured[row]
        else:
            z = deviations(u, rule.distribution or self.draws.distribution, self.draws.deviation)
            values = float(part) + abs(float(part)) * part.tolerance * z
            values = np.clip(values, part.lowest, part.highest)
        return [Part(value, part.tolerance, part.drift) for value in values.tolist()]


def _refuse_foreign(key: str, file: str, measured: Real, scenario: AnyScenario) -> None:
    nominal = float(part_at(scenario, key))
    if nominal == 0.0:
        return
    far = np.flatnonzero(np.abs(np.log(np.abs(measured / nominal) + 1e-300)) > np.log(10.0))
    if len(far):
        raise ScenarioError(
            f"draws.part: value {far[0] + 1} of {file}, {measured[far[0]]:g}, is more than a "
            f"factor of ten away from the nominal value of {key}, {nominal:g}; measured values "
            "stand in SI units, check the column"
        )


def deviations(u: Real, distribution: Distribution, deviation: float) -> Real:
    """Return z from -1 to 1 for u uniform in [0, 1), shape as u [1]."""
    if distribution == "uniform":
        return 2.0 * u - 1.0
    from scipy.special import ndtr, ndtri

    low = ndtr(-1.0 / deviation)
    z: Real = deviation * ndtri(low + u * (1.0 - 2.0 * low))
    return np.clip(z, -1.0, 1.0)


def part_at(scenario: AnyScenario, key: str) -> Part:
    """Return the part at a key; a number without a spread is a part without tolerance."""
    value = value_at(scenario, key)
    return value if isinstance(value, Part) else Part(value)


def toleranced(given: Sequence[str] | None, scenario: AnyScenario, where: str) -> tuple[str, ...]:
    """Return the keys of parts with a tolerance: those that are given, or all.

    Raises
    ------
    ScenarioError
        If a key that is given leads to no part, or to one without a tolerance.
    """
    known = [part.path for part in spread_parts(scenario) if part.tolerance > 0.0]
    if given is None:
        return tuple(key_text(scenario, path) for path in known)
    for key in given:
        if find(scenario, key).path not in known:
            told = ", ".join(key_text(scenario, path) for path in known) or "none"
            raise ScenarioError(
                f"{where}: {key} has no tolerance in the scenario; parts that have one: {told}"
            )
    return tuple(key_text(scenario, find(scenario, key).path) for key in given)


def measured_values(file: Path, column: str | int | None) -> Real:
    """Return a column of measured values, shape (N,). Raises ScenarioError."""
    try:
        about = file.stat()
        return _measured(file, column, about.st_mtime_ns, about.st_size)
    except OSError as error:
        raise ScenarioError(f"{file} cannot be read: {error.strerror or error}") from None
    except RecordingError as error:
        raise ScenarioError(str(error)) from None


@lru_cache(maxsize=64)
def _measured(file: Path, column: str | int | None, modified: int, size: int) -> Real:
    from frontend_sim.stimulus.recording.readers import open_source
    from frontend_sim.stimulus.recording.series import Wanted

    series = open_source(file, Wanted(column, None, None)).signal
    values = np.asarray(series.read(0, series.count), dtype=np.float64)
    wrong = np.flatnonzero(~np.isfinite(values))
    if len(values) == 0 or len(wrong):
        where = f"value {wrong[0] + 1} is missing" if len(wrong) else "there is no value"
        raise ScenarioError(f"{file}: {where}; a table of measured values has one in every row")
    return values
