"""Draws are added block by block until what they say is tight."""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.statistics import pass_rate, stability, tight_enough
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.runs import PlannedRun, PreparedSet
from frontend_sim.replay.set_model import Until
from frontend_sim.replay.spread import DrawSpread, Spread

Done = Iterator[tuple[PlannedRun, Outcome]]

DRAW = "draw "
"""What the last part of a draw's name begins with."""


def until_of(prepared: PreparedSet) -> Until | None:
    """Return what a set draws until, None where it draws all that it may."""
    spreads = (spread for base in prepared.bases for spread in base.spreads)
    drawn = (spread for spread in spreads if isinstance(spread, DrawSpread))
    return next((spread.draws.until for spread in drawn if spread.draws.until), None)


def stretches(prepared: PreparedSet) -> Iterator[PreparedSet]:
    """Return a set with more and more of its draws: a block, two blocks, ..., all.

    A draw is the same whatever the number of draws, so that each holds all of the one before.
    """
    until = until_of(prepared)
    if until is not None:
        for count in range(until.block, _count(prepared), until.block):
            yield _limited(prepared, count)
    yield prepared


def tight(done: Done, until: Until) -> bool:
    """Return whether the draws of a set say enough.

    That is so if, in every group of draws, the interval of the yield is as narrow as asked for,
    and the values of every check have stabilized (JCGM 101:2008, 7.9; ``statistics.stability``).

    Parameters
    ----------
    done : runs and what they gave, in the order of the set
    """
    held: dict[str, Counter[bool]] = defaultdict(Counter)
    values: dict[tuple[str, str], list[float]] = defaultdict(list)
    for run, outcome in done:
        group, _, last = run.name.rpartition(",")
        if not last.startswith(DRAW):
            continue
        if outcome.verdict != "none":
            held[group][outcome.verdict == "holds"] += 1
        for result in outcome.results:
            if result.verdict != "none":
                value = np.nan if result.value is None else result.value
                values[group, result.name].append(value)
    width = until.yield_width
    if width is not None and not (held and all(_narrow(one, width) for one in held.values())):
        return False
    digits = until.digits
    return digits is None or all(_stable(row, digits, until.block) for row in values.values())


def _narrow(held: Counter[bool], width: float) -> bool:
    total = held.total()
    return total > 0 and tight_enough(pass_rate(held[True], total), width)


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


def _count(prepared: PreparedSet) -> int:
    """Return how many draws each circuit may have."""
    spreads = (spread for base in prepared.bases for spread in base.spreads)
    counts = [spread.count for spread in spreads if isinstance(spread, DrawSpread)]
    return max(counts, default=0)


def _limited(prepared: PreparedSet, count: int) -> PreparedSet:
    """Return a set with no more than so many draws of each circuit."""
    bases = tuple(
        replace(base, spreads=tuple(_fewer(spread, count) for spread in base.spreads))
        for base in prepared.bases
    )
    return replace(prepared, bases=bases)


def _fewer(spread: Spread, count: int) -> Spread:
    if not isinstance(spread, DrawSpread) or spread.count <= count:
        return spread
    return replace(spread, draws=spread.draws.model_copy(update={"count": count}))
