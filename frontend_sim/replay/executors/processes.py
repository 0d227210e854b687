"""Processes on this machine."""

from __future__ import annotations

import multiprocessing
import os
import signal
import threading
from collections.abc import Iterator
from concurrent.futures import Future, ProcessPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from contextlib import contextmanager, suppress
from multiprocessing.connection import Connection

from frontend_sim.errors import ScenarioError
from frontend_sim.replay.executors.base import WorkerDied
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.work import Batch, CannotGoOn, run_batch


def cores() -> int:
    """Return how many cores this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return max(1, len(os.sched_getaffinity(0)))
    return os.cpu_count() or 1


class Processes:
    """A pool of processes; a worker that dies is replaced.

    They are started afresh (``spawn``), so that they inherit nothing, and end when this process
    does, whatever ends it: each waits for the end of a pipe that only this process has open.
    """

    deaths_per_loss = 1

    def __init__(self, workers: int | None = None) -> None:
        """Prepare the pool; workers start when there is something to do."""
        self.workers = workers or cores()
        self._context = multiprocessing.get_context("spawn")
        try:
            self._pool, self._alive = self._started()
        except OSError as error:
            raise ScenarioError(_unstartable(error)) from error

    def _started(self) -> tuple[ProcessPoolExecutor, Connection]:
        reader, writer = self._context.Pipe(duplex=False)
        return ProcessPoolExecutor(self.workers, self._context, _begin, (reader,)), writer

    def submit(self, batch: Batch) -> Future[list[Outcome]]:
        """Hand in a batch, see ``Executor``; a pool that broke is replaced by a new one."""
        try:
            try:
                future = self._handed_in(batch)
            except BrokenProcessPool:
                self.close(now=True)
                self._pool, self._alive = self._started()
                future = self._handed_in(batch)
        except (OSError, RuntimeError) as error:  # as processes and threads refuse to start
            raise CannotGoOn(_unstartable(error)) from error
        return _told(future)

    def _handed_in(self, batch: Batch) -> Future[list[Outcome]]:
        with _deaf():  # the pool starts a worker here as long as it has too few
            return self._pool.submit(run_batch, batch)

    def waits_for(self) -> str:
        """Return that all is well: a worker that is missing is replaced at once."""
        return ""

    def close(self, now: bool) -> None:
        """End all workers, see ``Executor``."""
        if now:
            self._alive.close()  # the workers wait for this
        self._pool.shutdown(wait=True, cancel_futures=True)
        with suppress(OSError):
            self._alive.close()


def _unstartable(error: Exception) -> str:
    """Return what keeps workers from starting, for instance too many open files."""
    reason = getattr(error, "strerror", None) or error
    return f"workers cannot be started: {reason}; take fewer of them, or the executor in-process"


@contextmanager
def _deaf() -> Iterator[None]:
    """Hold Ctrl-C back: a worker inherits that, and would meet it before ``_begin`` ignores it."""
    if not hasattr(signal, "pthread_sigmask"):
        yield
        return
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


def _told(inner: Future[list[Outcome]]) -> Future[list[Outcome]]:
    """Return a future that tells a broken pool by this package's own word."""
    outer: Future[list[Outcome]] = Future()

    def done(finished: Future[list[Outcome]]) -> None:
        if finished.cancelled():
            outer.cancel()
            outer.set_running_or_notify_cancel()
        elif isinstance(error := finished.exception(), BrokenProcessPool):
            outer.set_exception(WorkerDied(str(error)))
        elif error is not None:
            outer.set_exception(error)
        else:
            outer.set_result(finished.result())

    inner.add_done_callback(done)
    return outer


def _begin(alive: Connection) -> None:
    """Prepare a worker: Ctrl-C is the matter of the process that started it; it ends with that."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    threading.Thread(target=_follow, args=(alive,), daemon=True).start()


def _follow(alive: Connection) -> None:
    with suppress(EOFError, OSError):
        alive.recv_bytes()
    os._exit(1)
