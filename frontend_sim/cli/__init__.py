"""Arguments become calls of the library, and errors become one message and an exit status."""

import os
import sys

from frontend_sim.cli.early import end_quietly

if os.path.basename(sys.argv[0] if sys.argv else "").startswith("frontend-sim"):
    end_quietly()  # this process is the command, and a signal may come while the rest loads

from frontend_sim.cli.command import main

__all__ = ["main"]
