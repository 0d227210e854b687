"""All runs one after the other in this very process: for small sets, and to look inside."""

from __future__ import annotations

from concurrent.futures import Future

from frontend_sim.replay.outcome import Outcome
from frontend_sim.replay.work import Batch, run_batch


class InProcess:
    """Runs a batch when it is handed in."""

    workers = 1
    deaths_per_loss = 1

    def submit(self, batch: Batch) -> Future[list[Outcome]]:
        """Run a batch, see ``Executor``."""
        future: Future[list[Outcome]] = Future()
        try:
            future.set_result(run_batch(batch))
        except Exception as error:  # noqa: BLE001 - it is raised where the future is asked
            future.set_exception(error)
        return future

    def waits_for(self) -> str:
        """Return that all is well."""
        return ""

    def close(self, now: bool) -> None:
        """Do nothing: there is nothing to end."""
