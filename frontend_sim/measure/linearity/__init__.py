"""Static linearity by counting codes: INL, DNL, missing codes, gain and offset."""

from frontend_sim.measure.linearity.by_ramp import ramp_linearity
from frontend_sim.measure.linearity.by_sine import sine_linearity
from frontend_sim.measure.linearity.confidence import ramp_samples_needed, sine_samples_needed
from frontend_sim.measure.linearity.linearity import Linearity, StraightLine

__all__ = [
    "Linearity",
    "StraightLine",
    "ramp_linearity",
    "ramp_samples_needed",
    "sine_linearity",
    "sine_samples_needed",
]
