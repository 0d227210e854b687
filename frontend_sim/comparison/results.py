"""Measures and verdicts of two runs, side by side."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from frontend_sim.comparison.series import Finding
from frontend_sim.comparison.tolerance import Tolerances
from frontend_sim.measure.result import Result
from frontend_sim.measure.statistics import Shift

NEGLIGIBLE = 1e-6
"""Relative difference that nobody could measure."""


@dataclass(frozen=True)
class ResultDifference:
    """One measure or check of two runs.

    Parameters
    ----------
    name, unit : of the result
    first, second : None where a run does not have it
    change : second less first, in ``unit``, zero of what is the same; NaN where one has no value
    noisy : whether the seed moves it, and seeds differ
    tolerance : that was given, in ``unit``
    finding : what it comes to
    shift : over several seeds, where they were asked for
    """

    name: str
    unit: str
    first: Result | None
    second: Result | None
    change: float
    noisy: bool
    tolerance: float
    finding: Finding
    shift: Shift | None = None

    @property
    def words(self) -> str:
        """The finding as a reader wants it: of the same value, whether its limit moved."""
        return (
            "same, limit moved" if self.finding == "same" and self.margin_change else self.finding
        )

    @property
    def flip(self) -> str:
        """``"now fails"``, ``"now holds"``, or "" where the verdict is the same."""
        if self.first is None or self.second is None or self.first.verdict == self.second.verdict:
            return ""
        return f"now {self.second.verdict}"

    @property
    def newly_fails(self) -> bool:
        """Whether a check that the first run does not have fails in the second."""
        return self.first is None and self.second is not None and self.second.verdict == "fails"

    @property
    def margin_change(self) -> float | None:
        """By how much the margin grew, in ``unit``; None where there is none."""
        one, other = self.first, self.second
        if one is None or other is None or one.margin is None or other.margin is None:
            return None
        change = _less(other.margin, one.margin)
        sizes = [abs(_number(part)) for side in (one, other) for part in (side.value, side.limit)]
        return 0.0 if abs(change) <= NEGLIGIBLE * max(sizes) else change


def result_differences(
    first: Sequence[Result],
    second: Sequence[Result],
    tolerances: Tolerances,
    noisy: Callable[[str], bool],
) -> tuple[ResultDifference, ...]:
    """Return the results of two runs, matched by name, in the order of the first.

    Parameters
    ----------
    noisy : whether a result of this name moves with the seed
    """
    one, other = _by_name(first), _by_name(second)
    return tuple(
        _difference(name, one.get(name), other.get(name), tolerances, noisy(name))
        for name in dict.fromkeys((*one, *other))
    )


def _by_name(results: Sequence[Result]) -> dict[str, Result]:
    """Name results; of several with one name, the others are counted."""
    found: dict[str, Result] = {}
    for result in results:
        name, count = result.name, 1
        while name in found:
            count += 1
            name = f"{result.name} ({count})"
        found[name] = result
    return found


def _difference(
    name: str, one: Result | None, other: Result | None, tolerances: Tolerances, noisy: bool
) -> ResultDifference:
    known = _known(one, other)
    same_unit = one and other and (None in (one.value, other.value) or one.unit == other.unit)
    if one is None or other is None or not same_unit:
        why: Finding = "not comparable" if one and other else "removed" if one else "added"
        return ResultDifference(name, known.unit, one, other, math.nan, False, 0.0, why)
    before, after = _number(one.value), _number(other.value)
    change = _less(after, before)
    allowed = tolerances.of_result(name, known.unit, before)
    finding = _finding(one, other, change, allowed, noisy)
    if finding == "same" and not math.isnan(change):
        change = 0.0  # rounding is none
    return ResultDifference(name, known.unit, one, other, change, noisy, allowed, finding)


def _known(one: Result | None, other: Result | None) -> Result:
    """Return the result that knows its unit: without a value there may be none."""
    there = [side for side in (one, other) if side is not None]
    return next((side for side in there if side.value is not None), there[0])


def _finding(one: Result, other: Result, change: float, allowed: float, noisy: bool) -> Finding:
    before, after = _number(one.value), _number(other.value)
    scale = max(abs(before), abs(after))
    if one.verdict == other.verdict and (
        (math.isnan(before) and math.isnan(after))
        or before == after
        or abs(change) <= NEGLIGIBLE * scale
    ):
        return "same"
    if noisy:
        return "not judged"  # one run of each cannot tell
    if math.isnan(change) or (other.verdict == "fails" and one.verdict == "holds"):
        return "differs"
    return "within tolerance" if abs(change) <= allowed else "differs"


def _number(value: float | None) -> float:
    return math.nan if value is None else value


def _less(one: float, other: float) -> float:
    """Return a difference, zero between equal infinities."""
    return 0.0 if one == other else one - other
