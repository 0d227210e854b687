"""What a run and an inspection tell of amplifiers that are asked for more than they can do."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import pairwise

from frontend_sim.analog.stages.amplifier_stage import AmplifierStage
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import (
    CURRENT,
    FREQUENCY,
    RESISTANCE,
    VOLTAGE,
    as_text,
)
from frontend_sim.scenario.model import Scenario

KEY = "source_resistance"
"""Key by which an amplifier is told what stands before its noninverting input."""


def amplifier_notes(scenario: Scenario, stages: Sequence[Stage]) -> tuple[str, ...]:
    """Return notes on bandwidth below the signal, and on input currents that meet no resistance.

    Parameters
    ----------
    stages : of the scenario's chain, with the values that they have at its temperature
    """
    return (*_slow(scenario, stages), *_currents(stages))


def _slow(scenario: Scenario, stages: Sequence[Stage]) -> Iterator[str]:
    """Tell of amplifiers whose loop has no gain left at the stimulus's highest frequency."""
    highest = scenario.stimulus.highest_frequency()
    for position, stage in enumerate(stages, start=1):
        if highest is None or not isinstance(stage, AmplifierStage):
            continue
        bandwidth = stage.closed_loop_bandwidth()
        if bandwidth is None or stage.gain_bandwidth is None or highest <= bandwidth:
            continue
        needed = 10.0 * stage.gain_bandwidth * highest / bandwidth
        yield (
            f"the stimulus reaches {as_text(highest, FREQUENCY, 4)}, above the closed-loop "
            f"bandwidth of {stage.label(position)!r}, {as_text(bandwidth, FREQUENCY, 4)} "
            f"(gain_bandwidth {as_text(stage.gain_bandwidth, FREQUENCY, 4)}, noise gain "
            f"{stage.noise_gain():.4g}): there the amplifier, not its parts, decides on gain and "
            f"phase; take a gain_bandwidth of some {as_text(needed, FREQUENCY, 2)}, less gain, or "
            "a lower frequency"
        )


def _currents(stages: Sequence[Stage]) -> Iterator[str]:
    """Tell of bias and noise currents that flow through the resistance of the stage before."""
    labelled = [(stage.label(position), stage) for position, stage in enumerate(stages, start=1)]
    for (before, source), (label, stage) in pairwise(labelled):
        if not isinstance(stage, AmplifierStage) or KEY not in type(stage).model_fields:
            continue
        resistance = source.resistance_at_rest()
        if getattr(stage, KEY) is not None or not resistance:
            continue
        sizes = []
        if stage.bias_current != 0.0:
            current = as_text(stage.bias_current, CURRENT, 3)
            voltage = as_text(abs(stage.bias_current) * resistance, VOLTAGE, 3)
            sizes.append(f"its bias current of {current} makes {voltage}")
        if stage.current_noise > 0.0:
            # Densities have a unit that takes no prefix by itself.
            current = as_text(stage.current_noise, CURRENT, 3)
            voltage = as_text(stage.current_noise * resistance, VOLTAGE, 3)
            sizes.append(f"its current noise of {current}/sqrt(Hz) up to {voltage}/sqrt(Hz)")
        if sizes:
            ohms = as_text(resistance, RESISTANCE, 4)
            yield (
                f"{label!r} stands behind {before!r}, whose resistance is {ohms}: at the input "
                f'{" and ".join(sizes)}, which is not counted; give {label!r} {KEY} = "{ohms}" '
                "(its thermal noise then counts there too)"
            )
