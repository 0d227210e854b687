"""Fits of one sine to a record, and how well they can know it."""

from frontend_sim.measure.sine_fit.bounds import SineBounds, cramer_rao
from frontend_sim.measure.sine_fit.fit import SineFit
from frontend_sim.measure.sine_fit.free_frequency import fit_sine
from frontend_sim.measure.sine_fit.known_frequency import fit_sine_at

__all__ = ["SineBounds", "SineFit", "cramer_rao", "fit_sine", "fit_sine_at"]
