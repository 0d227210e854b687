"""Solves for one key of a scenario."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from frontend_sim.errors import InputError
from frontend_sim.scenario.scan_scenario import AnyScenario
from frontend_sim.solve.corners import Corners
from frontend_sim.solve.domain import Scale
from frontend_sim.solve.search import POINTS, Search
from frontend_sim.solve.solution import Goal, Solution
from frontend_sim.solve.trial import Bench, named_checks
from frontend_sim.solve.varied import TOLERANCE, Varied, varied

FEWEST_POINTS, MOST_POINTS = 3, 1000

Progress = Callable[[float], None]


class Solver:
    """Looks for the least, or the most, value of a key with which all checks hold.

    Parameters
    ----------
    scenario : with its checks
    key : what is varied, and over which values
    goal : "least" or "most"
    checks : names, or places from 1, of the checks that count; empty for all
    corners : whether all checks must hold at every corner of the parts' tolerances; always so
        where the key is a tolerance
    points : values that are looked at first

    Raises
    ------
    InputError
        If there is nothing to check, or too many corners.
    """

    def __init__(
        self,
        scenario: AnyScenario,
        key: Varied,
        goal: Goal,
        *,
        checks: Sequence[str] = (),
        corners: bool = False,
        points: int = POINTS,
    ) -> None:
        """Prepare the search; nothing is run yet."""
        if not FEWEST_POINTS <= points <= MOST_POINTS:
            raise InputError(
                f"points must lie from {FEWEST_POINTS} to {MOST_POINTS}; given {points}"
            )
        self.key, self.goal, self.points = key, goal, points
        wide = corners or key.of_tolerance
        self.bench = Bench(scenario, (key,), named_checks(scenario, checks), wide)
        self._corners = 1
        if wide:
            highest = key.domain.spread(2)[-1]
            self._corners = Corners.of(key.placed(scenario, highest)).count
        self._search = Search(key.domain, self._score, points)
        self._progress: Progress | None = None

    @property
    def most_runs(self) -> int:
        """How many scenarios are judged at most, where there is one boundary."""
        return self._search.most * self._corners

    def run(self, progress: Progress | None = None) -> Solution:
        """Search, and return the solution.

        ``progress`` is called with the share that is done, from 0 to 1.

        Raises
        ------
        InputError
            If no value of the key can be run, with the reason.
        """
        self._progress = progress
        self._search.run()
        if progress is not None:
            progress(1.0)
        found = self.solution()
        if all(not trial.results for trial in found.trials):
            first = found.trials[0]
            raise InputError(
                f"no value of {self.key.key} can be run; with {self.key.text(first.values[0])}: "
                f"{first.reason}"
            )
        return found

    def solution(self) -> Solution:
        """Return what is known so far: all of it after ``run``, less after an interruption."""
        trials = tuple(self.bench.trials[key] for key in sorted(self.bench.trials))
        passing = [place for place, trial in enumerate(trials) if trial.passes]
        answer = beyond = None
        if passing:
            place = passing[0] if self.goal == "least" else passing[-1]
            answer, other = trials[place], place + (-1 if self.goal == "least" else 1)
            beyond = trials[other] if 0 <= other < len(trials) else None
        return Solution(
            self.key,
            self.goal,
            self.bench.checks,
            self.bench.corners,
            trials,
            self._search.boundaries(),
            answer,
            beyond,
            self.bench.runs,
            self._search.finished,
        )

    def _score(self, value: float) -> float:
        score = self.bench.score(value)
        if self._progress is not None:
            self._progress(min((len(self.bench.trials)) / self._search.most, 0.99))
        return score


def solve_for(
    scenario: AnyScenario,
    key: str,
    low: object,
    high: object,
    goal: Goal,
    *,
    checks: Sequence[str] = (),
    corners: bool = False,
    series: str | None = None,
    scale: Scale | None = None,
    tolerance: float = TOLERANCE,
    points: int = POINTS,
    progress: Progress | None = None,
) -> Solution:
    """Return the least, or the most, value of a key with which all checks of a scenario hold.

    Parameters
    ----------
    scenario : with its checks
    key : ``chain[input filter].resistance``, ``check[1].before``, ``adc.bits``,
        ``chain[1].resistance.tolerance``; see ``frontend_sim.scenario.key``
    low, high : bounds of the search, text with a unit or a number in SI
    goal : "least" or "most"
    checks : names, or places from 1, of the checks that count; empty for all
    corners : whether they must hold at every corner of the parts' tolerances
    series : preferred-number series to take values from
    scale : "log" or "linear"; left out, log for bounds above zero more than a decade apart
    tolerance : relative distance at which a value that passes and one that fails are neighbours
    points : values that are looked at first
    progress : called with the share that is done, from 0 to 1

    Returns
    -------
    Solution : the value, its failing neighbour, all boundaries, and all that was tried

    Raises
    ------
    InputError
        If the key, a bound or a name is wrong, or no value can be run.

    Examples
    --------
    >>> import frontend_sim as fe
    >>> scenario = fe.load_scenario("scenarios/solve/input-filter.toml")
    >>> fe.solve_for(scenario, "check[wait].before", "1 us", "4 ms", "least").value
    0.00019234
    """
    where = varied(scenario, key, low, high, series=series, scale=scale, tolerance=tolerance)
    solver = Solver(scenario, where, goal, checks=checks, corners=corners, points=points)
    return solver.run(progress)
