"""Draws are added block by block until what they say is tight."""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Iterable, Iterator
from dataclasses import replace

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.statistics import pass_rate, stability, tight_enough
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.runs import PlannedRun, PreparedSet
from frontend_sim.replay.set_model import Until
from frontend_sim.replay.spread import DrawSpread

DRAW = "draw "
"""What the last part of a draw's name begins with."""


def until_of(prepared: PreparedSet) -> Until | None:
    """Return what a set draws until, None where it draws all that it may."""
    return next((each.draws.until for each in _draws(prepared) if each.draws.until), None)


def blocks(prepared: PreparedSet) -> Iterator[tuple[PreparedSet, PreparedSet]]:
    """Return a set with more and more of its draws, and what of it is new: block after block.

    A draw is the same whatever the number of draws, so that each holds all of the one before.
    """
    until = until_of(prepared)
    if until is None:
        yield prepared, prepared
        return
    most = max(spread.draws.count for spread in _draws(prepared))
    for first in range(0, most, until.block):
        whole = _limited(prepared, min(first + until.block, most))
        yield whole, whole if first == 0 else _from(whole, first)


class Tightness:
    """Whether the draws of a set say enough; they come in block by block.

    They do if, in every group of draws, the interval of the yield is as narrow as asked for, and
    the values of every check have stabilized (JCGM 101:2008, 7.9; ``statistics.stability``).
    """

    def __init__(self, until: Until) -> None:
        """Begin with no draw."""
        self._until = until
        self._held: dict[str, Counter[bool]] = defaultdict(Counter)
        self._values: dict[tuple[str, str], list[float]] = defaultdict(list)

    def reached_with(self, done: Iterable[tuple[PlannedRun, Outcome]]) -> bool:
        """Return whether no more draws are needed, with another block in the order of the set."""
        for run, outcome in done:
            group, _, last = run.name.rpartition(",")
            if not last.startswith(DRAW):
                continue
            if outcome.verdict != "none":
                self._held[group][outcome.verdict == "holds"] += 1
            for result in outcome.results:
                if result.verdict != "none":
                    value = np.nan if result.value is None else result.value
                    self._values[group, result.name].append(value)
        width, digits = self._until.yield_width, self._until.digits
        held, block = self._held.values(), self._until.block
        if width is not None and not (held and all(_narrow(one, width) for one in held)):
            return False
        return digits is None or all(_stable(row, digits, block) for row in self._values.values())


def _narrow(held: Counter[bool], width: float) -> bool:
    return tight_enough(pass_rate(held[True], held.total()), width)


def _stable(values: list[float], digits: int, block: int) -> bool:
    """Return whether one check has stabilized; what has no finite value never does."""
    count = len(values) // block
    if count == 0:
        return False
    rows = np.array(values[: count * block]).reshape(count, block)
    try:
        return stability(list(rows), digits).tight
    except MeasureError:
        return False


def _draws(prepared: PreparedSet) -> list[DrawSpread]:
    spreads = (spread for base in prepared.bases for spread in base.spreads)
    return [spread for spread in spreads if isinstance(spread, DrawSpread)]


def _limited(prepared: PreparedSet, count: int) -> PreparedSet:
    """Return a set with no more than so many draws of each circuit."""
    bases = tuple(
        replace(
            base,
            spreads=tuple(
                spread.limited(count) if isinstance(spread, DrawSpread) else spread
                for spread in base.spreads
            ),
        )
        for base in prepared.bases
    )
    return replace(prepared, bases=bases)


def _from(prepared: PreparedSet, first: int) -> PreparedSet:
    """Return the draws of a set behind the first ones, and nothing else of it."""
    bases = []
    for base in prepared.bases:
        drawn = [each for each in base.spreads if isinstance(each, DrawSpread)]
        if drawn:
            bases.append(replace(base, spreads=tuple(replace(each, first=first) for each in drawn)))
    return replace(prepared, bases=tuple(bases))
