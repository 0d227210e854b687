"""``python -m frontend_sim`` is the command ``frontend-sim``."""

import sys

from frontend_sim.cli import main

sys.exit(main())
