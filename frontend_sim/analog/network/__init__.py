"""Circuits of resistors, capacitors, inductors and amplifiers, solved from their part values."""

from __future__ import annotations

from frontend_sim.analog.network.opened import DRIVE, Opened, Way, opened
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
    "DRIVE",
    "GROUND",
    "SIGNAL",
    "Amplifier",
    "Capacitor",
    "Circuit",
    "Held",
    "Inductor",
    "Injected",
    "OpenLoop",
    "Opened",
    "Part",
    "Resistor",
    "Solution",
    "Way",
    "opened",
    "solve",
]
