"""Noise of a record that should be constant: rms, resolution, histogram of the codes."""

from frontend_sim.measure.noise.histogram import CodeHistogram, code_histogram
from frontend_sim.measure.noise.interval import Interval, rms_interval
from frontend_sim.measure.noise.summary import Noise, before_rounding, code_noise, noise_of

__all__ = [
    "CodeHistogram",
    "Interval",
    "Noise",
    "before_rounding",
    "code_histogram",
    "code_noise",
    "noise_of",
    "rms_interval",
]
