"""What a key expects: a dimension with its SI unit, and the interval its value may lie in."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass


@dataclass(frozen=True)
class Dimension:
    """What a key expects: its name, its SI unit, and an example for messages.

    Parameters
    ----------
    name : what is measured, for instance ``resistance``
    unit : the SI unit that values are kept in; empty for a bare number
    example : one or more examples, each in quotes where it is text
    smallest, largest : magnitudes between which any value other than zero must lie, in ``unit``.
        They are generous, and only keep out slips of the pen (``1e400``) and products that would
        leave the range of a float.
    absolute : True for a temperature, which degrees count from a zero of their own; False for all
        else, differences of temperature among them
    """

    name: str
    unit: str
    example: str
    smallest: float = 0.0
    largest: float = math.inf
    absolute: bool = False

    @property
    def expected(self) -> str:
        """What to write, for messages: ``a resistance, for instance "10 kohm" or "4k7"``."""
        return f"{self.noun}, for instance {self.example}"

    @property
    def first_example(self) -> str:
        """The first of the examples, in quotes where it is text."""
        quoted = re.match(r'"[^"]*"|[^,]*', self.example)
        return quoted.group() if quoted else self.example

    @property
    def noun(self) -> str:
        """The name with its article."""
        return f"{'an' if self.name[0] in 'aeiou' else 'a'} {self.name}"


@dataclass(frozen=True)
class Bounds:
    """The interval that a value may lie in, in the SI unit of its dimension."""

    above: float = -math.inf
    least: float = -math.inf
    below: float = math.inf
    most: float = math.inf

    def complaint(self, value: float, unit: str) -> str | None:
        """Return what is wrong with a value, or None if it lies within the bounds."""
        suffix = f" {unit}" if unit else ""
        if unit == "K" and self.least == 0.0 and value < 0.0:
            return "must be at least 0 K, absolute zero, -273.15 degC"
        if not value > self.above:
            return f"must be above {self.above:g}{suffix}"
        if not value >= self.least:
            return f"must be at least {self.least:g}{suffix}"
        if not value < self.below:
            return f"must be below {self.below:g}{suffix}"
        if not value <= self.most:
            return f"must be at most {self.most:g}{suffix}"
        return None


RESISTANCE = Dimension("resistance", "ohm", '"10 kohm" or "4k7"', 1e-12, 1e18)
CAPACITANCE = Dimension("capacitance", "F", '"4.7 nF" or "4n7"', 1e-24, 1e6)
INDUCTANCE = Dimension("inductance", "H", '"10 uH"', 1e-18, 1e9)
VOLTAGE = Dimension("voltage", "V", '"3.3 V"', 1e-24, 1e12)
NOISE_DENSITY = Dimension("noise density", "V/sqrt(Hz)", '"12 nV/sqrt(Hz)"', 1e-24, 1e6)
CURRENT_NOISE_DENSITY = Dimension(
    "current noise density", "A/sqrt(Hz)", '"1 pA/sqrt(Hz)"', 1e-30, 1e3
)
VOLTAGE_DRIFT = Dimension("drift of a voltage", "V/K", '"2 uV/K"', 1e-24, 1e6)
TIME = Dimension("time", "s", '"2 ms"', 1e-24, 1e12)
FREQUENCY = Dimension("frequency", "Hz", '"20 kHz"', 1e-15, 1e18)
SLOPE = Dimension("slope", "V/s", '"2 V/ms"', 1e-24, 1e24)
ANGLE = Dimension("angle", "rad", '"90 deg"', 0.0, 1e9)
RATIO = Dimension("ratio", "", '2, "0.1 %" or "6 dB"', 1e-18, 1e18)
FACTOR = Dimension("factor", "", "2.5e9")
FRACTION = Dimension("fraction", "", '"0.1 %" or "50 ppm"')
DRIFT = Dimension("drift", "1/K", '"50 ppm/K"', 1e-15, 1.0)
TEMPERATURE = Dimension("temperature", "K", '"25 degC" or "298.15 K"', 0.0, 1e6, absolute=True)
TEMPERATURE_DIFFERENCE = Dimension("difference of temperatures", "K", '"10 K"', 0.0, 1e6)
CURRENT = Dimension("current", "A", '"4 mA"', 1e-24, 1e9)
ACCELERATION = Dimension("acceleration", "m/s^2", '"9.81 m/s^2" or "2 g"', 0.0, 1e12)
PRESSURE = Dimension("pressure", "Pa", '"250 kPa" or "2.5 bar"', 0.0, 1e15)
POWER = Dimension("power", "W", '"1 uW"', 1e-24, 1e12)
FORCE = Dimension("force", "N", '"50 N"', 0.0, 1e12)
LENGTH = Dimension("length", "m", '"2 mm"', 0.0, 1e12)
POSITION = Dimension("position or share", "", '0.5 or "50 %"', 0.0, 1e9)
ACCELERATION_SENSITIVITY = Dimension("sensitivity", "V/(m/s^2)", '"100 mV/g"', 1e-18, 1e12)
ACCELERATION_NOISE = Dimension("noise density", "m/s^2/sqrt(Hz)", '"100 ug/sqrt(Hz)"', 0.0, 1e9)
RESPONSIVITY = Dimension("responsivity", "A/W", '"0.6 A/W"', 1e-18, 1e12)
BETA = Dimension("beta value", "K", '"3950 K"', 1e-3, 1e6)
DECIBEL = Dimension("level in dB", "dB", '"0.5 dB"', 0.0, 1e4)
LSB = Dimension("share of an LSB", "LSB", '"0.05 LSB"', 0.0, 2.0**32)
BITS = Dimension("number of bits", "bit", '10.5 or "10.5 bit"', 0.0, 1e3)
