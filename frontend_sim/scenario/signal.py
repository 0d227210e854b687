"""The unit of the signal at every point of the chain, from the sensor to the converter's pin."""

from __future__ import annotations

from collections.abc import Sequence

from frontend_sim.analog.stages.base import Stage
from frontend_sim.errors import ModelError
from frontend_sim.quantities import SIGNALS
from frontend_sim.stimulus.base import Stimulus
from frontend_sim.stimulus.levels import written_level

PIN = "V"
"""SI unit of what the converter takes."""


class UnitError(ModelError):
    """A stage gives another quantity than the next one takes; ``position`` counts from 0."""

    def __init__(self, position: int, text: str) -> None:
        """Keep the position beside the message."""
        self.position = position
        super().__init__(text)


def signal_units(stages: Sequence[Stage]) -> tuple[str, ...]:
    """Return the SI units at the points of a chain: the stimulus, then each stage's output.

    Stages that keep any unit take theirs from what follows, and at last from the converter.

    Raises
    ------
    UnitError
        If a stage gives another quantity than what follows takes.
    """
    units = [PIN]
    taker = "the converter"
    for position in reversed(range(len(stages))):
        stage, label = stages[position], stages[position].label(position + 1)
        both = stage.units()
        if both is None:
            units.append(units[-1])
            continue
        if both[1] != units[-1]:
            raise UnitError(
                position,
                f"{label!r} gives a {named(both[1])}, but {taker} takes a {named(units[-1])}"
                f"{_advice(both[1])}",
            )
        taker = repr(label)
        units.append(both[0])
    return tuple(reversed(units))


def level_as_written(stimulus: Stimulus, stages: Sequence[Stage]) -> str:
    """Return a level of what arrives as the file has it, ``"2 g"``; empty where none has a unit.

    Parameters
    ----------
    stages : of the chain; the full scale of the first one that takes the stimulus is a level too
    """
    takers = (written_level(stage) for stage in stages if stage.units() is not None)
    return stimulus.written_level() or next(takers, "")


def named(unit: str) -> str:
    """Return what a unit measures, and the unit: ``temperature (K)``."""
    name = SIGNALS[unit].name
    return f"{name} ({unit})" if unit else name


def _advice(unit: str) -> str:
    if unit == "A":
        return "; put a transimpedance-amplifier or a current-shunt between them"
    if unit == "K":
        return "; put a sensor between them: rtd, thermistor or thermocouple"
    return "; put a sensor between them, or change their order"
