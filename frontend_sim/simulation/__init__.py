"""Pushes blocks of signal through chain and converter; the only loop over time."""

from frontend_sim.simulation.engine import Simulation
from frontend_sim.simulation.run import GridReport, Run, RunBlock
from frontend_sim.simulation.scan import ScanRun, ScanSimulation
from frontend_sim.simulation.simulate import simulate

__all__ = ["GridReport", "Run", "RunBlock", "ScanRun", "ScanSimulation", "Simulation", "simulate"]
