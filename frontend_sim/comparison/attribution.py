"""Which changed parameter moved a margin: one at a time, run again."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from frontend_sim.comparison.again import run_again
from frontend_sim.comparison.changes import Change
from frontend_sim.errors import InputError
from frontend_sim.scenario.scan_scenario import AnyScenario
from frontend_sim.scenario.vary import with_values

MOST = 64
"""So many parameters are run one at a time; more changes are no longer a change of a circuit."""


@dataclass(frozen=True)
class Share:
    """What one changed parameter does alone.

    Parameters
    ----------
    key : the parameter
    moved : measure -> how far this change alone moves it from the first run
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
    """

    units: Mapping[str, str]
    total: Mapping[str, float]
    shares: tuple[Share, ...]

    def remainder(self, measure: str) -> float:
        """Return what the changes do together beyond the sum of what each does alone."""
        return self.total[measure] - math.fsum(row.moved.get(measure, 0.0) for row in self.shares)


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
    both = {name: unit for name, (_, unit) in before.items() if name in after}
    total = _less(after, before)
    return Attribution(both, {name: total[name] for name in both}, tuple(shares))


def _share(first: AnyScenario, change: Change, before: Mapping[str, tuple[float, str]]) -> Share:
    try:
        alone = with_values(first, {change.key: change.value})
        return Share(change.key, _less(_measured(alone), before))
    except InputError as error:
        return Share(change.key, {}, str(error))


def _measured(scenario: AnyScenario) -> dict[str, tuple[float, str]]:
    """Run a scenario; return measure -> margin, or value, and unit. Raises InputError."""
    found = {}
    for row in run_again(scenario):
        value = row.value if row.margin is None else row.margin
        found[row.name] = math.nan if value is None else value, row.unit
    return found


def _less(
    after: Mapping[str, tuple[float, str]], before: Mapping[str, tuple[float, str]]
) -> dict[str, float]:
    """Return how far each measure moved; NaN where a value is missing or stays infinite."""
    moved = {}
    for name, (value, unit) in after.items():
        if name in before and before[name][1] == unit:
            with np.errstate(invalid="ignore"):
                moved[name] = float(np.subtract(value, before[name][0]))
    return moved
