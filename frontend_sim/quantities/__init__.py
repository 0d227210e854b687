"""Text with units becomes floats in SI, and back.

A quantity is written as text with its unit (``"4.7 nF"``), as a bare number in SI, or, for parts,
in the RKM code of IEC 60062 (``"4k7"``, ``"4n7"``). The annotated types below are what the fields
of a scenario's values are made of.
"""

from __future__ import annotations

from typing import Annotated

from frontend_sim.quantities.dimension import (
    ACCELERATION_NOISE,
    ACCELERATION_SENSITIVITY,
    ANGLE,
    BETA,
    BITS,
    CAPACITANCE,
    CURRENT,
    CURRENT_NOISE_DENSITY,
    DECIBEL,
    FACTOR,
    FRACTION,
    FREQUENCY,
    INDUCTANCE,
    LSB,
    NOISE_DENSITY,
    POSITION,
    POWER,
    RATIO,
    RESISTANCE,
    RESPONSIVITY,
    SLOPE,
    TEMPERATURE,
    TEMPERATURE_DIFFERENCE,
    TIME,
    VOLTAGE,
    VOLTAGE_DRIFT,
    Bounds,
    Dimension,
)
from frontend_sim.quantities.level import (
    SIGNAL,
    SIGNAL_SLOPE,
    SIGNALS,
    Level,
    Sense,
    level_in,
    parse_level,
    signal_dimension,
)
from frontend_sim.quantities.limit import LIMIT, Limit, ReadsLimit
from frontend_sim.quantities.marker import Reads, ReadsLevel, dimension_of, mark_of
from frontend_sim.quantities.part import REFERENCE_TEMPERATURE, Part
from frontend_sim.quantities.preferred import SERIES, Preferred, preferred
from frontend_sim.quantities.reading import parse, shown
from frontend_sim.quantities.signal_unit import SignalUnit
from frontend_sim.quantities.spread import part_table
from frontend_sim.quantities.writing import as_text

_POSITIVE = Bounds(above=0.0)
_NOT_NEGATIVE = Bounds(least=0.0)

Resistance = Annotated[float, Reads(RESISTANCE, _POSITIVE, spread=True)]
NotNegativeResistance = Annotated[float, Reads(RESISTANCE, _NOT_NEGATIVE, spread=True)]
Capacitance = Annotated[float, Reads(CAPACITANCE, _POSITIVE, spread=True)]
NotNegativeCapacitance = Annotated[float, Reads(CAPACITANCE, _NOT_NEGATIVE, spread=True)]
Inductance = Annotated[float, Reads(INDUCTANCE, _POSITIVE, spread=True)]
NotNegativeInductance = Annotated[float, Reads(INDUCTANCE, _NOT_NEGATIVE, spread=True)]
GainBandwidth = Annotated[float, Reads(FREQUENCY, _POSITIVE, spread=True)]
PartFrequency = Annotated[float, Reads(FREQUENCY, _POSITIVE, spread=True)]
PartTime = Annotated[float, Reads(TIME, _POSITIVE, spread=True)]
PartVoltage = Annotated[float, Reads(VOLTAGE, _POSITIVE, spread=True)]
PartCurrent = Annotated[float, Reads(CURRENT, _POSITIVE, spread=True)]
PartRatio = Annotated[float, Reads(RATIO, Bounds(), spread=True)]
PositivePartRatio = Annotated[float, Reads(RATIO, _POSITIVE, spread=True)]
Beta = Annotated[float, Reads(BETA, _POSITIVE, spread=True)]
Responsivity = Annotated[float, Reads(RESPONSIVITY, Bounds(), spread=True)]
AccelerationSensitivity = Annotated[float, Reads(ACCELERATION_SENSITIVITY, Bounds(), spread=True)]
AccelerationNoise = Annotated[float, Reads(ACCELERATION_NOISE, _NOT_NEGATIVE)]
Temperature = Annotated[float, Reads(TEMPERATURE, _NOT_NEGATIVE)]
SignalLevel = Annotated[float, ReadsLevel(SIGNAL, Bounds())]
SignalDifference = Annotated[float, ReadsLevel(SIGNAL, Bounds(), sense="difference")]
NotNegativeSignalDifference = Annotated[
    float, ReadsLevel(SIGNAL, _NOT_NEGATIVE, sense="difference")
]
SignalSlope = Annotated[float, ReadsLevel(SIGNAL_SLOPE, Bounds(), sense="slope")]
SignalSpan = Annotated[float, ReadsLevel(SIGNAL, _POSITIVE, sense="difference", with_unit=True)]
Voltage = Annotated[float, Reads(VOLTAGE, Bounds())]
PositiveVoltage = Annotated[float, Reads(VOLTAGE, _POSITIVE)]
NotNegativeVoltage = Annotated[float, Reads(VOLTAGE, _NOT_NEGATIVE)]
NoiseDensity = Annotated[float, Reads(NOISE_DENSITY, _NOT_NEGATIVE)]
CurrentNoiseDensity = Annotated[float, Reads(CURRENT_NOISE_DENSITY, _NOT_NEGATIVE)]
VoltageDrift = Annotated[float, Reads(VOLTAGE_DRIFT, Bounds())]
Instant = Annotated[float, Reads(TIME, Bounds())]
Time = Annotated[float, Reads(TIME, _NOT_NEGATIVE)]
PositiveTime = Annotated[float, Reads(TIME, _POSITIVE)]
Frequency = Annotated[float, Reads(FREQUENCY, _POSITIVE)]
Slope = Annotated[float, Reads(SLOPE, Bounds())]
PositiveSlope = Annotated[float, Reads(SLOPE, _POSITIVE)]
Current = Annotated[float, Reads(CURRENT, Bounds())]
NotNegativeCurrent = Annotated[float, Reads(CURRENT, _NOT_NEGATIVE)]
NotNegativePower = Annotated[float, Reads(POWER, _NOT_NEGATIVE)]
Position = Annotated[float, Reads(POSITION, Bounds(least=0.0, most=1.0))]
Angle = Annotated[float, Reads(ANGLE, Bounds())]
Ratio = Annotated[float, Reads(RATIO, Bounds())]
PositiveRatio = Annotated[float, Reads(RATIO, _POSITIVE)]
Factor = Annotated[float, Reads(FACTOR, Bounds())]
Fraction = Annotated[float, Reads(FRACTION, Bounds())]
NotNegativeFraction = Annotated[float, Reads(FRACTION, _NOT_NEGATIVE)]
Decibel = Annotated[float, Reads(DECIBEL, Bounds())]
PositiveDecibel = Annotated[float, Reads(DECIBEL, _POSITIVE)]
PositiveLsb = Annotated[float, Reads(LSB, _POSITIVE)]
Bits = Annotated[float, Reads(BITS, _POSITIVE)]
PositiveLimit = Annotated[float, ReadsLimit(LIMIT, _POSITIVE)]
NotNegativeLimit = Annotated[float, ReadsLimit(LIMIT, _NOT_NEGATIVE)]
Share = Annotated[float, Reads(FRACTION, Bounds(least=0.0, most=1.0))]
PositiveShare = Annotated[float, Reads(FRACTION, Bounds(above=0.0, below=1.0))]

__all__ = [
    "ACCELERATION_NOISE",
    "ACCELERATION_SENSITIVITY",
    "ANGLE",
    "BETA",
    "BITS",
    "CAPACITANCE",
    "CURRENT",
    "CURRENT_NOISE_DENSITY",
    "DECIBEL",
    "FACTOR",
    "FRACTION",
    "FREQUENCY",
    "INDUCTANCE",
    "LIMIT",
    "LSB",
    "NOISE_DENSITY",
    "POSITION",
    "POWER",
    "RATIO",
    "REFERENCE_TEMPERATURE",
    "RESISTANCE",
    "RESPONSIVITY",
    "SERIES",
    "SIGNAL",
    "SIGNALS",
    "SIGNAL_SLOPE",
    "SLOPE",
    "TEMPERATURE",
    "TEMPERATURE_DIFFERENCE",
    "TIME",
    "VOLTAGE",
    "VOLTAGE_DRIFT",
    "AccelerationNoise",
    "AccelerationSensitivity",
    "Angle",
    "Beta",
    "Bits",
    "Bounds",
    "Capacitance",
    "Current",
    "CurrentNoiseDensity",
    "Decibel",
    "Dimension",
    "Factor",
    "Fraction",
    "Frequency",
    "GainBandwidth",
    "Inductance",
    "Instant",
    "Level",
    "Limit",
    "NoiseDensity",
    "NotNegativeCapacitance",
    "NotNegativeCurrent",
    "NotNegativeFraction",
    "NotNegativeInductance",
    "NotNegativeLimit",
    "NotNegativePower",
    "NotNegativeResistance",
    "NotNegativeSignalDifference",
    "NotNegativeVoltage",
    "Part",
    "PartCurrent",
    "PartFrequency",
    "PartRatio",
    "PartTime",
    "PartVoltage",
    "Position",
    "PositiveDecibel",
    "PositiveLimit",
    "PositiveLsb",
    "PositivePartRatio",
    "PositiveRatio",
    "PositiveShare",
    "PositiveSlope",
    "PositiveTime",
    "PositiveVoltage",
    "Preferred",
    "Ratio",
    "Reads",
    "ReadsLevel",
    "Resistance",
    "Responsivity",
    "Sense",
    "Share",
    "SignalDifference",
    "SignalLevel",
    "SignalSlope",
    "SignalSpan",
    "SignalUnit",
    "Slope",
    "Temperature",
    "Time",
    "Voltage",
    "VoltageDrift",
    "as_text",
    "dimension_of",
    "level_in",
    "mark_of",
    "parse",
    "parse_level",
    "part_table",
    "preferred",
    "shown",
    "signal_dimension",
]
