"""One check or measure of two nights, over all runs that both have."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.comparison.series import Finding, judged
from frontend_sim.measure.statistics import Shift, flip_probability, independent_shift
from frontend_sim.quantities.counting import counted

Real = NDArray[np.float64]
Text = NDArray[np.str_]

NEGLIGIBLE = 1e-6
"""Relative difference that nobody could measure."""


@dataclass(frozen=True, eq=False)
class ColumnDifference:
    """Second less first, over all runs that both have.

    Parameters
    ----------
    name, unit : of the check or measure
    runs : pairs that have a value in both
    mean, peak : of the differences, in ``unit``; zero where they are rounding
    where : number of the pair with the largest, None without one
    margin : change of the smallest margin of the night; NaN for a measure
    better, worse : runs that hold now and failed before, and the other way round
    exact : whether chance plays no part
    shift : of the mean, with its error
    probability : that flips as lopsided are chance
    tolerance : that was given
    finding : what it comes to
    told : the same in words
    difference : of every pair, shape (N,)
    of_check : whether it has limits
    """

    name: str
    unit: str
    runs: int
    mean: float
    peak: float
    where: int | None
    margin: float
    better: int
    worse: int
    exact: bool
    shift: Shift | None
    probability: float
    tolerance: float
    finding: Finding
    told: str
    difference: Real
    of_check: bool = False

    @property
    def words(self) -> str:
        """The finding as a reader wants it: what differs, or that the limit moved."""
        if self.finding == "differs":
            return self.told
        # The values are the same, so that only their limits can have moved the margin.
        moved = self.finding == "same" and bool(self.margin) and math.isfinite(self.margin)
        return "same, limit moved" if moved else self.finding

    @classmethod
    def lost(cls, name: str, unit: str, finding: Finding) -> Self:
        """Return a check that one night has alone."""
        nan = math.nan
        return cls(
            name, unit, 0, nan, nan, None, nan, 0, 0, True, None, 1.0, 0.0, finding, finding,
            np.empty(0),
        )  # fmt: skip


def column_difference(
    name: str,
    unit: str,
    first: Real,
    second: Real,
    verdicts: tuple[Text, Text] | None,
    margins: tuple[Real, Real] | None,
    exact: bool,
    allowed: float,
    level: float,
    draws: Text | None = None,
    rounding: float = 0.0,
) -> ColumnDifference:
    """Return how a check or measure differs between two nights.

    Parameters
    ----------
    first, second : values of the pairs, shape (N,)
    exact : whether chance plays no part, so that the largest difference counts
    allowed : tolerance, in ``unit``
    level : rate of false alarms that is accepted [1]
    draws : what pairs of the same parts have in common, shape (N,): chance moves these together,
        so that they count as one; left out, each pair is on its own
    rounding : what is no difference at all, in ``unit``, where it is more than a millionth
    """
    with np.errstate(invalid="ignore"):
        difference = np.where(first == second, 0.0, second - first)
    known = np.flatnonzero(np.isfinite(difference))
    values = difference[known]
    shift = independent_shift(values if exact else _draw_means(values, draws, known))
    peak_at = int(known[np.argmax(np.abs(values))]) if len(values) else None
    peak = 0.0 if peak_at is None else float(difference[peak_at])
    better, worse, chance = _flips(verdicts, draws)
    size = float(np.max(np.abs(np.stack([first[known], second[known]])), initial=0.0))
    # A run that has no value any more counts, whatever its verdict.
    lost = int(np.count_nonzero(np.isfinite(first) & ~np.isfinite(second)))
    smallest = max(NEGLIGIBLE * size, rounding)
    finding, told = _judge(
        shift, peak, smallest, allowed, (better, worse, lost), exact, chance, level
    )
    margin = math.nan
    if margins is not None:
        margin = _less(_least(margins[1]), _least(margins[0]))
        if finding == "same" and abs(margin) <= smallest:
            margin = 0.0
    mean = shift.mean if len(values) else math.nan
    if finding == "same" and len(values):
        mean = peak = 0.0
        difference = np.where(np.isfinite(difference), 0.0, difference)
    return ColumnDifference(
        name, unit, len(values), mean, peak, peak_at, margin, better, worse, exact,
        None if exact else shift, chance, allowed, finding, told, difference,
        margins is not None,
    )  # fmt: skip


def flips(
    name: str, verdicts: tuple[Text, Text], exact: bool, level: float, draws: Text | None = None
) -> ColumnDifference:
    """Return how many runs changed their verdict, all checks taken together."""
    better, worse, chance = _flips(verdicts, draws)
    broke = int(np.count_nonzero((verdicts[1] == "error") & (verdicts[0] != "error")))
    nan = math.nan
    if broke:
        finding: Finding = "differs"
        told = f"no result any more from {counted(broke, 'run')}"
    else:
        finding, told = _judge_flips(better, worse, exact, chance, level)
    return ColumnDifference(
        name, "", len(verdicts[0]), nan, nan, None, nan, better, worse, exact, None, chance, 0.0,
        finding, told, np.empty(0),
    )  # fmt: skip


def _judge(
    shift: Shift,
    peak: float,
    rounding: float,
    allowed: float,
    turned: tuple[int, int, int],
    exact: bool,
    chance: float,
    level: float,
) -> tuple[Finding, str]:
    better, worse, lost = turned
    finding, told = _judge_flips(better, worse, exact, chance, level)
    if finding == "differs":
        return finding, told
    if exact:
        if lost:
            return "differs", f"no value any more in {counted(lost, 'run')}"
        if abs(peak) <= rounding:
            return "same", "same"
        if abs(peak) <= allowed:
            return "within tolerance", "within tolerance"
        return "differs", told or "values differ"
    if peak == 0.0:
        return "same", "same"
    found = judged(shift, allowed, level)
    return (
        found,
        told if found == "differs" and told else "shifted" if found == "differs" else found,
    )


def _judge_flips(
    better: int, worse: int, exact: bool, chance: float, level: float
) -> tuple[Finding, str]:
    told = []
    if worse:
        told.append(f"now fails in {counted(worse, 'run')}")
    if better:
        told.append(f"now holds in {counted(better, 'run')}")
    text = ", ".join(told)
    if not told:
        return "same", ""
    if exact:
        return ("differs" if worse else "within tolerance"), text
    return ("differs" if chance < level and worse > better else "within noise"), text


def _draw_means(values: Real, draws: Text | None, known: NDArray[np.int64]) -> Real:
    """Return the mean of the pairs of each draw."""
    if draws is None or len(values) == 0:
        return values
    _, place = np.unique(draws[known], return_inverse=True)
    means: Real = np.bincount(place, weights=values) / np.bincount(place)
    return means


def _flips(verdicts: tuple[Text, Text] | None, draws: Text | None) -> tuple[int, int, float]:
    """Return how many runs hold now, how many fail now, and how probable that is by chance."""
    if verdicts is None:
        return 0, 0, 1.0
    before, after = verdicts
    better = (before == "fails") & (after == "holds")
    worse = (before == "holds") & (after == "fails")
    turned = worse.astype(np.float64) - better
    # The runs of one draw flip together; a draw counts for what most of them do.
    net = _draw_means(turned, draws, np.arange(len(turned)))
    chance = flip_probability(int(np.count_nonzero(net < 0)), int(np.count_nonzero(net > 0)))
    return int(np.count_nonzero(better)), int(np.count_nonzero(worse)), chance


def _least(margins: Real) -> float:
    known = margins[~np.isnan(margins)]
    return float(np.min(known)) if len(known) else math.nan


def _less(one: float, other: float) -> float:
    return 0.0 if one == other else one - other
