"""A Dask cluster, for those who outgrow a machine; ``distributed`` is an optional dependency."""

from __future__ import annotations

import logging
import socket
import time
from collections.abc import Iterator
from concurrent.futures import Future
from contextlib import ExitStack, contextmanager, suppress
from importlib import import_module
from typing import Any

from frontend_sim.errors import ScenarioError
from frontend_sim.replay.executors.base import WorkerDied
from frontend_sim.replay.executors.processes import cores
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.work import Batch, CannotGoOn, run_batch

PATIENCE = 30
"""How long the scheduler and its first worker may take to answer [s]."""

TICK = 0.2
"""How often it is asked [s]."""

LOOK = 5.0
"""How often a cluster is asked for its workers [s]."""

LONGEST = 3600.0
"""How long a night waits for a worker where there is none [s]."""


class DaskCluster:
    """A cluster on this machine, or the one whose scheduler has an address.

    Workers need this package in the same version, and recordings at the same place; they send
    their records back, so that they need no disk in common.
    """

    deaths_per_loss = 3
    """Dask itself gives a batch to other workers before it gives it up."""

    def __init__(self, workers: int | None = None, scheduler: str | None = None) -> None:
        """Connect. Raises ScenarioError if Dask is not installed or no scheduler answers."""
        self._where = f"the scheduler at {scheduler}" if scheduler else "the cluster"
        dask = _dask()
        with ExitStack() as quiet:
            quiet.enter_context(_silenced())
            self._client, self._cluster = _connected(dask, workers, scheduler)
            self._quiet = quiet.pop_all()
        self._start = f"start some: dask worker {scheduler or 'ADDRESS'}"
        self._open: set[Any] = set()
        self._threads, self._looked = 0, -LOOK
        self._absent: tuple[float, str] | None = None
        self.waits_for()

    @property
    def workers(self) -> int:
        """How many batches are worked on at a time, by the workers that there are."""
        return max(1, self._threads)

    def waits_for(self) -> str:
        """Return since when there is no worker, see ``Executor``."""
        now = time.monotonic()
        if now - self._looked >= LOOK and self._client.status == "running":
            self._looked = now
            with suppress(Exception):  # a scheduler that went away shows in the batches
                self._threads = sum(self._client.nthreads().values())
                absent = self._absent or (now, time.strftime("%H:%M"))
                self._absent = None if self._threads else absent
        if self._absent is None:
            return ""
        begun, clock = self._absent
        told = f"{self._where} has no worker since {clock}"
        if now - begun > LONGEST:
            raise CannotGoOn(f"{told}; {self._start}")
        return f"{told}, and the night waits for one; {self._start}"

    def submit(self, batch: Batch) -> Future[list[Outcome]]:
        """Hand in a batch, see ``Executor``."""
        try:
            inner = self._client.submit(run_batch, batch, pure=False)
        except Exception as error:
            raise self._lost(error) from error
        outer: Future[list[Outcome]] = Future()
        self._open.add(inner)
        inner.add_done_callback(lambda finished: self._hand_on(finished, outer))
        return outer

    def _hand_on(self, finished: Any, outer: Future[list[Outcome]]) -> None:
        """Pass the result on; Dask calls this in a thread of its own."""
        killed: Any = import_module("distributed").KilledWorker
        self._open.discard(finished)
        try:
            outer.set_result(finished.result())
        except killed as error:
            outer.set_exception(WorkerDied(str(error)))
        except (CannotGoOn, MemoryError) as error:
            outer.set_exception(error)
        except BaseException as error:  # noqa: BLE001 - runs catch their own; it is the cluster's
            if not outer.done():
                outer.set_exception(self._lost(error))

    def _lost(self, error: BaseException) -> CannotGoOn:
        """Return that the cluster does no more runs."""
        if self._client.status != "running":
            return CannotGoOn(f"{self._where} does not answer any more; start it again")
        told = " ".join(f"{type(error).__name__}: {error}".split())
        return CannotGoOn(
            f"a worker of {self._where} cannot do the runs: {told}; install this program on all "
            "workers, in the same version"
        )

    def close(self, now: bool) -> None:
        """Disconnect, and end a cluster that was started here, see ``Executor``."""
        if now and self._open:
            self._client.cancel(list(self._open))
        self._client.close()
        if self._cluster is not None:
            self._cluster.close()
        self._quiet.close()


@contextmanager
def _silenced() -> Iterator[None]:
    """Let Dask tell its tracebacks to nobody: what matters comes as an exception."""
    loggers = [logging.getLogger(name) for name in ("distributed", "distributed.client")]
    levels = [logger.level for logger in loggers]
    for logger in loggers:
        logger.setLevel(logging.CRITICAL)
    try:
        yield
    finally:
        for logger, level in zip(loggers, levels, strict=True):
            logger.setLevel(level)


def _dask() -> Any:
    try:
        return import_module("distributed")
    except ImportError:
        raise ScenarioError(
            "the executor dask needs a package that is not installed: pip install distributed"
        ) from None


def _connected(dask: Any, workers: int | None, scheduler: str | None) -> tuple[Any, Any]:
    """Return a client, and the cluster that was started for it, if one was."""
    if scheduler is None:
        try:
            cluster = dask.LocalCluster(
                n_workers=workers or cores(),
                threads_per_worker=1,
                dashboard_address=None,
                silence_logs=logging.CRITICAL,  # of the workers, whose coordinator may be killed
            )
        except (OSError, RuntimeError) as error:
            told = " ".join(f"{error}".split())
            raise ScenarioError(
                f"a Dask cluster cannot be started here: {told}; take fewer workers, or the "
                "executor processes"
            ) from error
        return dask.Client(cluster), cluster
    try:
        _await_listener(scheduler)
        client = dask.Client(scheduler, timeout=PATIENCE)
    except (OSError, ValueError, TypeError) as error:
        raise ScenarioError(
            f"no Dask scheduler answers at {scheduler!r}: {error}; check the address, which is "
            "such as tcp://192.168.0.7:8786"
        ) from error
    try:
        client.wait_for_workers(1, timeout=PATIENCE)
    except TimeoutError:
        client.close()
        raise ScenarioError(
            f"the Dask scheduler at {scheduler!r} has no worker; start some: dask worker ADDRESS"
        ) from None
    return client, None


def _await_listener(address: str) -> None:
    """Wait until something listens at an address; a client that finds nothing cannot be closed.

    Raises
    ------
    OSError
        If nothing does in time.
    ValueError
        If it is no address.
    """
    addressing: Any = import_module("distributed.comm.addressing")
    _, place = addressing.parse_address(address)
    host, port = addressing.parse_host_port(place)
    until = time.monotonic() + PATIENCE
    while True:
        try:
            socket.create_connection((host, port), timeout=PATIENCE).close()
            return
        except OSError:
            if time.monotonic() > until:
                raise
            time.sleep(TICK)
