"""What the sections of a network do to each other, against the same sections with buffers."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from frontend_sim.analog.chain import compose
from frontend_sim.analog.section import Section
from frontend_sim.analog.stages.base import Stage
from frontend_sim.measure.response.frequency_domain import FrequencyDomain
from frontend_sim.measure.response.gain import Corner
from frontend_sim.measure.response.step_response import StepResponse


@dataclass(frozen=True)
class Loading:
    """One network as it is, and as the product of its sections with buffers between them.

    Parameters
    ----------
    stage : its name
    end, buffered_end : response to a step of one in the end, None where it rings for ever [1]
    corners, buffered_corners : -3 dB corners of both
    """

    stage: str
    end: float | None
    buffered_end: float | None
    corners: tuple[Corner, ...]
    buffered_corners: tuple[Corner, ...]


def loading_of(stages: Sequence[Stage], rate: float) -> tuple[Loading, ...]:
    """Return what loading does in every stage that has sections without buffers.

    Parameters
    ----------
    rate : conversion rate, for the measures [Hz]
    """
    found = []
    for position, stage in enumerate(stages, start=1):
        buffered = stage.buffered()
        if buffered is None or len(buffered) < 2:
            continue
        name = stage.label(position)
        own, loose = (
            StepResponse.of(compose([Section(name, blocks, 0.0)]))
            for blocks in (stage.blocks(), buffered)
        )
        corners, others = (FrequencyDomain.of(each, rate).corners for each in (own, loose))
        found.append(Loading(name, own.end, loose.end, corners, others))
    return tuple(found)
