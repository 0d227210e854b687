"""What to change first where a check fails: key, direction, and the value that would pass."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace

from frontend_sim.errors import InputError
from frontend_sim.measure.checks.judge import judge
from frontend_sim.measure.result import Result
from frontend_sim.measure.sensitivity.estimate import MOST_CONVERSIONS, Trials
from frontend_sim.measure.sensitivity.parameter import Parameter, parameters_of
from frontend_sim.scenario.channel_scenario import ChannelScenario
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.finished import Finished

MOST_KEYS = 16
"""So many keys are looked at, in the order of the file."""

MOST_CHECKS = 4
"""For so many checks that fail a value is looked for."""

TRIALS = 8.0
"""What a run costs whose grid is picked, in runs on that grid."""


@dataclass(frozen=True)
class Suggestion:
    """A key, the value that it would need, and what becomes of the checks with it.

    Parameters
    ----------
    parameter : what to change
    value : in SI; a run with it passes the check
    others : names of the checks that fail with it
    """

    parameter: Parameter
    value: float
    others: tuple[str, ...]

    def text(self) -> str:
        """Return the sentence: ``lower chain[filter].resistance from 10 kohm to 5.44 kohm``."""
        way = "lower" if self.value < self.parameter.value else "raise"
        now, then = self.parameter.text(), self.parameter.text(self.value)
        told = f"{way} {self.parameter.key} from {now} to {then}"
        if not self.others:
            return f"{told}, with which all checks hold"
        verb = "fails" if len(self.others) == 1 else "fail"
        return f"{told}, with which {' and '.join(self.others)} {verb}"


def advised(scenario: Scenario, run: Finished | None, rows: tuple[Result, ...]) -> Iterator[Result]:
    """Return results in which the checks that fail also say which key to change, and to what.

    Parameters
    ----------
    scenario : with its checks
    run : what they were held against; one that is too long to make again gets no such advice
    rows : verdicts of all checks, each followed by what was found beside it
    """
    position, left = -1, MOST_CHECKS
    for row in rows:
        position += row.verdict != "none"
        wanted = row.verdict == "fails" and row.value is not None and left > 0
        found = suggestion(scenario, position, row) if wanted and _cheap(scenario, run) else None
        left -= wanted
        if found is None:
            yield row
        else:
            told = f"{row.advice}; by the sensitivities: " if row.advice else ""
            yield replace(row, advice=f"{told}{found.text()}")


def suggestion(scenario: Scenario, position: int, result: Result) -> Suggestion | None:
    """Return what to change so that one check holds, the smallest change that was found.

    The derivative by each of the designer's keys gives a linear estimate of the value that would
    pass, on a logarithmic scale where value and limit have one sign. The nearest are tried, and
    corrected where they do not pass.

    Parameters
    ----------
    position : of the check, from 0
    result : its verdict

    Returns
    -------
    None where no key does it.
    """
    if result.value is None or result.limit is None or not math.isfinite(result.value):
        return None
    try:
        keys = [each for each in parameters_of(scenario) if each.designed][:MOST_KEYS]
        search = Trials(scenario, position, result)
        estimates = sorted(
            filter(None, map(search.estimate, keys)), key=lambda each: round(each.change, 3)
        )
        for each in estimates[:2]:
            value = search.passing(each)
            if value is not None:
                return _confirmed(scenario, each.parameter, value)
    except (InputError, ArithmeticError):
        return None
    return None


def _cheap(scenario: Scenario, run: Finished | None) -> bool:
    """Return whether a run can be made again some dozens of times only to advise."""
    if isinstance(scenario, ChannelScenario):
        return False  # a channel alone is not what it is within its scan
    if run is None:
        return True
    grid, duration = run.grid, scenario.simulation.duration or 0.0
    points = 0.0 if grid is None else max(grid.grid_rate * duration, 1.0)
    known = scenario.simulation.grid_rate is not None
    # Where a grid is picked, each choice costs some runs more.
    work = len(run.time) + points * (1.0 if known else TRIALS)
    return work <= MOST_CONVERSIONS


def _confirmed(scenario: Scenario, parameter: Parameter, value: float) -> Suggestion:
    rows = judge(parameter.placed(scenario, value))
    return Suggestion(parameter, value, tuple(row.name for row in rows if row.verdict == "fails"))
