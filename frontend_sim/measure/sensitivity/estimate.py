"""Which value of a parameter would pass: a linear estimate, corrected by trials."""

from __future__ import annotations

import math
from dataclasses import dataclass
from decimal import ROUND_CEILING, ROUND_FLOOR, Context

from frontend_sim.errors import InputError
from frontend_sim.measure.checks.judge import subject_of
from frontend_sim.measure.checks.verdict import verdict_on
from frontend_sim.measure.result import Result
from frontend_sim.measure.sensitivity.number import number_of
from frontend_sim.measure.sensitivity.parameter import Parameter
from frontend_sim.scenario.model import Scenario

STEP = 1e-2
"""Relative step of the derivative."""

MOST_CONVERSIONS = 20_000
"""A longer run, or one with more points of a grid, is not made again only to advise."""

TRIES = 8
"""So many values of a key are tried, the linear estimate first."""

NEAR = 0.05
"""A value that passes by no more than this share of the limit is near enough."""

LEVELS = ("dB", "bit")
"""Units of numbers that go with the logarithm of a ratio."""

MOST_POWER = 20.0
"""A line that meets the goal beyond this power of e meets it nowhere."""

FURTHEST = 20.0
"""A key that must change by more than this factor is no advice."""

DIGITS = 3
"""Significant digits of a value that is advised."""

BEYOND = 2e-3
"""The estimate aims so far, as a share of the limit, at its right side."""


@dataclass(frozen=True)
class Estimate:
    """A parameter, the value that is estimated to pass, and how far away that is."""

    parameter: Parameter
    value: float

    @property
    def change(self) -> float:
        """Size of the change, by its logarithm."""
        return abs(math.log(self.value / self.parameter.value))


class Trials:
    """Looks for values that pass one check."""

    def __init__(self, scenario: Scenario, position: int, result: Result) -> None:
        """Take what fails: a check by its position from 0, and its verdict."""
        assert result.value is not None  # the caller knows
        assert result.limit is not None
        self._scenario, self._position = scenario, position
        self._value, self._level = result.value, result.unit in LEVELS
        self._size = abs(result.limit) or abs(result.value)
        away = BEYOND * (1.0 if self._level else self._size)
        self._goal = result.limit + (-away if result.bound == "at most" else away)

    def estimate(self, parameter: Parameter) -> Estimate | None:
        """Return the value that the derivative by a parameter says would pass, if not too far."""
        near = parameter.value * (1.0 + STEP)
        if parameter.whole:
            near = parameter.value + (1.0 if parameter.value <= 1.0 else -1.0)
        found = self._measured(parameter, near)
        if found is None:
            return None
        value = self._line(parameter.value, self._value, near, found)
        if value is None or parameter.value * value <= 0.0 or value == parameter.value:
            return None
        if parameter.key.endswith("adc.bits") and value < parameter.value:
            return None  # coarser codes make nothing better
        factor = min(max(value / parameter.value, 1.0 / FURTHEST), FURTHEST)
        return Estimate(parameter, factor * parameter.value)

    def passing(self, start: Estimate) -> float | None:
        """Return a value that passes, not far beyond what is needed; None where none is found."""
        parameter, value = start.parameter, start.value
        bad, bad_value = parameter.value, self._value
        good: float | None = None
        for turn in range(TRIES):
            rounded = self._rounded(parameter, value)
            found = self._measured(parameter, rounded)
            if found is None or rounded in (bad, good):
                break
            if self._passes(parameter, rounded):
                good = rounded
                if parameter.whole or abs(found - self._goal) <= NEAR * self._size:
                    break
            again = self._again((bad, bad_value), (rounded, found), good, turn % 2 == 1)
            if good != rounded:
                bad, bad_value = rounded, found
            if again is None or not 1.0 / FURTHEST <= again / parameter.value <= FURTHEST:
                break
            value = again
        return good

    def _again(
        self, bad: tuple[float, float], last: tuple[float, float], good: float | None, half: bool
    ) -> float | None:
        """Return where to look next: on the line through two points, inside what is known.

        Where a straight line leads nowhere fast, every second step halves what is left.

        Parameters
        ----------
        bad, last : the value that failed before, and the one just tried, with what they measure
        good : the value nearest to what is needed that passes
        half : whether to halve
        """
        value = self._line(*bad, *last)
        if good is None:
            return value
        edge = bad[0] if good == last[0] else last[0]
        if not half and value is not None and min(edge, good) < value < max(edge, good):
            return value
        return math.copysign(math.sqrt(edge * good), good)

    def _measured(self, parameter: Parameter, value: float) -> float | None:
        try:
            subject = subject_of(parameter.placed(self._scenario, value), MOST_CONVERSIONS)
            return number_of(subject, self._position)
        except InputError:
            return None

    def _passes(self, parameter: Parameter, value: float) -> bool:
        try:
            subject = subject_of(parameter.placed(self._scenario, value), MOST_CONVERSIONS)
        except InputError:
            return False
        return verdict_on(subject, self._position).verdict == "holds"

    def _line(self, x: float, y: float, other: float, seen: float) -> float | None:
        """Return where the line through two points meets the goal.

        A number above zero goes with a power of the parameter, a level with its logarithm.
        """
        goal = self._goal
        if x == other or not math.isfinite(seen) or abs(seen - y) <= 1e-9 * abs(y):
            return None
        if x * other <= 0.0 or (not self._level and min(y, seen, goal) <= 0.0):
            return x + (goal - y) * (other - x) / (seen - y)
        rise, needed = (
            (seen - y, goal - y) if self._level else (math.log(seen / y), math.log(goal / y))
        )
        exponent = needed / rise * math.log(other / x)
        return x * math.exp(min(max(exponent, -MOST_POWER), MOST_POWER))

    def _rounded(self, parameter: Parameter, value: float) -> float:
        """Return a value with few digits, rounded away from the one that fails."""
        up = value > parameter.value
        if parameter.whole:
            return float(math.ceil(value - 1e-9) if up else math.floor(value + 1e-9))
        context = Context(prec=DIGITS, rounding=ROUND_CEILING if up else ROUND_FLOOR)
        return float(context.create_decimal(repr(float(value))))
