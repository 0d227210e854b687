"""Text with units becomes floats in SI, and back.

A quantity is written as text with its unit (``"4.7 nF"``), as a bare number in SI, or, for parts,
in the RKM code of IEC 60062 (``"4k7"``, ``"4n7"``). The annotated types below are what the fields
of a scenario's values are made of.
"""

from __future__ import annotations

from typing import Annotated

from frontend_sim.quantities.dimension import (
    ANGLE,
    CAPACITANCE,
    DECIBEL,
    FACTOR,
    FRACTION,
    FREQUENCY,
    INDUCTANCE,
    LSB,
    NOISE_DENSITY,
    RATIO,
    RESISTANCE,
    SLOPE,
    TIME,
    VOLTAGE,
    Bounds,
    Dimension,
)
from frontend_sim.quantities.marker import Reads, dimension_of
from frontend_sim.quantities.reading import parse, shown
from frontend_sim.quantities.writing import as_text

_POSITIVE = Bounds(above=0.0)
_NOT_NEGATIVE = Bounds(least=0.0)

Resistance = Annotated[float, Reads(RESISTANCE, _POSITIVE)]
Capacitance = Annotated[float, Reads(CAPACITANCE, _POSITIVE)]
Inductance = Annotated[float, Reads(INDUCTANCE, _POSITIVE)]
Voltage = Annotated[float, Reads(VOLTAGE, Bounds())]
PositiveVoltage = Annotated[float, Reads(VOLTAGE, _POSITIVE)]
NotNegativeVoltage = Annotated[float, Reads(VOLTAGE, _NOT_NEGATIVE)]
NoiseDensity = Annotated[float, Reads(NOISE_DENSITY, _NOT_NEGATIVE)]
Instant = Annotated[float, Reads(TIME, Bounds())]
Time = Annotated[float, Reads(TIME, _NOT_NEGATIVE)]
PositiveTime = Annotated[float, Reads(TIME, _POSITIVE)]
Frequency = Annotated[float, Reads(FREQUENCY, _POSITIVE)]
Slope = Annotated[float, Reads(SLOPE, Bounds())]
Angle = Annotated[float, Reads(ANGLE, Bounds())]
Ratio = Annotated[float, Reads(RATIO, Bounds())]
PositiveRatio = Annotated[float, Reads(RATIO, _POSITIVE)]
Factor = Annotated[float, Reads(FACTOR, Bounds())]
Fraction = Annotated[float, Reads(FRACTION, Bounds())]
NotNegativeFraction = Annotated[float, Reads(FRACTION, _NOT_NEGATIVE)]
Decibel = Annotated[float, Reads(DECIBEL, Bounds())]
PositiveDecibel = Annotated[float, Reads(DECIBEL, _POSITIVE)]
PositiveLsb = Annotated[float, Reads(LSB, _POSITIVE)]

__all__ = [
    "ANGLE",
    "CAPACITANCE",
    "DECIBEL",
    "FACTOR",
    "FRACTION",
    "FREQUENCY",
    "INDUCTANCE",
    "LSB",
    "NOISE_DENSITY",
    "RATIO",
    "RESISTANCE",
    "SLOPE",
    "TIME",
    "VOLTAGE",
    "Angle",
    "Bounds",
    "Capacitance",
    "Decibel",
    "Dimension",
    "Factor",
    "Fraction",
    "Frequency",
    "Inductance",
    "Instant",
    "NoiseDensity",
    "NotNegativeFraction",
    "NotNegativeVoltage",
    "PositiveDecibel",
    "PositiveLsb",
    "PositiveRatio",
    "PositiveTime",
    "PositiveVoltage",
    "Ratio",
    "Reads",
    "Resistance",
    "Slope",
    "Time",
    "Voltage",
    "as_text",
    "dimension_of",
    "parse",
    "shown",
]
