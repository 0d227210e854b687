"""The share of runs that pass, with its interval."""

from __future__ import annotations

import math
from bisect import bisect_right
from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

from frontend_sim.errors import MeasureError

BISECTIONS: Final = 60
"""Halvings of [0, 1]: beyond the last bit of a share of one half."""


@dataclass(frozen=True)
class PassRate:
    """How many runs passed, and where the true share lies.

    Parameters
    ----------
    passed, total : counts of runs
    low, high : interval of the true share [1]
    confidence : share of such intervals that contain it [1]
    method : ``blaker``, ``mid-p``, ``exact`` or ``wilson``
    """

    passed: int
    total: int
    low: float
    high: float
    confidence: float
    method: str

    @property
    def rate(self) -> float:
        """Share of runs that passed [1]."""
        return self.passed / self.total

    @property
    def width(self) -> float:
        """Width of the interval [1]."""
        return self.high - self.low


def pass_rate(
    passed: int, total: int, confidence: float = 0.95, method: str = "blaker"
) -> PassRate:
    """Return the yield of a night with its two-sided interval.

    ``blaker`` (Blaker 2000, "Confidence curves and improved exact confidence intervals for
    discrete distributions") never covers less than it says, and lies within ``exact``: of all true
    shares with ten failures or more to be expected its 95 % intervals contain 95 to 97 %, and of
    the others at least 95 %. ``exact`` (Clopper and Pearson 1934) does not cover less either, and
    more than it need: 99 % of nights of 100 runs with a yield of 97 %. ``mid-p`` (Lancaster 1961,
    "Significance tests in discrete distributions") counts half of the probability of what was seen
    to either side; it is nearer to 95 % on average, and falls to 91.7 % where fewer than ten
    failures are to be expected. ``wilson`` (Wilson 1927) is as close in the middle and falls to
    84 % near a yield of 1, where nights should be.

    Parameters
    ----------
    passed, total : counts of runs
    confidence : share of intervals that shall contain the true share [1]
    method : one of the four

    Raises
    ------
    MeasureError
        If there is no run, more passed than ran, or confidence is no share between 0 and 1.
    """
    _refuse(passed, total, confidence)
    if method not in _LOWER:
        raise MeasureError(f"no interval {method!r}; known are {', '.join(_LOWER)}")
    lower = _LOWER[method]
    low = lower(passed, total, confidence)
    # What fails is as much a share as what passes.
    high = 1.0 - lower(total - passed, total, confidence)
    return PassRate(passed, total, low, high, confidence, method)


def _refuse(passed: int, total: int, confidence: float) -> None:
    if total < 1 or not 0 <= passed <= total:
        raise MeasureError(f"{passed} of {total} runs cannot pass; a yield needs a run")
    refuse_no_share(confidence, "confidence")


def refuse_no_share(value: float, name: str) -> None:
    """Raise MeasureError unless a value lies between 0 and 1, both excluded."""
    if not 0.0 < value < 1.0:
        raise MeasureError(f"{name} is {value:g}; it is a share between 0 and 1, such as 0.95")


def _exact(passed: int, total: int, confidence: float) -> float:
    """Solve P(X >= passed) = (1 - confidence) / 2 for the share."""
    from scipy.special import betaincinv

    if passed == 0:
        return 0.0
    return float(betaincinv(passed, total - passed + 1, 0.5 * (1.0 - confidence)))


def _blaker(passed: int, total: int, confidence: float) -> float:
    """Return the smallest share that what was seen does not speak against.

    Against a share speaks the probability of its tail, P(X >= passed), and of as much of the other
    tail as is no more probable: P(X <= other) with the largest such ``other``. Where a share grows,
    the sum falls only between the shares at which ``other`` does; below the end of the exact
    interval it is twice the tail at most, less than what is asked for, so that the first such
    share from there on, or where the sum rises to it before, is the end.
    """
    from scipy.special import bdtr, bdtrc

    if passed == 0:
        return 0.0
    aim = 1.0 - confidence

    def tail(share: float) -> float:
        return float(bdtrc(passed - 1, total, share))

    def opposite(most: int, share: float) -> float:
        return float(bdtr(most, total, share)) if most >= 0 else 0.0

    start = _exact(passed, total, confidence)
    other = bisect_right(range(passed), 0.5 * aim, key=lambda most: opposite(most, start)) - 1
    grows = _first(lambda share: tail(share) >= opposite(other + 1, share), start, 1.0)
    return _first(lambda share: tail(share) + opposite(other, share) >= aim, start, grows)


def _mid_p(passed: int, total: int, confidence: float) -> float:
    """Solve P(X > passed) + P(X = passed) / 2 = (1 - confidence) / 2 for the share."""
    from scipy.special import bdtrc

    if passed == 0:
        return 0.0
    aim = 0.5 * (1.0 - confidence)

    def reached(share: float) -> bool:
        above = float(bdtrc(passed, total, share)) if passed < total else 0.0
        return 0.5 * (above + float(bdtrc(passed - 1, total, share))) >= aim

    return _first(reached, 0.0, 1.0)


def _first(reached: Callable[[float], bool], low: float, high: float) -> float:
    """Return where something is first true that is so at ``high`` and from there down to it."""
    for _ in range(BISECTIONS):
        share = 0.5 * (low + high)
        if reached(share):
            high = share
        else:
            low = share
    return high


def _wilson(passed: int, total: int, confidence: float) -> float:
    """Solve |rate - share| = z sqrt(share (1 - share) / total) for the smaller share."""
    from scipy.special import ndtri

    if passed == 0:
        return 0.0
    z2 = float(ndtri(0.5 + 0.5 * confidence)) ** 2
    rate = passed / total
    middle = rate + 0.5 * z2 / total
    half = math.sqrt(z2) * math.sqrt(rate * (1.0 - rate) / total + 0.25 * z2 / total**2)
    return (middle - half) / (1.0 + z2 / total)


_LOWER: Final[dict[str, Callable[[int, int, float], float]]] = {
    "blaker": _blaker,
    "mid-p": _mid_p,
    "exact": _exact,
    "wilson": _wilson,
}
