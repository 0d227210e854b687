"""The ideal from which the total error counts: a line or a sensor's curve, quantity to volts."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Self

import numpy as np

from frontend_sim.analog.chain import Chain, chain_of
from frontend_sim.analog.stages.curved_sensor import CurvedSensor
from frontend_sim.errors import MeasureError, ModelError
from frontend_sim.measure.arrays import Real, finite
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
    curve : what the quantity is read by instead of the line, None for the line
    """

    gain: float
    offset: float
    unit: str
    curve: Curve | None = None

    @classmethod
    def of(
        cls,
        scenario: Scenario,
        gain: float | None = None,
        offset: float | None = None,
        curve: bool = False,
    ) -> Self:
        """Take the line that is given, and what is left out from the chain's nominal parts.

        The gain is that at zero frequency; of a sensor with a curve, that of its tangent. The
        offset is zero for a chain that takes volts, where every constant is an error, and what the
        nominal chain adds for a sensor, whose line firmware knows.

        Raises
        ------
        MeasureError
            If the chain has no gain at zero frequency, and none is given; or what is given is no
            number, or a gain of zero; or a curve is asked for and no sensor has one, or a line is
            given besides.
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
        if curve and (gain is not None or offset is not None):
            raise MeasureError(
                "the curve of the sensor and a line of gain and offset exclude each other; leave "
                'gain and offset out, or take reads = "line"'
            )
        if offset is None:
            offset = 0.0 if unit == VOLT else constant_of(nominal, stages)
        bends = Curve.of(nominal, stages) if curve else None
        return cls(found, finite(offset, "the offset"), unit, bends)

    def volts(self, quantity: Real) -> Real:
        """Return what stands for a quantity at the pin, shape of its own [V]."""
        line = self.gain * quantity + self.offset
        return line if self.curve is None else line + self.curve.beyond(quantity)


@dataclass(frozen=True, eq=False)
class Curve:
    """How the nominal curve of a sensor bends away from its tangent, at the pin.

    Parameters
    ----------
    sensor : with its nominal parts
    before : gain from the stimulus to the sensor [1]
    after : gain from the sensor to the pin [V per unit of the sensor's output]
    """

    sensor: CurvedSensor
    before: float
    after: float

    @classmethod
    def of(cls, chain: Chain, stages: Sequence[Stage]) -> Self:
        """Take the sensor of a chain.

        Raises
        ------
        MeasureError
            If no stage has a curve, or the chain passes no constant on.
        """
        for place, stage in enumerate(stages, start=1):
            there = dc_gain(chain, place)
            if isinstance(stage, CurvedSensor) and there and math.isfinite(dc_gain(chain)):
                return cls(stage, dc_gain(chain, place - 1), dc_gain(chain) / there)
        raise MeasureError(
            "no sensor of the chain has a curve, so there is none to read by; take the line, "
            'reads = "line"'
        )

    def beyond(self, quantity: Real) -> Real:
        """Return the curve less its tangent, at the pin, shape of the quantity's [V]."""
        sensor, at = self.sensor, self.sensor.operating_point()
        signal = self.before * quantity
        tangent = sensor.output(np.array([at]))[0] + sensor.slope() * (signal - at)
        return np.asarray(self.after * (sensor.output(signal) - tangent))


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
