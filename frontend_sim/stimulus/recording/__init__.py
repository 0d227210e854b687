"""A recorded signal; one reader for each file format."""

from frontend_sim.stimulus.recording.readers import READERS
from frontend_sim.stimulus.recording.recording import Recording

__all__ = ["READERS", "Recording"]
