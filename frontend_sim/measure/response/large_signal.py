"""What slew rates leave of signals that fill the converter's range."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.analog.stages.base import Stage
from frontend_sim.converter import Adc
from frontend_sim.errors import FrontendSimError
from frontend_sim.measure.response.pin_level import PinLevel
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.settings import SimulationSettings
from frontend_sim.stimulus.step import Step

POINTS = 2000
"""Instants at which the response to a large step is looked at, twice: all of it, then its end."""

FINER = 32
"""Points of the limiters' grid for each of these instants. Left to itself, the grid of a run would
follow every fast pole before a limiter, for as long as a slow filter behind it takes to settle."""

DOUBLINGS = 4
"""How often the time to look is doubled until a step has settled."""

MARGIN = 1e-3
"""The large step stays so far inside both ends of the range, as a share of it: at a rail that
lies at an end it would otherwise rest."""


@dataclass(frozen=True)
class FullPower:
    """Up to which frequency a stage can drive the converter from end to end of its range.

    Parameters
    ----------
    stage : its name
    slew_rate : the lesser one of rise and fall [V/s]
    amplitude : peak at the stage's output that fills the range at the pin, at most what its rails
        leave [V]
    bandwidth : slew_rate / (2 pi amplitude) [Hz]
    """

    stage: str
    slew_rate: float
    amplitude: float
    bandwidth: float


@dataclass(frozen=True)
class LargeSignal:
    """What slew rates do to large signals.

    Parameters
    ----------
    stages : those with a slew rate
    rise, fall : from a step that takes the pin from one end of the range to the other until it
        stays within half an LSB; None where it was not found [s]
    reason : why it was not found, else ""
    held : whether a rail ends the step before the range does
    """

    stages: tuple[FullPower, ...]
    rise: float | None
    fall: float | None
    reason: str
    held: bool = False

    @classmethod
    def of(
        cls,
        scenario: Scenario,
        chain: Chain,
        stages: Sequence[Stage],
        level: PinLevel,
        small: float | None,
    ) -> Self | None:
        """Measure a scenario's chain; None if no stage has a slew rate.

        Parameters
        ----------
        stages : of the chain;  level : what takes the pin to the ends of the range
        small : how long a small step takes to half an LSB, delay included, if it is known [s]
        """
        powers = _full_powers(scenario, chain, stages)
        if not powers:
            return None
        low, high = level.at_low, level.at_high
        if low is None or high is None:
            text = "a step of the stimulus does not take the pin from one end of its range to the"
            return cls(powers, None, None, f"{text} other and leave it there")
        inner = MARGIN * (high - low)
        low, high = low + inner, high - inner
        swing = sum(2.0 * power.amplitude / power.slew_rate for power in powers)
        span = 1.5 * ((small or 0.0) + swing) + 2.0 * float(chain.delay[-1])
        try:
            rise = _settled(scenario, low, high, span)
            fall = _settled(scenario, high, low, span)
        except FrontendSimError as error:
            return cls(powers, None, None, str(error))
        text, held = "", bool(level.low_held or level.high_held)
        if rise is None or fall is None:
            text = f"it does not stay within half an LSB within {span * 2.0**DOUBLINGS:.3g} s"
        return cls(powers, rise, fall, text, held)


def _full_powers(
    scenario: Scenario, chain: Chain, stages: Sequence[Stage]
) -> tuple[FullPower, ...]:
    """Return the full-power bandwidth of every stage with a slew rate."""
    half = 0.5 * (scenario.adc.high - scenario.adc.low)
    found = []
    for number, stage in enumerate(stages, start=1):
        limits = stage.limits()
        rate = min(limits.up, limits.down)
        if math.isinf(rate):
            continue
        behind = _largest_gain(chain, number)
        amplitude = half / behind if behind > 0.0 else half
        low, high = stage.rails()
        amplitude = min(amplitude, 0.5 * (high - low))
        bandwidth = rate / (2.0 * math.pi * amplitude)
        found.append(FullPower(stage.label(number), rate, amplitude, bandwidth))
    return tuple(found)


def _largest_gain(chain: Chain, number: int) -> float:
    """Return the largest gain from the output of a stage to the pin, 1 if it has no bound."""
    from frontend_sim.analog.chain import compose
    from frontend_sim.measure.response.gain import largest_gain
    from frontend_sim.measure.response.step_response import StepResponse

    value = largest_gain(StepResponse.of(compose(chain.sections[number:]))).value
    return value if math.isfinite(value) else 1.0


def _settled(scenario: Scenario, before: float, after: float, span: float) -> float | None:
    """Return how long the pin takes to stay within half an LSB of where it comes to rest [s]."""
    from frontend_sim.simulation import Simulation

    point = (scenario.points()[-1],)
    for _ in range(DOUBLINGS + 1):
        run = Simulation(_stepped(scenario, before, after, span))
        times = np.linspace(0.0, span, POINTS + 1)
        pin = run.values(point, times)[0]
        band = 0.5 * scenario.adc.lsb
        outside = np.flatnonzero(np.abs(pin - pin[-1]) > band)
        last = int(outside[-1]) if len(outside) else -1
        # What moves by less than a tenth of the band in the last third has come to rest.
        still = np.ptp(pin[2 * POINTS // 3 :]) <= 0.1 * band
        if still and last < 0:
            return 0.0
        if still:
            close = np.linspace(times[last], times[last + 1], POINTS + 1)
            near = run.values(point, close)[0]
            return float(close[np.flatnonzero(np.abs(near - pin[-1]) > band)[-1]])
        span *= 2.0
    return None


def _stepped(scenario: Scenario, before: float, after: float, span: float) -> Scenario:
    """Return the scenario with a step at its stimulus, and a converter of the same range."""
    adc = scenario.adc
    bits = max(4, min(32, round(math.log2((adc.high - adc.low) / adc.lsb))))
    plain = Adc(rate=POINTS / span, bits=bits, low=adc.low, high=adc.high)
    settings = SimulationSettings(duration=span, grid_rate=FINER * POINTS / span, noise=False)
    step = Step.model_construct(kind="step", before=before, after=after, at=0.0)
    updates = {"stimulus": step, "adc": plain, "simulation": settings, "check": ()}
    return scenario.model_copy(update=updates)
