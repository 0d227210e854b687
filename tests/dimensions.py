"""Dimensions of every sort, for tests that must hold for all of them."""

from __future__ import annotations

from frontend_sim.quantities import (
    ANGLE,
    CAPACITANCE,
    DECIBEL,
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
)

DIMENSIONS = (
    RESISTANCE,
    CAPACITANCE,
    INDUCTANCE,
    VOLTAGE,
    NOISE_DENSITY,
    TIME,
    FREQUENCY,
    SLOPE,
    ANGLE,
    RATIO,
    FRACTION,
    DECIBEL,
    LSB,
)
