"""How clean a converted tone is: SNR, SINAD, THD, SFDR, effective bits."""

from frontend_sim.measure.tone_quality.analysis import tone_quality
from frontend_sim.measure.tone_quality.lines import Harmonic
from frontend_sim.measure.tone_quality.quality import ToneQuality

__all__ = ["Harmonic", "ToneQuality", "tone_quality"]
