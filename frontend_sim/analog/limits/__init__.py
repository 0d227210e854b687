"""What a linear model leaves out: rails, slew rate, clamps, curved sensors. One limiter per file.

A limiter stands for a few blocks of its stage, see ``Limiter.replaced``. Their linear answer stays
in the chain; the limiter tells by how much the true answer deviates from it.
"""

from __future__ import annotations

from frontend_sim.analog.limits.amplifier import AmplifierLimits
from frontend_sim.analog.limits.amplifier_loop import AmplifierLoop
from frontend_sim.analog.limits.clipping import Clipping
from frontend_sim.analog.limits.diodes import DiodeClamp
from frontend_sim.analog.limits.follower import SlewFollower
from frontend_sim.analog.limits.limiter import Limiter, Segments, Touched
from frontend_sim.analog.limits.static_map import StaticMap

__all__ = [
    "AmplifierLimits",
    "AmplifierLoop",
    "Clipping",
    "DiodeClamp",
    "Limiter",
    "Segments",
    "SlewFollower",
    "StaticMap",
    "Touched",
]
