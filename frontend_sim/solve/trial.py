"""A scenario is tried with some values: all its checks are held against a run of it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field

from frontend_sim.errors import InputError, nearest
from frontend_sim.measure.checks.judge import check_names, judge
from frontend_sim.measure.result import Result
from frontend_sim.scenario.checks.rules import labels
from frontend_sim.scenario.scan_scenario import AnyScenario, ScanScenario
from frontend_sim.solve.corners import NOMINAL, Corner, Corners
from frontend_sim.solve.varied import Varied

SMALLEST = 5e-324
"""A check that fails on its limit, to rounding, has a score below zero all the same."""


@dataclass(frozen=True)
class Trial:
    """What became of one choice of values.

    Parameters
    ----------
    values : in SI, one for each key
    scenario : that was tried, parts at the corner that decided, with the checks that count; None
        where it could not be made
    results : verdicts of the checks that count; empty where it could not be run
    score : margin of the check nearest to its limit, as a share of that limit: at least 0 if all
        hold, below if one fails; minus infinity where there is no number
    decides : name of that check
    corner : the corner that decided, in words; "" for the nominal values
    reason : why it could not be run, or the check be told; else ""
    """

    values: tuple[float, ...]
    scenario: AnyScenario | None
    results: tuple[Result, ...]
    score: float
    decides: str = ""
    corner: str = ""
    reason: str = ""

    @property
    def passes(self) -> bool:
        """Whether all checks that count hold."""
        return self.score >= 0.0


@dataclass
class Bench:
    """Tries a scenario with values at some keys, each choice once.

    Parameters
    ----------
    scenario : as it is given
    keys : what is varied
    checks : names of the checks that count; empty for all
    corners : whether all corners of the tolerances count
    trials : values -> what became of them
    runs : how many scenarios were judged
    """

    scenario: AnyScenario
    keys: tuple[Varied, ...]
    checks: tuple[str, ...] = ()
    corners: bool = False
    trials: dict[tuple[float, ...], Trial] = field(default_factory=dict)
    runs: int = 0
    _last: Corner = NOMINAL

    def trial(self, *values: float) -> Trial:
        """Return what becomes of values, one for each key, in SI."""
        if values not in self.trials:
            self.trials[values] = self._tried(values)
        return self.trials[values]

    def score(self, value: float) -> float:
        """Return the score of a value of the only key."""
        return self.trial(value).score

    def _tried(self, values: tuple[float, ...]) -> Trial:
        scenario = self.scenario
        try:
            for key, value in zip(self.keys, values, strict=True):
                scenario = key.placed(scenario, value)
        except InputError as error:
            return Trial(values, None, (), -math.inf, reason=_line(error))
        if not self.corners:
            return self._judged(values, scenario, "")
        return self._worst(values, Corners.of(scenario))

    def _worst(self, values: tuple[float, ...], corners: Corners) -> Trial:
        """Return the first corner that fails, else the one with the least margin."""
        worst: Trial | None = None
        # The corner that failed last time is likely to fail again.
        for corner in sorted(corners, key=lambda each: each != self._last):
            try:
                scenario = corners.at(corner)
            except InputError as error:
                return Trial(values, None, (), -math.inf, reason=_line(error))
            found = self._judged(values, scenario, corners.text(corner))
            if worst is None or found.score < worst.score:
                worst = found
            if not found.passes:
                self._last = corner
                break
        assert worst is not None  # there is the nominal corner at least
        return worst

    def _judged(self, values: tuple[float, ...], scenario: AnyScenario, corner: str) -> Trial:
        self.runs += 1
        try:
            scenario = counted(scenario, self.checks)
            rows = judge(scenario)
            if isinstance(scenario, ScanScenario) and self.checks:
                rows = tuple(row for row in rows if row.name in self.checks)
        except InputError as error:
            return Trial(values, scenario, (), -math.inf, corner=corner, reason=_line(error))
        worst = min(rows, key=score_of)
        reason = worst.method if worst.value is None else ""
        return Trial(values, scenario, rows, score_of(worst), worst.name, corner, reason)


def score_of(result: Result) -> float:
    """Return the margin of a verdict as a share of its limit, see ``Trial.score``."""
    if result.margin is None or result.limit is None or math.isnan(result.margin):
        return -math.inf
    size = abs(result.limit) or abs(result.value or 0.0) or 1.0
    share = result.margin / size
    return max(share, 0.0) if result.verdict == "holds" else min(share, -SMALLEST)


def named_checks(scenario: AnyScenario, names: Sequence[str]) -> tuple[str, ...]:
    """Return the names of checks that count, as results have them.

    Parameters
    ----------
    names : of checks, or their places from 1; empty for all

    Raises
    ------
    InputError
        If the scenario has no check, or none of such a name.
    """
    known = check_names(scenario)
    if not known:
        raise InputError(
            "the scenario has no check, so nothing says which values pass; add a [[check]] with "
            "its limit, see docs/checks.md"
        )
    found = []
    for name in names:
        place = int(name) if name.isascii() and name.isdigit() else 0
        if name not in known and not 0 < place <= len(known):
            raise InputError(f"there is no check {name!r}{nearest(name, known)}")
        found.append(name if name in known else known[place - 1])
    return tuple(found)


def counted(scenario: AnyScenario, names: Sequence[str]) -> AnyScenario:
    """Return a scenario with those of its checks alone that count, under the names they have.

    A scan keeps all of them, since one check may count for one channel and not for another.
    """
    if not names or isinstance(scenario, ScanScenario):
        return scenario
    pairs = zip(scenario.check, labels(scenario.check), strict=True)
    kept = tuple(check.model_copy(update={"name": name}) for check, name in pairs if name in names)
    return scenario.model_copy(update={"check": kept})


def _line(error: InputError) -> str:
    return " ".join(str(error).split())
