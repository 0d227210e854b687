"""Pushes blocks of signal through chain and converter; the only loop over time."""

from frontend_sim.simulation.engine import Simulation, simulate
from frontend_sim.simulation.run import GridReport, Run, RunBlock

__all__ = ["GridReport", "Run", "RunBlock", "Simulation", "simulate"]
