"""A key of a scenario, and the values that it may be given."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from frontend_sim.errors import InputError
from frontend_sim.quantities import Dimension, Limit, Part, preferred
from frontend_sim.quantities.writing import as_share
from frontend_sim.scenario.key import find, text_of
from frontend_sim.scenario.scan_scenario import AnyScenario
from frontend_sim.scenario.vary import with_values
from frontend_sim.solve.bounds import (
    OF_TOLERANCE,
    domain_between,
    read_bound,
    refuse_beyond,
    refuse_disorder,
    tolerance_key,
    value_key,
)
from frontend_sim.solve.domain import Domain, Scale

TOLERANCE = 1e-4
"""Relative width of what is left between a value that passes and one that fails."""

FINEST, COARSEST = 1e-9, 0.1
"""Limits of that width."""


@dataclass(frozen=True)
class Varied:
    """A key with its domain.

    Parameters
    ----------
    key : with names of items where they have one
    dimension : what is measured; None for a bare or whole number, and for a limit
    domain : the values, in SI
    unit : of a limit, "" of all else
    whole : whether the value is a whole number
    part : whether the value is that of a part, whose spread is kept
    now : value in the scenario as it is given; None where the key has none
    """

    key: str
    dimension: Dimension | None
    domain: Domain
    unit: str = ""
    whole: bool = False
    part: Part | None = None
    now: float | None = None

    @property
    def of_tolerance(self) -> bool:
        """Whether the key is the tolerance of a part, which only its corners show."""
        return self.key.endswith(OF_TOLERANCE) and self.part is not None

    def placed(self, scenario: AnyScenario, value: float) -> AnyScenario:
        """Return a scenario with a value at the key.

        Raises
        ------
        ScenarioError
            If the value does not make a scenario.
        """
        return with_values(scenario, {self._home: self._item(scenario, value)})

    def text(self, value: float) -> str:
        """Return a value with its unit, as a file has it."""
        if self.whole:
            return str(int(value))
        if self.unit:
            return Limit(value, self.unit).text()
        if self.of_tolerance:
            return as_share(value)
        return text_of(float(value), self.dimension)

    @property
    def symbol(self) -> str:
        """The SI unit of the key, for axes; "" for a bare number."""
        return self.unit or (self.dimension.unit if self.dimension else "")

    @property
    def _home(self) -> str:
        return self.key.removesuffix(OF_TOLERANCE) if self.of_tolerance else self.key

    def _item(self, scenario: AnyScenario, value: float) -> Any:
        if self.whole:
            return int(value)
        if self.unit:
            return Limit(value, self.unit)
        if self.part is None:
            return float(value)
        now = find(scenario, self._home).value  # another key may have changed it
        part = now if isinstance(now, Part) else Part(now)
        if self.of_tolerance:
            return Part(part, value, part.drift, part.series)
        series = self.part.series if _in_series(value, self.part.series) else ""
        return Part(value, part.tolerance, part.drift, series)


def _in_series(value: float, series: str) -> bool:
    return bool(series) and preferred(value, series).member


def varied(
    scenario: AnyScenario,
    key: str,
    low: object,
    high: object,
    *,
    series: str | None = None,
    scale: Scale | None = None,
    tolerance: float = TOLERANCE,
) -> Varied:
    """Return a key of a scenario with the values between two bounds.

    Parameters
    ----------
    key : ``chain[input filter].resistance``, ``adc.bits``, ``check[1].before``,
        ``chain[1].resistance.tolerance``; see ``frontend_sim.scenario.key``
    low, high : bounds, text with a unit or a number in SI
    series : preferred-number series to take values from; left out, that of the part if it has
        one, else all numbers
    scale : left out, log for bounds above zero that are more than a decade apart
    tolerance : see ``Continuous``

    Raises
    ------
    ScenarioError
        If the key is none or holds no number.
    QuantityError
        If a bound cannot be read, is beyond the limits of the key, or the bounds are reversed.
    """
    if not FINEST <= tolerance <= COARSEST:
        raise InputError(
            f"the tolerance of a solution (--within) must lie from {FINEST:g} to {COARSEST:g}; "
            f"given {tolerance:g}"
        )
    whose = tolerance_key(scenario, key) or value_key(scenario, key)
    ends = [read_bound(scenario, whose, bound) for bound in (low, high)]
    refuse_disorder(whose, ends[0], ends[1])
    for end in ends:
        refuse_beyond(scenario, whose, end)
    domain = domain_between(whose, ends[0], ends[1], series, scale, tolerance)
    part = whose.part
    if part is not None and series:
        part = Part(part, part.tolerance, part.drift, series)
    unit = ends[0].unit if isinstance(ends[0], Limit) else ""
    return Varied(whose.key, whose.dimension, domain, unit, whose.whole, part, whose.now)
