"""A chain cut where something in it is not linear."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Self

from frontend_sim.analog.block import Real
from frontend_sim.analog.chain import Chain, Section, compose, section
from frontend_sim.analog.limits import Limiter
from frontend_sim.analog.stages.base import Stage
from frontend_sim.errors import ModelError


@dataclass(frozen=True, eq=False)
class Place:
    """Where a limiter stands: in place of the chain from one of its points to another.

    Parameters
    ----------
    name : of its stage
    entry : number of the point that is the limiter's input
    exit : number of the point where its deviation is added, which is the linear model's output
    gain : from entry to exit, where no state lies between them; else None
    jumps : whether a jump of the stimulus is a jump at the entry
    """

    limiter: Limiter
    name: str
    entry: int
    exit: int
    gain: float | None
    jumps: bool

    def probed(self) -> tuple[int, ...]:
        """Return the points whose values the limiter needs."""
        return (self.entry,) if self.gain is not None else (self.entry, self.exit)

    def both(self, values: Real) -> tuple[Real, Real]:
        """Return its input u and the linear answer v from the probed points' values."""
        return values[0], values[1] if self.gain is None else self.gain * values[0]


@dataclass(frozen=True, eq=False)
class CutChain:
    """The linear model of a chain, with a point before and behind each limiter.

    The matrices are those of the chain that is not cut; there are more points, and no noise.

    Parameters
    ----------
    points : for each point of the chain that is not cut, its number in the cut one
    """

    chain: Chain
    places: tuple[Place, ...]
    points: tuple[int, ...]

    @classmethod
    def of(cls, stages: Sequence[Stage]) -> Self:
        """Cut a chain of stages.

        Raises
        ------
        ModelError
            If a stage is unstable, or its limits cannot be put on its blocks.
        """
        sections: list[Section] = []
        places: list[Place] = []
        points, passes = [0], True
        for position, stage in enumerate(stages, start=1):
            whole = section(stage, stage.label(position))
            limiter = _limiter(stage, whole.name)
            parts = [_part(whole, 0, len(whole.blocks))]
            if limiter is not None:
                at = limiter.replaced
                bounds = (0, at.start, at.stop, len(whole.blocks))
                parts = [_part(whole, *ends) for ends in pairwise(bounds)]
                entry = len(sections) + 1
                passes = passes and _feeds(parts[0])
                gain = _gain(parts[1])
                places.append(Place(limiter, whole.name, entry, entry + 1, gain, passes))
                # A gain passes jumps on, one of zero too: the limiter may make its own of them.
                passes = passes and gain is not None and _feeds(parts[2])
            else:
                passes = passes and _feeds(parts[0])
            parts[-1] = Section(whole.name, parts[-1].blocks, whole.delay)
            sections += parts
            points.append(len(sections))
        return cls(compose(sections), tuple(places), tuple(points))

    def behind(self, place: Place) -> Chain:
        """Return the chain behind a limiter; its point 0 is the limiter's output."""
        return compose(self.chain.sections[place.exit :])


def _limiter(stage: Stage, name: str) -> Limiter | None:
    try:
        return stage.limiter()
    except ModelError as error:
        raise ModelError(f"stage {name!r}: {error}") from error


def _part(whole: Section, start: int, stop: int) -> Section:
    return Section(whole.name, whole.blocks[start:stop], 0.0)


def _feeds(part: Section) -> bool:
    return all(block.d != 0.0 for block in part.blocks)


def _gain(part: Section) -> float | None:
    if any(block.order for block in part.blocks):
        return None
    return math.prod(block.d for block in part.blocks)
