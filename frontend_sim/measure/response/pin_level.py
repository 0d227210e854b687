"""What the pin rests at, and which stimulus takes it to the ends of the converter's range."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.analog.stages.base import Stage
from frontend_sim.analog.stages.curved_sensor import CurvedSensor
from frontend_sim.converter import AnyAdc

NEAR = 1e-9
"""A level that lies beyond a rail by this share of itself is at the rail."""


@dataclass(frozen=True)
class PinLevel:
    """The constant part of the pin's voltage, and the range in units of the stimulus.

    Parameters
    ----------
    zero : stimulus for which the pin is told: 0, or 0 degC of a temperature [SI unit]
    offset : pin at that stimulus, at rest: what references, offset voltages and bias currents
        add; None where a sensor does not reach so far [V]
    lsb : the same, from the voltage 0 [LSB]
    spread : how far offset voltages and bias currents of the sizes given, but of either sign, can
        move it to either side [V]
    at_low, at_high : stimulus, at rest, for which the pin reaches ``low`` and ``high`` of the
        converter; None where none does, or a constant does not reach the pin [SI unit]
    low_held, high_held : name of the stage whose rail or clamp keeps the pin from there, the first
        one that a stimulus meets on its way from ``zero``, else ""
    """

    zero: float
    offset: float | None
    lsb: float | None
    spread: float
    at_low: float | None
    at_high: float | None
    low_held: str = ""
    high_held: str = ""

    @classmethod
    def of(
        cls, chain: Chain, stages: Sequence[Stage], adc: AnyAdc, temperature: float, zero: float
    ) -> Self:
        """Work the levels out.

        Parameters
        ----------
        stages : of the chain;  temperature : of the circuit [K]
        zero : stimulus for which the pin is told [SI unit]
        """
        way = _Way(tuple(stages), tuple(_gains(chain)), tuple(p.offset for p in chain.sections))
        offset = way.pin(zero)
        lsb = None if offset is None else offset / adc.lsb
        low, high = way.stimulus(adc.low), way.stimulus(adc.high)
        held = ("" if end is None else way.held(zero, end) for end in (low, high))
        return cls(zero, offset, lsb, way.spread(temperature), low, high, *held)


@dataclass(frozen=True)
class _Way:
    """A chain at rest: its stages, their gains and what each adds to its output."""

    stages: tuple[Stage, ...]
    gains: tuple[float, ...]
    offsets: tuple[float, ...]

    def pin(self, stimulus: float) -> float | None:
        """Return the pin for a stimulus at rest [V]; None where a sensor does not reach so far."""
        level = stimulus
        for level in self.levels(stimulus):
            if not math.isfinite(level):
                return None
        return level

    def levels(self, stimulus: float) -> Iterator[float]:
        """Yield what every stage gives for a stimulus at rest, up to a nan where one gives none."""
        level = stimulus
        for stage, gain, offset in zip(self.stages, self.gains, self.offsets, strict=True):
            if isinstance(stage, CurvedSensor):
                low, high = stage.ends()
                within = low <= level <= high
                level = float(stage.output(np.array(level))) if within else math.nan
            elif level == 0.0:
                level = offset
            else:
                level = gain * level + offset
            yield level

    def held(self, start: float, end: float) -> str:
        """Return the stage whose rail or clamp a stimulus first meets as it goes from one level
        at rest to another, "" if it meets none.
        """
        first, name = math.inf, ""
        ends = zip(self.levels(start), self.levels(end), strict=True)
        for number, (before, level) in enumerate(ends, start=1):
            stage, near = self.stages[number - 1], NEAR * abs(level)
            low, high = stage.rails()
            if low - near <= level <= high + near:
                continue
            # Stages behind a sensor's curve follow it by a gain, so shares of their ways compare.
            rail, way = low if level < low else high, level - before
            share = (rail - before) / way if way and math.isfinite(way) else -math.inf
            if share < first:
                first, name = share, stage.label(number)
        return name

    def stimulus(self, level: float) -> float | None:
        """Return the stimulus at rest that takes the pin to a level [V]; None if none does."""
        curve = next((n for n, s in enumerate(self.stages) if isinstance(s, CurvedSensor)), None)
        gain = math.prod(self.gains)
        if not 0.0 < abs(gain) < math.inf:
            return None
        if curve is None:
            zero = self.pin(0.0)
            return None if zero is None else (level - zero) / gain
        return self._through_curve(level, curve)

    def _through_curve(self, level: float, curve: int) -> float | None:
        from scipy.optimize import brentq

        sensor, before = self.stages[curve], math.prod(self.gains[:curve])
        assert isinstance(sensor, CurvedSensor)
        # A hair inside the ends, which rounding of the gains before would leave otherwise.
        low, high = (end / before for end in sensor.ends())
        low, high = low + 1e-12 * (high - low), high - 1e-12 * (high - low)

        def beyond(stimulus: float) -> float:
            pin = self.pin(stimulus)
            return math.nan if pin is None else pin - level

        if not beyond(low) * beyond(high) < 0.0:
            return None
        return float(brentq(beyond, low, high, xtol=1e-12, rtol=1e-14))

    def spread(self, temperature: float) -> float:
        """Return by how much causes of either sign move the pin to either side [V]."""
        total = 0.0
        for number, stage in enumerate(self.stages, start=1):
            size = stage.offset_spread(temperature)
            if size:
                total += abs(size * math.prod(self.gains[number:]))
        return total


def _gains(chain: Chain) -> list[float]:
    """Return the gain of each stage at rest, infinite with a pole at the origin."""
    gains, zero = [], np.zeros(1, dtype=np.complex128)
    for part in chain.sections:
        drifts = any(np.any(block.poles == 0.0) for block in part.blocks)
        found = (float(block.response(zero)[0].real) for block in part.blocks)
        gains.append(math.inf if drifts else math.prod(found))
    return gains
