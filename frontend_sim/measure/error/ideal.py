"""The ideal from which the total error counts: a straight line from the quantity to volts."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Self

import numpy as np

from frontend_sim.analog.chain import Chain, chain_of
from frontend_sim.analog.stages.curved_sensor import CurvedSensor
from frontend_sim.errors import MeasureError, ModelError
from frontend_sim.measure.arrays import finite
from frontend_sim.quantities import REFERENCE_TEMPERATURE
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.spread import stages_at

if TYPE_CHECKING:
    from frontend_sim.analog.stages.base import Stage

VOLT = "V"


@dataclass(frozen=True)
class Ideal:
    """What firmware takes a voltage at the converter to mean: quantity = (voltage - offset) / gain.

    Parameters
    ----------
    gain : volts at the pin for one unit of the quantity [V per unit]
    offset : voltage at the pin for a quantity of zero [V]
    unit : SI unit of the quantity
    """

    gain: float
    offset: float
    unit: str

    @classmethod
    def of(cls, scenario: Scenario, gain: float | None = None, offset: float | None = None) -> Self:
        """Take the line that is given, and what is left out from the chain's nominal parts.

        The gain is that at zero frequency; of a sensor with a curve, that of its tangent. The
        offset is zero for a chain that takes volts, where every constant is an error, and what the
        nominal chain adds for a sensor, whose line firmware knows.

        Raises
        ------
        MeasureError
            If the chain has no gain at zero frequency, and none is given; or what is given is no
            number, or a gain of zero.
        """
        stages = stages_at(scenario.chain, REFERENCE_TEMPERATURE)
        nominal = chain_of(stages, REFERENCE_TEMPERATURE)
        found = dc_gain(nominal) if gain is None else finite(gain, "the gain")
        if gain is None and not 0.0 < abs(found) < math.inf:
            raise MeasureError(
                f"the gain of the chain at zero frequency is {found:g}, so no code stands for a "
                "value of the quantity; give gain, that of the pass band"
            )
        if found == 0.0:
            raise MeasureError("a gain of 0 makes no quantity of a voltage; leave it out")
        unit = scenario.stimulus_unit
        if offset is None:
            offset = 0.0 if unit == VOLT else constant_of(nominal, stages)
        return cls(found, finite(offset, "the offset"), unit)


def dc_gain(chain: Chain, point: int = -1) -> float:
    """Return the gain at zero frequency up to a point, infinite for an integrator [V per unit]."""
    try:
        states = chain.settled(1.0)
    except ModelError:
        return math.inf
    return float(np.dot(chain.c[point], states) + chain.d[point])


def constant_of(chain: Chain, stages: Sequence[Stage]) -> float:
    """Return what the straight line of a chain adds at the pin for a quantity of zero [V].

    Offsets of the stages, and of a sensor with a curve where its tangent meets zero.
    """
    constant, whole = float(chain.offset[-1]), dc_gain(chain)
    for place, stage in enumerate(stages, start=1):
        if isinstance(stage, CurvedSensor):
            at = stage.operating_point()
            meets = float(stage.output(np.array([at]))[0]) - stage.slope() * at
            there = dc_gain(chain, place)
            if math.isfinite(whole) and there:
                constant += meets * whole / there
    return constant
