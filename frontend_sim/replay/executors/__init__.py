"""Where the runs of a set are done, behind one narrow seam."""

from __future__ import annotations

from collections.abc import Callable
from typing import Literal

from frontend_sim.errors import ScenarioError, nearest
from frontend_sim.replay.executors.base import Executor
from frontend_sim.replay.executors.cluster import DaskCluster
from frontend_sim.replay.executors.in_process import InProcess
from frontend_sim.replay.executors.processes import Processes, cores

ExecutorName = Literal["processes", "in-process", "dask"]

EXECUTORS: dict[str, Callable[[int | None, str | None], Executor]] = {
    "processes": lambda workers, scheduler: Processes(workers),
    "in-process": lambda workers, scheduler: InProcess(),
    "dask": DaskCluster,
}
"""Name -> what makes it from the number of workers and the address of a scheduler."""


def executor(
    name: str = "processes", workers: int | None = None, scheduler: str | None = None
) -> Executor:
    """Return an executor, ready to take batches.

    Parameters
    ----------
    name : one of ``EXECUTORS``
    workers : how many; left out, one for each core
    scheduler : address of a Dask scheduler; left out, a cluster on this machine

    Raises
    ------
    ScenarioError
        If there is no such executor, or it cannot be had with these parameters.
    """
    if name not in EXECUTORS:
        raise ScenarioError(f"there is no executor {name!r}{nearest(name, EXECUTORS)}")
    if scheduler is not None and name != "dask":
        raise ScenarioError("a scheduler has a meaning for the executor dask only")
    if workers is not None and workers < 1:
        raise ScenarioError(f"given {workers} workers; at least one is needed")
    return EXECUTORS[name](workers, scheduler)


__all__ = ["EXECUTORS", "Executor", "ExecutorName", "cores", "executor"]
