"""The answer: which values of a key pass, and where they end."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any, Literal

from frontend_sim.measure.result import Result
from frontend_sim.solve.search import MOST_BOUNDARIES, Boundary
from frontend_sim.solve.trial import Trial
from frontend_sim.solve.varied import Varied

Goal = Literal["least", "most"]

Shape = Literal["all pass", "none passes", "one boundary", "several boundaries", "unknown"]


@dataclass(frozen=True)
class Solution:
    """The least, or the most, value of a key with which all checks hold.

    Parameters
    ----------
    key : what was varied, and over which values
    goal : the least or the most value
    checks : names of those that count; empty for all
    corners : whether all corners of the tolerances were looked at
    trials : all values that were tried, increasing
    boundaries : neighbouring values of which one passes and the other fails, increasing
    answer : the value that was looked for; None where none passes
    beyond : the neighbour of the answer, one step further, which fails; None where the answer is
        a bound
    runs : how many scenarios were judged
    complete : False where the search was interrupted: this is what was known until then
    """

    key: Varied
    goal: Goal
    checks: tuple[str, ...]
    corners: bool
    trials: tuple[Trial, ...]
    boundaries: tuple[Boundary, ...]
    answer: Trial | None
    beyond: Trial | None
    runs: int
    complete: bool

    @property
    def value(self) -> float | None:
        """The value that was looked for, in SI; None where none passes."""
        return None if self.answer is None else self.answer.values[0]

    @property
    def shape(self) -> Shape:
        """What was found of the values that were tried."""
        if not self.trials:
            return "unknown"
        if not self.boundaries:
            return "all pass" if self.trials[0].passes else "none passes"
        return "one boundary" if len(self.boundaries) == 1 else "several boundaries"

    def ranges(self) -> tuple[tuple[float, float], ...]:
        """Return the ranges of values that pass, as far as they were tried, in SI."""
        found: list[tuple[float, float]] = []
        start = end = math.nan
        for trial in self.trials:
            value = trial.values[0]
            if trial.passes:
                start, end = (value, value) if math.isnan(start) else (start, value)
            elif not math.isnan(start):
                found.append((start, end))
                start = math.nan
        if not math.isnan(start):
            found.append((start, end))
        return tuple(found)

    def sentences(self) -> tuple[str, ...]:
        """Return the answer in words."""
        told = [self._answer()]
        if self.trials:
            told.append(self._shape())
        if not self.complete:
            told.append("interrupted: this is what was known until then")
        if self.corners:
            ends = f"with every part at either end of its tolerance{self._nearest_corner()}"
            told.append(f"{ends}; what lies between the corners was not looked at")
        if self.checks:
            told.append(f"checks that count: {', '.join(self.checks)}")
        return tuple(told)

    def _answer(self) -> str:
        text = self.key.text
        if not self.trials:
            return f"nothing of {self.key.key} was tried"
        low, high = (text(trial.values[0]) for trial in (self.trials[0], self.trials[-1]))
        if self.answer is None:
            tried = "" if self.complete else ", of those that were tried,"
            return f"no value of {self.key.key} from {low} to {high}{tried} passes: {self._why()}"
        word = {"least": "smallest", "most": "largest"}[self.goal]
        found = f"the {word} {self.key.key} that passes is {text(self.answer.values[0])}"
        if not self.complete:
            return f"of what was tried, {found}"
        if self.beyond is None:
            return f"{found}, the bound of what was looked at; nothing beyond was asked for"
        return f"{found}; {text(self.beyond.values[0])} fails: {_stopper(self.beyond)}"

    def _nearest_corner(self) -> str:
        if self.answer is None or not self.answer.corner:
            return ""
        return f", the least margin at {self.answer.corner}"

    def _why(self) -> str:
        best = max(self.trials, key=lambda trial: trial.score)
        if best.score == -math.inf:
            return _stopper(best)
        return f"nearest at {self.key.text(best.values[0])}, where {_stopper(best)}"

    def _shape(self) -> str:
        domain, many = self.key.domain, len(self.trials)
        all_of_them = domain.count is not None and many == domain.count
        looked = f"all {many} values" if all_of_them else f"the {many} values"
        near = domain.resolution if self.complete else "not narrowed down yet"
        if self.shape == "one boundary":
            way = "rising" if self.boundaries[0].rising else "falling"
            kind = f"monotone over {looked} that were tried: one boundary, {near}"
            side = "larger" if way == "rising" else "smaller"
            return f"{kind}; {side} values pass"
        if self.shape == "several boundaries":
            between = ", ".join(
                f"{self.key.text(low)} to {self.key.text(high)}" for low, high in self.ranges()
            )
            some = "" if len(self.boundaries) <= MOST_BOUNDARIES else ", the inner ones coarser"
            more = "" if all_of_them else "; more points look closer"
            return (
                f"not monotone over {looked} that were tried: {len(self.boundaries)} boundaries, "
                f"{near}{some}; what passes is {between}{more}"
            )
        verdict = "pass" if self.shape == "all pass" else "fail"
        if many == 1:
            return f"the only value that was tried {verdict}{'es' if verdict == 'pass' else 's'}"
        return f"{looked} that were tried {verdict}"

    def as_dict(self) -> dict[str, Any]:
        """Return plain data for JSON, in SI; None for what is not there."""
        return {
            "key": self.key.key,
            "unit": self.key.symbol or "1",
            "goal": self.goal,
            "checks": list(self.checks),
            "corners": self.corners,
            "shape": self.shape,
            "complete": self.complete,
            "value": self.value,
            "answer": _trial(self.answer),
            "beyond": _trial(self.beyond),
            "boundaries": [dict(vars(each)) for each in self.boundaries],
            "ranges": [list(each) for each in self.ranges()],
            "trials": [_trial(each) for each in self.trials],
            "runs": self.runs,
            "sentences": list(self.sentences()),
        }


def _stopper(trial: Trial) -> str:
    """Return which check a trial fails, and why."""
    at = f" at {trial.corner}" if trial.corner else ""
    if not trial.results:
        return f"it cannot be run{at}: {trial.reason}"
    told = f", {trial.reason}" if trial.reason else ""
    return f"{trial.decides} fails{at}{told}"


def _trial(trial: Trial | None) -> dict[str, Any] | None:
    if trial is None:
        return None
    return {
        "value": trial.values[0],
        "passes": trial.passes,
        "score": trial.score if math.isfinite(trial.score) else None,
        "decides": trial.decides,
        "corner": trial.corner,
        "reason": trial.reason,
        "results": [_plain(row) for row in trial.results],
    }


def _plain(row: Result) -> dict[str, Any]:
    told = ("name", "value", "unit", "limit", "bound", "margin", "verdict")
    values = {name: getattr(row, name) for name in told}
    numbers = {name: item for name, item in values.items() if isinstance(item, float)}
    return {**values, **{name: None for name, item in numbers.items() if not math.isfinite(item)}}
