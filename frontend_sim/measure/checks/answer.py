"""What the evaluation of one check gives, before it has a name."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial

from frontend_sim.measure.arrays import Real
from frontend_sim.measure.result import Bound, Result
from frontend_sim.quantities import Limit

SENSES: dict[Bound, float] = {"at most": 1.0, "at least": -1.0}

ROUNDING = 1e-12
"""A value that differs from its limit by less than this share lies on it."""


@dataclass(frozen=True)
class Answer:
    """A value against its limit.

    Parameters
    ----------
    value : in ``unit``; infinite where it is beyond all bounds
    limit, bound : what it is held against
    method : how it was found, with its reference
    advice : says what to change first if the check fails; called only then
    beside : numbers that were found on the way, without verdict
    where : tells where in time the check fails, shape (N, 2) [s], see ``places``; called only then.
        None for a number that is made from all that the check reads of the run
    uncertainty : how far the value is known; it counts against the check, in ``unit``
    """

    value: float
    unit: str
    limit: float
    bound: Bound
    method: str
    advice: Callable[[], str] = str
    beside: tuple[Result, ...] = ()
    where: Callable[[], Real] | None = None
    uncertainty: float = 0.0

    @property
    def margin(self) -> float:
        """How far the value surely stays on the right side of its limit, below zero where it fails.

        A value on its limit to rounding has no margin, and holds.
        """
        sense = SENSES[self.bound]
        reached = self.value + sense * self.uncertainty
        if math.isclose(reached, self.limit, rel_tol=ROUNDING, abs_tol=0.0):
            return 0.0
        return sense * (self.limit - reached)

    @property
    def holds(self) -> bool:
        """Whether the value keeps its limit; not a number is neither above nor below, and fails."""
        return self.margin >= 0.0

    def results(self, name: str) -> tuple[Result, ...]:
        """Return the verdict, and what was found beside it, under the name of the check."""
        verdict = Result(
            name,
            self.value,
            self.unit,
            self.limit,
            self.margin,
            "holds" if self.holds else "fails",
            self.method,
            self.bound,
            "" if self.holds else self.advice(),
        )
        return (verdict, *(replace(row, name=f"{name}: {row.name}") for row in self.beside))


def nearer(
    value: float,
    least: float | None,
    most: float | None,
    unit: str,
    method: str,
    advice: Callable[[Bound], str],
    where: Callable[[], Real] | None = None,
) -> Answer:
    """Return a value against the nearer, or the more broken, of two limits; one may be None."""
    given: list[tuple[float, Bound]] = []
    if least is not None:
        given.append((least, "at least"))
    if most is not None:
        given.append((most, "at most"))
    found = [
        Answer(value, unit, limit, bound, method, partial(advice, bound), where=where)
        for limit, bound in given
    ]
    return min(found, key=lambda answer: answer.margin)


def in_volts(limit: float, lsb: float, whole: float) -> float:
    """Return a limit as a voltage [V]; parameters as ``scaled``."""
    assert isinstance(limit, Limit)  # every field of this kind reads one
    return float(limit) * limit.scale(lsb, whole)


def scaled(limit: float, volts: float, lsb: float, whole: float) -> tuple[float, str]:
    """Return a voltage in the unit of a limit, and that unit.

    Parameters
    ----------
    limit : as ``Limit``
    volts : the voltage [V]
    lsb : width of a code [V];  whole : what a share is a share of [V]
    """
    assert isinstance(limit, Limit)  # every field of this kind reads one
    scale = limit.scale(lsb, whole)
    return (volts / scale if scale > 0.0 else math.inf), limit.unit
