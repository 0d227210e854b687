"""Values of a signal, whose unit only the first stage of the chain knows."""

from __future__ import annotations

import re
from typing import Literal

from frontend_sim.errors import QuantityError
from frontend_sim.quantities.dimension import (
    ACCELERATION,
    CURRENT,
    FORCE,
    LENGTH,
    POSITION,
    POWER,
    PRESSURE,
    SLOPE,
    TEMPERATURE,
    TEMPERATURE_DIFFERENCE,
    VOLTAGE,
    Dimension,
)
from frontend_sim.quantities.reading import parse, shown
from frontend_sim.quantities.units import noun_of

Sense = Literal["value", "difference", "slope"]
"""What a level is: a value of the signal, a difference of two values, or a change per second.

Temperatures alone tell values and differences apart: 25 degC is 298.15 K, or 25 K more."""

SIGNALS: dict[str, Dimension] = {
    dimension.unit: dimension
    for dimension in (
        VOLTAGE,
        CURRENT,
        TEMPERATURE,
        ACCELERATION,
        PRESSURE,
        POWER,
        FORCE,
        LENGTH,
        POSITION,
    )
}
"""What a signal may be: SI unit -> dimension."""

_EXAMPLES = '"3.3 V", "25 degC" or "2 g"'
SIGNAL = Dimension("signal", "signal", _EXAMPLES)
SIGNAL_SLOPE = Dimension("slope of the signal", "signal/s", '"2 V/ms" or "1 K/s"')
_ANY = {
    "value": Dimension("signal", "", _EXAMPLES, 1e-24, 1e15),
    "difference": Dimension("signal", "", _EXAMPLES, 1e-24, 1e15),
    "slope": Dimension("slope of the signal", "", SIGNAL_SLOPE.example, 1e-24, 1e24),
}


class Level(float):
    """A value of a signal in SI, and how it was given.

    Parameters
    ----------
    value : in SI
    unit : SI unit, a key of ``SIGNALS``; None for a bare number, which may be in any
    given : the text that it was read from; empty for a bare number
    """

    __slots__ = ("given", "unit")
    unit: str | None
    given: str

    def __new__(cls, value: float, unit: str | None = None, given: str = "") -> Level:
        """Make a level from its value and origin."""
        level = super().__new__(cls, value)
        level.unit, level.given = unit, given
        return level

    def __reduce__(self) -> tuple[type[Level], tuple[float, str | None, str]]:
        """Return what makes the level again, for copies and other processes."""
        return Level, (float(self), self.unit, self.given)


def signal_dimension(unit: str, sense: Sense) -> Dimension:
    """Return what a key expects where the signal has a unit.

    Parameters
    ----------
    unit : SI unit of the signal, a key of ``SIGNALS``
    sense : whether the key gives a value, a difference or a slope
    """
    if sense == "slope":
        if unit == "V":
            return SLOPE
        per_second = f"{unit or '1'}/s"
        return Dimension("slope", per_second, f'"2 {per_second}"', 0.0, 1e24)
    if unit == "K" and sense == "difference":
        return TEMPERATURE_DIFFERENCE
    return SIGNALS[unit]


def parse_level(value: object, sense: Sense = "value") -> Level:
    """Read a value of a signal in any unit that a signal may have.

    Parameters
    ----------
    value : text with a unit, or a bare number in SI
    sense : whether it is a value, a difference or a slope

    Raises
    ------
    QuantityError
        If it is no number with a unit, or no unit of a signal.
    """
    if isinstance(value, Level):
        return value
    if not isinstance(value, str):
        return Level(parse(value, _ANY[sense]))
    likely = _likely(value)
    if len(likely) == 1:
        return Level(parse(value, signal_dimension(likely[0], sense)), likely[0], value)
    for unit in likely:
        try:
            return Level(parse(value, signal_dimension(unit, sense)), unit, value)
        except QuantityError:
            continue
    return Level(parse(value, _ANY[sense]), "", value)  # raises, or it has no unit


def _likely(text: str) -> list[str]:
    """Return the units of signals that a text may be in; one only, where its unit is no product."""
    written = re.search(r"[^\d\s.]\D*$", text.strip())
    noun = noun_of(written.group()) if written else ""
    named = [unit for unit, dimension in SIGNALS.items() if dimension.name == noun]
    return named or list(SIGNALS)


def level_in(level: float, unit: str, sense: Sense) -> float:
    """Return the value of a level as a signal of a known unit.

    Parameters
    ----------
    level : as ``parse_level`` gives it, or a bare number
    unit : SI unit of the signal, a key of ``SIGNALS``

    Raises
    ------
    QuantityError
        If it was given in a unit of something else, or is a temperature below absolute zero.
    """
    given = level.given if isinstance(level, Level) else ""
    dimension = signal_dimension(unit, sense)
    value = parse(given or float(level), dimension)
    if dimension.absolute and value < 0.0:
        raise QuantityError(
            f"given {shown(given or value)}; a temperature is at least 0 K, absolute zero, "
            "-273.15 degC"
        )
    return value
