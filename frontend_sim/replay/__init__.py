"""Many runs: a scenario is varied, run on all cores, resumed, and kept as a table."""

from frontend_sim.replay.call import Replayed, default_directory, replay_set
from frontend_sim.replay.names import file_name, seed_of
from frontend_sim.replay.night import Progress
from frontend_sim.replay.preview import Preview, preview_set
from frontend_sim.replay.reading import read_set
from frontend_sim.replay.runs import PlannedRun, PreparedSet

__all__ = [
    "PlannedRun",
    "PreparedSet",
    "Preview",
    "Progress",
    "Replayed",
    "default_directory",
    "file_name",
    "preview_set",
    "read_set",
    "replay_set",
    "seed_of",
]
