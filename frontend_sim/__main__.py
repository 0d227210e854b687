"""``python -m frontend_sim`` is the command ``frontend-sim``."""

import sys

from frontend_sim.cli.early import end_quietly

end_quietly()

from frontend_sim.cli import main  # noqa: E402  # a signal may come while this loads

sys.exit(main())
