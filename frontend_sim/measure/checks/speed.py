"""What becomes of a chain whose stages are made faster, one at a time."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace

from frontend_sim.analog.block import Block
from frontend_sim.analog.chain import Chain, compose

SMALL = 1e-3
"""A stage is made faster by this share to see what comes of it."""


@dataclass(frozen=True)
class Lever:
    """The stage whose speed moves a number most.

    Parameters
    ----------
    stage : its name
    power : the number goes with the speed of the stage to this power
    """

    stage: str
    power: float

    def factor(self, ratio: float) -> float:
        """Return how many times as fast the stage must be for a number of ``ratio`` times it."""
        exponent = math.log(ratio) / self.power
        return math.exp(min(max(exponent, -50.0), 50.0))


def faster(chain: Chain, stage: int, factor: float) -> Chain:
    """Return a chain with all poles and zeros of one section moved out by a factor.

    The stage goes through the same course in less time: its gain at zero frequency stays.
    """
    sections = list(chain.sections)
    blocks = tuple(
        Block.of(factor * block.a, factor * block.b, block.c, block.d)
        for block in sections[stage].blocks
    )
    sections[stage] = replace(sections[stage], blocks=blocks)
    return compose(sections)


def strongest_lever(chain: Chain, measured: Callable[[Chain], float]) -> Lever | None:
    """Return the stage whose speed moves a number most, by its logarithmic derivative.

    Parameters
    ----------
    measured : the number, above zero, as a function of the chain

    Returns
    -------
    None where no stage has a part in it.
    """
    value = measured(chain)
    if not 0.0 < value < math.inf:
        return None
    levers = []
    for number, section in enumerate(chain.sections):
        if not any(block.order for block in section.blocks):
            continue
        changed = measured(faster(chain, number, 1.0 + SMALL))
        if 0.0 < changed < math.inf:
            power = math.log(changed / value) / math.log1p(SMALL)
            levers.append(Lever(section.name, power))
    best = max(levers, key=lambda lever: abs(lever.power), default=None)
    return best if best is not None and abs(best.power) > SMALL else None
