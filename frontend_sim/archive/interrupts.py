"""Ctrl-C and a scheduler's end of a run, held back where they would do harm."""

from __future__ import annotations

import signal
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType

NUMBERS = tuple(
    getattr(signal, name) for name in ("SIGINT", "SIGTERM", "SIGHUP") if hasattr(signal, name)
)


@contextmanager
def uninterrupted() -> Iterator[None]:
    """Hold back signals that raise in Python until the body is through.

    HDF5 calls back into ``Sink``, and an exception there would be a write that fails. Python
    raises in the main thread alone, so elsewhere nothing is to be done; a signal without a
    handler in Python ends the process at once and is left alone.
    """
    before = {number: signal.getsignal(number) for number in NUMBERS}
    handled = {number: handler for number, handler in before.items() if callable(handler)}
    if threading.current_thread() is not threading.main_thread() or not handled:
        yield
        return
    held: list[tuple[int, FrameType | None]] = []
    for number in handled:
        signal.signal(number, lambda number, frame: held.append((number, frame)))
    try:
        yield
    finally:
        for number, handler in handled.items():
            signal.signal(number, handler)
        if held:
            handled[signal.Signals(held[0][0])](*held[0])
