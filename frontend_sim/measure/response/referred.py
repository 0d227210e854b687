"""What a chain makes of its stimulus, in the unit that the file has for it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Self

from frontend_sim.converter import AnyAdc
from frontend_sim.measure.noise_budget import NoiseBudget
from frontend_sim.measure.response.pin_level import PinLevel
from frontend_sim.measure.response.time_domain import TimeDomain, filling_gain
from frontend_sim.quantities import SignalUnit


@dataclass(frozen=True)
class Referred:
    """Range, LSB and noise as the stimulus that would make them.

    Parameters
    ----------
    unit : of all that follows; levels count from its zero
    gain : of a step, see ``filling_gain``; None where there is none [V per unit]
    full_scale_step, lsb : differences of the stimulus; ``lsb`` is None without a gain
    noise : rms of all sources together; None where that is not known, or without a gain
    zero, at_low, at_high : levels of ``PinLevel``
    """

    unit: SignalUnit
    gain: float | None
    full_scale_step: float
    lsb: float | None
    noise: float | None
    zero: float
    at_low: float | None
    at_high: float | None

    @classmethod
    def of(
        cls,
        unit: SignalUnit,
        adc: AnyAdc,
        time: TimeDomain,
        largest: float,
        level: PinLevel,
        noise: NoiseBudget | None,
    ) -> Self:
        """Bring the numbers of an inspection into a unit.

        Parameters
        ----------
        largest : gain of the chain over all frequencies [V per SI unit]
        """
        gain = filling_gain(time.end, largest)

        def level_in(value: float | None) -> float | None:
            return None if value is None else unit.number(value)

        def difference(volts: float | None) -> float | None:
            if volts is None or gain is None:
                return None
            return unit.number_of_difference(volts / gain)

        return cls(
            unit,
            None if gain is None else gain * unit.size,
            unit.number_of_difference(time.full_scale_step),
            difference(adc.lsb),
            difference(None if noise is None else noise.rms),
            unit.number(level.zero),
            level_in(level.at_low),
            level_in(level.at_high),
        )
