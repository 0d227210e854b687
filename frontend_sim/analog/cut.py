"""A chain cut where something in it is not linear."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import Self

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.chain import Chain, compose
from frontend_sim.analog.limits import Limiter
from frontend_sim.analog.section import Section
from frontend_sim.analog.stages.base import Stage
from frontend_sim.errors import ModelError
from frontend_sim.quantities import REFERENCE_TEMPERATURE


@dataclass(frozen=True, eq=False)
class Place:
    """Where a limiter stands: in place of the chain from one of its points to another.

    Parameters
    ----------
    name : of its stage
    entry : number of the point that is the limiter's input
    exit : number of the point where its deviation is added, which is the linear model's output
    gain : from entry to exit, where no state lies between them; else None
    shift : what the limiter's input has to be raised by to count the offset of its own stage in
    jumps : whether a jump of the stimulus is a jump at the entry
    """

    limiter: Limiter
    name: str
    entry: int
    exit: int
    gain: float | None
    shift: float
    jumps: bool

    def probed(self) -> tuple[int, ...]:
        """Return the points whose values the limiter needs."""
        return (self.entry,) if self.gain is not None else (self.entry, self.exit)

    def both(self, values: Real) -> tuple[Real, Real]:
        """Return its input u and the linear answer v from the probed points' values."""
        u = values[0] + self.shift if self.shift else values[0]
        return u, values[1] if self.gain is None else self.gain * u


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
    def of(cls, stages: Sequence[Stage], temperature: float = REFERENCE_TEMPERATURE) -> Self:
        """Cut a chain of stages at a temperature [K].

        Raises
        ------
        ModelError
            If a stage is unstable, or its limits cannot be put on its blocks.
        """
        sections: list[Section] = []
        places: list[Place] = []
        points, passes = [0], True
        for position, stage in enumerate(stages, start=1):
            whole = Section.of(stage, stage.label(position), temperature)
            limiter = _limiter(stage, whole.name, temperature)
            if limiter is None:
                sections.append(replace(whole, noise=()))
                passes = passes and _feeds(whole)
            else:
                before, replaced, after = _parts(whole, limiter)
                sections += [before, replaced, after]
                entry = len(sections) - 2
                passes = passes and _feeds(before)
                gain, shift = _gain(replaced), 0.0 if limiter.raised else _shift(replaced)
                place = Place(limiter, whole.name, entry, entry + 1, gain, shift, passes)
                places.append(place)
                # A gain passes jumps on, one of zero too: the limiter may make its own of them.
                passes = passes and (gain is not None or _feeds(replaced)) and _feeds(after)
            points.append(len(sections))
        return cls(compose(sections), tuple(places), tuple(points))

    def behind(self, place: Place) -> Chain:
        """Return the chain behind a limiter; its point 0 is the limiter's output."""
        return compose([replace(part, offset=0.0) for part in self.chain.sections[place.exit :]])


def is_cut(stages: Sequence[Stage], temperature: float = REFERENCE_TEMPERATURE) -> bool:
    """Return whether anything in a chain of stages limits. Raises as ``CutChain.of`` does."""
    labelled = [(stage, stage.label(position)) for position, stage in enumerate(stages, start=1)]
    return any(_limiter(stage, name, temperature) is not None for stage, name in labelled)


def _limiter(stage: Stage, name: str, temperature: float) -> Limiter | None:
    try:
        return stage.limiter(temperature)
    except ModelError as error:
        raise ModelError(f"stage {name!r}: {error}") from error


def _parts(whole: Section, limiter: Limiter) -> tuple[Section, Section, Section]:
    """Return the section's blocks before, in place of and behind a limiter.

    The offset of a stage is one of its amplifier's, so the limiter has it, if the stage ends there.
    """
    at = limiter.replaced
    ends = pairwise((0, at.start, at.stop, len(whole.blocks)))
    before, replaced, after = (Section(whole.name, whole.blocks[a:b], 0.0) for a, b in ends)
    if after.blocks:
        return before, replaced, replace(after, delay=whole.delay, offset=whole.offset)
    return before, replace(replaced, offset=whole.offset), replace(after, delay=whole.delay)


def _feeds(part: Section) -> bool:
    return all(block.d != 0.0 for block in part.blocks)


def _gain(part: Section) -> float | None:
    if any(block.order for block in part.blocks):
        return None
    return math.prod(block.d for block in part.blocks)


def _shift(part: Section) -> float:
    """Return what the offset of a section is at its input, through its gain at rest."""
    if part.offset == 0.0:
        return 0.0
    zero = np.zeros(1, dtype=np.complex128)
    gain = math.prod(float(block.response(zero)[0].real) for block in part.blocks)
    if gain == 0.0:
        raise ModelError(
            f"stage {part.name!r} has an offset and limits, but no gain at rest; its offset cannot "
            "be told at its input"
        )
    return part.offset / gain
