"""A Dask cluster, for those who outgrow a machine; ``distributed`` is an optional dependency."""

from __future__ import annotations

from concurrent.futures import Future
from importlib import import_module
from typing import Any

from frontend_sim.errors import ScenarioError
from frontend_sim.replay.executors.base import WorkerDied
from frontend_sim.replay.executors.processes import cores
from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.work import Batch, run_batch

PATIENCE = 30
"""How long the scheduler and its first worker may take to answer [s]."""


class DaskCluster:
    """A cluster on this machine, or the one whose scheduler has an address.

    Workers need this package in the same version, and recordings at the same place; they send
    their records back, so that they need no disk in common.
    """

    deaths_per_loss = 3
    """Dask itself gives a batch to other workers before it gives it up."""

    def __init__(self, workers: int | None = None, scheduler: str | None = None) -> None:
        """Connect. Raises ScenarioError if Dask is not installed or no scheduler answers."""
        self._client, self._cluster = _connected(workers, scheduler)
        threads: dict[str, int] = self._client.nthreads()
        self.workers = max(1, sum(threads.values()))
        self._open: set[Any] = set()

    def submit(self, batch: Batch) -> Future[list[Outcome]]:
        """Hand in a batch, see ``Executor``."""
        inner = self._client.submit(run_batch, batch, pure=False)
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
        except BaseException as error:  # noqa: BLE001 - handed on, and raised where it is waited for
            if not outer.done():
                outer.set_exception(error)

    def close(self, now: bool) -> None:
        """Disconnect, and end a cluster that was started here, see ``Executor``."""
        if now and self._open:
            self._client.cancel(list(self._open))
        self._client.close()
        if self._cluster is not None:
            self._cluster.close()


def _connected(workers: int | None, scheduler: str | None) -> tuple[Any, Any]:
    """Return a client, and the cluster that was started for it, if one was."""
    try:
        dask: Any = import_module("distributed")
    except ImportError:
        raise ScenarioError(
            "the executor dask needs the package distributed: pip install 'frontend-sim[dask]'"
        ) from None
    if scheduler is None:
        cluster = dask.LocalCluster(
            n_workers=workers or cores(), threads_per_worker=1, dashboard_address=None
        )
        return dask.Client(cluster), cluster
    try:
        client = dask.Client(scheduler, timeout=PATIENCE)
        client.wait_for_workers(1, timeout=PATIENCE)
    except (OSError, TimeoutError, ValueError) as error:
        raise ScenarioError(
            f"no Dask scheduler with a worker answers at {scheduler!r}: {error}; check the address"
        ) from error
    return client, None
