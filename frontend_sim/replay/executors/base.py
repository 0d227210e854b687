"""The seam: batches go in, futures come out."""

from __future__ import annotations

from concurrent.futures import Future
from typing import Protocol

from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.work import Batch


class WorkerDied(Exception):  # noqa: N818 - it is what happened, and no user meets it
    """The worker died that had a batch; the batch is lost and nothing else is."""


class Executor(Protocol):
    """Runs batches, in the manner of ``concurrent.futures``.

    The outcome of a run depends on the run alone, never on the executor, so that another one is a
    matter of speed.
    """

    @property
    def workers(self) -> int:
        """How many batches are worked on at a time."""

    @property
    def deaths_per_loss(self) -> int:
        """How many workers died when a batch is given up."""

    def submit(self, batch: Batch) -> Future[list[Outcome]]:
        """Hand in a batch; the future raises ``WorkerDied`` where its worker did.

        Raises CannotGoOn where nobody can take it any more.
        """

    def waits_for(self) -> str:
        """Return what is missing so that nothing is done, and what to do; "" where all is well.

        Raises CannotGoOn where that lasts too long.
        """

    def close(self, now: bool) -> None:
        """End all workers; ``now`` without waiting for what they are doing."""
