"""Which changed parameter moved a margin: one at a time, run again."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.comparison.again import run_again
from frontend_sim.comparison.changes import Change
from frontend_sim.errors import InputError
from frontend_sim.measure.result import Result
from frontend_sim.scenario.scan_scenario import AnyScenario
from frontend_sim.scenario.vary import with_values

MOST = 64
"""So many parameters are run one at a time; more changes are no longer a change of a circuit."""

ROUNDING = 1e-9
"""Share of a measure, or of its limit, that the engine is right to: a smaller change is none."""


@dataclass(frozen=True)
class Share:
    """What one changed parameter does alone.

    Parameters
    ----------
    key : the parameter
    moved : measure -> how far this change alone moves it from the first run, 0 below its rounding
    fault : why it cannot be changed alone, "" if it can
    """

    key: str
    moved: Mapping[str, float]
    fault: str = ""


@dataclass(frozen=True)
class Attribution:
    """How the change from the first run to the second splits over the parameters.

    Parameters
    ----------
    units : measure -> unit; margins of checks, their values where there is no limit, and the means
        of pin and codes
    total : measure -> second less first, all changes made, with the seed of the first
    shares : one for each changed parameter, in their order
    rounding : measure -> what is no more than this is none
    margins : the measures that are margins of checks
    """

    units: Mapping[str, str]
    total: Mapping[str, float]
    shares: tuple[Share, ...]
    rounding: Mapping[str, float]
    margins: frozenset[str] = frozenset()

    def remainder(self, measure: str) -> float:
        """Return what the changes do together beyond the sum of what each does alone."""
        alone = math.fsum(row.moved.get(measure, 0.0) for row in self.shares)
        return _beyond(self.total[measure] - alone, self.rounding[measure])


@dataclass(frozen=True)
class _Measured:
    """A measure of one run.

    Parameters
    ----------
    value : its margin, its value where there is no limit, NaN where it cannot be told
    unit : of both
    rounding : how far it is known
    margin : whether it is one
    """

    value: float
    unit: str
    rounding: float
    margin: bool

    @classmethod
    def of(cls, row: Result) -> Self:
        value = row.value if row.margin is None else row.margin
        # A mean of zero is still one of codes.
        sizes = [1.0 if row.unit == "LSB" else 0.0, abs(row.value or 0.0), abs(row.limit or 0.0)]
        largest = max(size for size in sizes if math.isfinite(size))
        told = math.nan if value is None else value
        return cls(told, row.unit, ROUNDING * largest, row.margin is not None)


def attribute(
    first: AnyScenario,
    second: AnyScenario,
    changed: Sequence[Change],
    progress: Callable[[float], None] | None = None,
) -> Attribution:
    """Run the first scenario, or scan, with each change alone, and with all of them.

    All runs have the seed of the first, so that noise takes no part as far as it can. What
    the changes do together beyond the sum is the interaction; it is told, not shared out.

    Raises
    ------
    InputError
        If there are too many changes, or one of the two scenarios cannot be run.
    """
    if len(changed) > MOST:
        raise InputError(
            f"{len(changed)} parameters differ, and at most {MOST} are run one at a time; compare "
            "runs that are nearer to each other"
        )
    advance = progress or (lambda share: None)
    before = _measured(first)
    after = _measured(second.model_copy(update={"seed": first.seed}))
    shares = []
    for position, change in enumerate(changed):
        advance((2 + position) / (2 + len(changed)))
        shares.append(_share(first, change, before))
    advance(1.0)
    total = _less(after, before)
    return Attribution(
        {name: before[name].unit for name in total},
        total,
        tuple(shares),
        {name: _rounding(after[name], before[name]) for name in total},
        frozenset(name for name in total if before[name].margin),
    )


def _share(first: AnyScenario, change: Change, before: Mapping[str, _Measured]) -> Share:
    try:
        alone = with_values(first, {change.key: change.value})
        return Share(change.key, _less(_measured(alone), before))
    except InputError as error:
        return Share(change.key, {}, str(error))


def _measured(scenario: AnyScenario) -> dict[str, _Measured]:
    """Run a scenario and return its measures by name. Raises InputError."""
    return {row.name: _Measured.of(row) for row in run_again(scenario)}


def _less(after: Mapping[str, _Measured], before: Mapping[str, _Measured]) -> dict[str, float]:
    """Return how far each measure moved; NaN where a value is missing or stays infinite."""
    moved = {}
    for name, one in before.items():
        if name in after and after[name].unit == one.unit:
            with np.errstate(invalid="ignore"):
                change = float(np.subtract(after[name].value, one.value))
            moved[name] = _beyond(change, _rounding(after[name], one))
    return moved


def _rounding(one: _Measured, other: _Measured) -> float:
    return max(one.rounding, other.rounding)


def _beyond(change: float, rounding: float) -> float:
    """Return a change, zero where it is no more than rounding."""
    return 0.0 if abs(change) <= rounding else change
