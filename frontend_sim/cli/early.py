"""A scheduler's end of a process that is still loading its libraries."""

from __future__ import annotations

import os
import signal
import threading
from types import FrameType

from frontend_sim.cli.status import INTERRUPTED


def _end(_number: int, _frame: FrameType | None) -> None:
    """End at once: nothing has been opened yet, so nothing is left half written."""
    os.write(2, b"interrupted; nothing half written is left\n")
    os._exit(INTERRUPTED)


def end_quietly() -> None:
    """Let SIGTERM and SIGHUP end the process with the usual status, also before ``main`` runs."""
    if threading.current_thread() is not threading.main_thread():
        return
    for name in ("SIGTERM", "SIGHUP"):
        number = getattr(signal, name, None)
        if number is not None and signal.getsignal(number) is signal.SIG_DFL:
            signal.signal(number, _end)
