"""Ctrl-C, held back where it would do harm."""

from __future__ import annotations

import signal
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType


@contextmanager
def uninterrupted() -> Iterator[None]:
    """Hold back Ctrl-C until the body is through.

    HDF5 calls back into ``Sink``, and an exception there would be a write that fails. Python
    raises KeyboardInterrupt in the main thread alone, so elsewhere nothing is to be done.
    """
    before = signal.getsignal(signal.SIGINT)
    if threading.current_thread() is not threading.main_thread() or not callable(before):
        yield
        return
    held: list[tuple[int, FrameType | None]] = []
    signal.signal(signal.SIGINT, lambda number, frame: held.append((number, frame)))
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, before)
        if held:
            before(*held[0])
