"""The largest memory that this process ever held, as the system counts it."""

from __future__ import annotations

import sys
from pathlib import Path


def resident_peak() -> int:
    """Return the largest resident size of this process since it began its program [byte].

    ``ru_maxrss`` on Linux begins with the size of the process that started this one (it outlives
    ``exec``), so a worker of the tests that has grown large would be counted as the run's; the
    kernel's ``VmHWM`` belongs to the program alone.
    """
    if sys.platform == "linux":
        lines = Path("/proc/self/status").read_text(encoding="ascii").splitlines()
        return 1024 * int(next(line.split()[1] for line in lines if line.startswith("VmHWM:")))
    import resource

    most = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    return most if sys.platform == "darwin" else 1024 * most
