"""Mains hum and other tones of known frequency: their levels, and how well they are rejected."""

from frontend_sim.measure.mains.rejection import Rejection, mains_rejection, rejections
from frontend_sim.measure.mains.search import mains_levels
from frontend_sim.measure.mains.tones import ToneLevels, tone_levels

__all__ = [
    "Rejection",
    "ToneLevels",
    "mains_levels",
    "mains_rejection",
    "rejections",
    "tone_levels",
]
