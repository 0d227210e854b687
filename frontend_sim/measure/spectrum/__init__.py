"""Windowed spectra of records, and the coherence of a tone with its record."""

from frontend_sim.measure.spectrum.coherence import Coherence, coherence_of, coherent_tone
from frontend_sim.measure.spectrum.folding import folded
from frontend_sim.measure.spectrum.spectrum import Spectrum, amplitude_spectrum
from frontend_sim.measure.spectrum.window import WINDOWS, Window, window_named

__all__ = [
    "WINDOWS",
    "Coherence",
    "Spectrum",
    "Window",
    "amplitude_spectrum",
    "coherence_of",
    "coherent_tone",
    "folded",
    "window_named",
]
