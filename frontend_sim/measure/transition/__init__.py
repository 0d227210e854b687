"""Steps and pulses in samples: settling, overshoot, rise time, delay, droop.

Between two samples nothing is known. The response of a chain at every instant is measured in
``frontend_sim.measure.response``.
"""

from frontend_sim.measure.transition.droop import Droop, droop_of
from frontend_sim.measure.transition.duration import Duration, delay, rise_time
from frontend_sim.measure.transition.overshoot import Excursions, excursions_of
from frontend_sim.measure.transition.settling import SampledSettling, sampled_settling

__all__ = [
    "Droop",
    "Duration",
    "Excursions",
    "SampledSettling",
    "delay",
    "droop_of",
    "excursions_of",
    "rise_time",
    "sampled_settling",
]
