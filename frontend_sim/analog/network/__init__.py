"""Circuits of resistors, capacitors, inductors and amplifiers, solved from their part values."""

from __future__ import annotations

from frontend_sim.analog.network.parts import (
    GROUND,
    SIGNAL,
    Amplifier,
    Capacitor,
    Circuit,
    Held,
    Inductor,
    Injected,
    OpenLoop,
    Part,
    Resistor,
)
from frontend_sim.analog.network.solution import Solution, solve

__all__ = [
    "GROUND",
    "SIGNAL",
    "Amplifier",
    "Capacitor",
    "Circuit",
    "Held",
    "Inductor",
    "Injected",
    "OpenLoop",
    "Part",
    "Resistor",
    "Solution",
    "solve",
]
